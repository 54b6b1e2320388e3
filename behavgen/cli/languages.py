"""The comparison of languages, as the command ``check`` tells it."""

from __future__ import annotations

from dataclasses import asdict, replace
from typing import TYPE_CHECKING

from behavgen.cli.cells import CellResult
from behavgen.cli.terminal import Terminal
from behavgen.cli.wording import behind
from behavgen.pipeline import CellPlace, compare_cell, emit_cell, fit_cell

if TYPE_CHECKING:
    from behavgen.check.languages import LanguageColumn, LanguageComparison

__all__ = ["compared_too"]


def compared_too(place: CellPlace, result: CellResult, terminal: Terminal) -> CellResult:
    """Run a cell's languages side by side and add what came of it to what a check found."""
    with terminal.progress(f"comparing {place.name}") as progress:
        comparison = compare_cell(emit_cell(fit_cell(place)), progress=progress)
    return replace(
        result,
        lines=[*result.lines, *_lines(comparison)],
        data={**result.data, "languages": asdict(comparison)},
        agrees=result.agrees and comparison.passed,
    )


def _lines(comparison: LanguageComparison) -> list[str]:
    return behind("languages", [_words(column) for column in comparison.columns])


def _words(column: LanguageColumn) -> str:
    if not column.outcomes:
        return f"{column.language}: {column.simulator} {column.problem}; see behavgen tools"
    agreeing = sum(outcome.agrees for outcome in column.outcomes)
    return (
        f"{column.language}: {agreeing} of {len(column.outcomes)} decisions agree within "
        f"{column.tolerance} ({column.version})"
    )
