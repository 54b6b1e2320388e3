"""The command ``demo``: the whole path on the built-in invented project."""

from __future__ import annotations

import shlex
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from statistics import median

from behavgen.check.verdict import CheckReport
from behavgen.cli.cells import number_of
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import labelled, percent_text, shown_path
from behavgen.demo import copy_demo
from behavgen.errors import ToolError
from behavgen.model import ComparatorModel
from behavgen.pipeline import (
    CellPlace,
    EmittedCell,
    check_cell,
    emit_cell,
    fit_cell,
    report_cell,
)
from behavgen.project import load_project

ABOUT = """\
Lay out an invented project and take it from its tables to checked models and their
report pages. Nothing in it describes a real circuit. Needs a simulator for the check."""
ARGUMENTS = ""
EXAMPLE = "behavgen demo --out look_at_this"

CONVERTER_PAGE = "converter.html"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Walked:
    """One cell of the demo at the end of its way; no `check` where no simulator is."""

    emitted: EmittedCell
    check: CheckReport | None

    @property
    def place(self) -> CellPlace:
        return self.emitted.place


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    parser.add_argument("--out", metavar="DIR", help=f"where to (default: {Options.out})")


def run(options: Options, terminal: Terminal) -> Outcome:
    """Walk all steps, one after the other, over all cells."""
    project = load_project(copy_demo(Path(options.folder, options.out)))
    places = [CellPlace(project=project, settings=cell) for cell in project.cells]
    _tell(terminal, "project", [f"{shown_path(project.file)}   its numbers are invented"])
    fitted = [fit_cell(place) for place in places]
    _tell(terminal, "tables", [_tables_text(cell.model) for cell in fitted])
    _tell(terminal, "fit", [_fit_text(cell.model) for cell in fitted])
    emitted = [emit_cell(cell) for cell in fitted]
    _tell(terminal, "emit", [shown_path(path) for cell in emitted for path in cell.paths])
    walked, missing = _check_all(emitted, options, terminal)
    pages = [report_cell(cell.emitted, cell.check).place.report_file for cell in walked]
    _tell(terminal, "report", [shown_path(page) for page in pages])
    converter_agrees = missing != () or _show_converter(walked[0].emitted, terminal)
    return _outcome(walked, missing, converter_agrees=converter_agrees)


def _show_converter(emitted: EmittedCell, terminal: Terminal) -> bool:
    """Place a cell in a converter; tell and return whether it does what its closed form says."""
    from behavgen.handoff.examples.show import show_converter  # noqa: PLC0415  scipy

    page = emitted.place.folder / CONVERTER_PAGE
    with terminal.progress("simulating a converter"):
        found = show_converter(emitted.model, page)
    agrees = "agrees with" if found.agrees else "DISAGREES with"
    text = (
        f"{emitted.place.name} in a SAR converter: {found.measured[0]:.2f} effective bits without "
        f"noise, {found.measured[-1]:.2f} with a sigma of one LSB; {agrees} its closed form"
    )
    _tell(terminal, "converter", [text, shown_path(page)])
    return found.agrees


def _check_all(
    emitted: Sequence[EmittedCell], options: Options, terminal: Terminal
) -> tuple[list[_Walked], tuple[ToolError, ...]]:
    """Check every cell; without a simulator the others steps still go on."""
    walked: list[_Walked] = []
    for cell in emitted:
        try:
            with terminal.progress(f"simulating {cell.place.name}") as progress:
                report = check_cell(cell, jobs=options.jobs, progress=progress).report
        except ToolError as error:
            _tell(terminal, "check", ["left out: no simulator"])
            return [_Walked(emitted=cell, check=None) for cell in emitted], (error,)
        _tell(terminal, "" if walked else "check", [_check_text(report)])
        walked.append(_Walked(emitted=cell, check=report))
    return walked, ()


def _outcome(
    walked: Sequence[_Walked], missing: tuple[ToolError, ...], *, converter_agrees: bool
) -> Outcome:
    against = tuple(c.place.name for c in walked if c.check is not None and not c.check.passed)
    said = f"{number_of(len(walked), 'cell')} from tables to report"
    if missing:
        said += ", but unchecked"
    if against:
        said += f"; the check fails for {', '.join(against)}"
    if not converter_agrees:
        said += "; the converter disagrees with its closed form"
        against = (*against, "converter")
    return Outcome(
        said=said,
        next_step=_next_step(walked[0].place, missing=bool(missing), failed=bool(against)),
        data={"cells": {cell.place.name: _as_data(cell) for cell in walked}},
        errors=missing,
        disagreements=against,
        shows_results=True,
    )


def _next_step(place: CellPlace, *, missing: bool, failed: bool) -> str:
    if missing:
        return "behavgen tools"
    if failed:
        return shlex.join(("behavgen", "-C", shown_path(place.project.file.parent), "check"))
    page = shown_path(place.report_file)
    return f"open {page}, then behavgen new DIR --from YOUR_TABLE.csv"


def _as_data(cell: _Walked) -> dict[str, object]:
    check = cell.check
    return {
        "model": shown_path(cell.place.model_file),
        "files": [shown_path(path) for path in cell.emitted.paths],
        "report": shown_path(cell.place.report_file),
        "check": None if check is None
        else {"passed": check.passed, "decisions": check.decisions, "simulator": check.simulator},
    }  # fmt: skip


def _tell(terminal: Terminal, label: str, texts: Sequence[str]) -> None:
    for index, text in enumerate(texts):
        for line in labelled("" if index else label, text):
            terminal.say(line)
    terminal.flush()


def _tables_text(model: ComparatorModel) -> str:
    rows: dict[str, int] = {}
    for source in model.sources:
        rows[source.quantity] = rows.get(source.quantity, 0) + source.rows
    listed = ", ".join(f"{quantity} {count}" for quantity, count in rows.items())
    return f"{model.cell.name}: rows {listed}"


def _fit_text(model: ComparatorModel) -> str:
    errors = [
        fit.rms_relative
        for fit in model.fits
        if fit.quantity == "delay" and fit.rms_relative is not None
    ]
    if model.delay is None or not errors:
        return model.cell.name
    return (
        f"{model.cell.name}: {model.delay.law}; error rms {percent_text(median(errors))} median, "
        f"{percent_text(max(errors))} worst of {number_of(len(errors), 'condition')}"
    )


def _check_text(report: CheckReport) -> str:
    against = report.disagreement_count or "none"
    text = f"{report.cell}: {report.decisions} decisions in {report.simulator}, {against} wrong"
    if report.passed:
        return text
    failed = sum(not bench.passed for bench in report.benches)
    return f"{text}; the check fails, with {failed} of {len(report.benches)} benches"
