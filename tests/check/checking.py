"""Run a check in a test: the whole one, or a short one that still meets every run."""

from __future__ import annotations

from functools import partial
from pathlib import Path

from behavgen.check import preparation, runs
from behavgen.check.check import check
from behavgen.check.verdict import CheckReport
from behavgen.check.wishes import Wishes
from behavgen.emit.emitted_file import EmittedFile
from behavgen.emit.systemverilog import systemverilog
from behavgen.model import ComparatorModel

__all__ = ["checked", "emitted_text", "failures", "shorten"]


def emitted_text(model: ComparatorModel) -> str:
    """Return the emitted SystemVerilog."""
    return systemverilog(model).text


def checked(
    model: ComparatorModel, folder: Path, text: str = "", *, questions=("decisions",),
    wishes=None, **options,
) -> CheckReport:  # fmt: skip
    """Check a text, by default the one that the model emits, and by default decisions alone."""
    file = EmittedFile(path=f"{model.cell.name}.sv", text=text or emitted_text(model))
    wishes = Wishes(questions=questions, **(wishes or {}))
    return check(model, file, folder=folder, wishes=wishes, **options)


def shorten(monkeypatch) -> None:
    """Let every run have few decisions; strata are short then, disagreements remain."""
    monkeypatch.setattr(runs, "FEWEST_DECISIONS", 200)
    short = partial(runs.plan_batches, decisions=1)
    monkeypatch.setattr(preparation, "plan_batches", short)


def failures(report: CheckReport) -> list[str]:
    """Return what failed in words, for a message of pytest."""
    benches = [f"{bench.name}: {bench.message}" for bench in report.benches if not bench.passed]
    short = [f"short: {s.group} {s.name} {s.decisions}" for s in report.strata if s.short]
    return [*benches, *short, *map(str, report.disagreements[:3])]
