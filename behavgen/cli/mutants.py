"""Mutants of the emitted text, as the command ``check`` tells of them."""

from __future__ import annotations

from collections import Counter
from dataclasses import asdict, replace
from typing import TYPE_CHECKING

from behavgen.cli.cells import CellResult
from behavgen.cli.parser import Options
from behavgen.cli.terminal import Terminal
from behavgen.cli.wording import behind, labelled
from behavgen.pipeline import CellPlace, emit_cell, fit_cell, mutate_cell

if TYPE_CHECKING:
    from behavgen.check.mutation.summary import MutationSummary

__all__ = ["mutated_too"]


def mutated_too(
    place: CellPlace, result: CellResult, options: Options, terminal: Terminal
) -> CellResult:
    """Try mutants of a cell's text and add what came of it to what a check found."""
    with terminal.progress(f"changing {place.name}") as progress:
        found = mutate_cell(
            emit_cell(fit_cell(place)), sample=options.mutants or None, jobs=options.jobs,
            progress=progress,
        )  # fmt: skip
    return replace(
        result,
        lines=[*result.lines, *_lines(found)],
        more=[*result.more, *behind("excused", [f"{e.change}: {e.reason}" for e in found.excused])],
        data={**result.data, "mutants": asdict(found)},
        agrees=result.agrees and not found.missed,
    )


def _lines(found: MutationSummary) -> list[str]:
    reasons = Counter(one.reason for one in found.excused)
    return [
        *labelled("mutants", found.words),
        *behind("alike", [f"{number}: {reason}" for reason, number in reasons.most_common()]),
        *behind("missed", list(found.missed)),
    ]
