"""A run -> the page of all cells."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from behavgen.condition_words import condition_words
from behavgen.regress.findings import Finding, Spot
from behavgen.regress.verdict import CellVerdict, RunVerdict
from behavgen.regress.words import estimate_words
from behavgen.report.overview_page import (
    OverviewCell,
    OverviewNote,
    overview_page,
)

__all__ = ["overview_html"]

_STATUS = {
    "passed": "passed",
    "note": "stale",
    "warning": "stale",
    "failed": "failed",
    "error": "failed",
}
_VERDICTS = {"failed": "not passed", "stale": "passed, wants a look", "passed": "passed"}
_MOST_PLACES = 5


def overview_html(
    run: RunVerdict,
    findings: Sequence[Finding],
    *,
    title: str,
    links: Mapping[str, Sequence[tuple[str, str]]],
    cautions: Sequence[str] = (),
) -> str:
    """Return the page.

    Parameters
    ----------
    run : RunVerdict
    findings : sequence of Finding
        Those of the run.
    title : str
    links : mapping
        Cell to words and paths relative to the page.
    cautions : sequence of str
        Full sentences.
    """
    of_cell: dict[str, list[Finding]] = {}
    for finding in findings:
        if finding.level != "passed":
            of_cell.setdefault(finding.cell, []).append(finding)
    cells = [
        _cell(cell, of_cell.get(cell.name, []), tuple(links.get(cell.name, ())))
        for cell in run.cells
    ]
    return overview_page(
        cells,
        title=title,
        gone=run.gone,
        cautions=cautions,
        trends="trends.html",
        footer="behavgen",
    )


def _cell(
    cell: CellVerdict, findings: Sequence[Finding], links: tuple[tuple[str, str], ...]
) -> OverviewCell:
    notes = [_note(finding) for finding in findings]
    notes.sort(key=lambda note: note.status != "failed")
    statuses = {note.status for note in notes}
    status = next((s for s in ("failed", "stale") if s in statuses), "passed")
    consequences = cell.comparison.consequences if cell.comparison else ()
    return OverviewCell(
        name=cell.name,
        description=cell.description,
        status=status,
        verdict=_VERDICTS[status],
        notes=tuple(notes),
        consequences=tuple(
            (
                f"{one.what}, {condition_words(one.condition)}".rstrip(", "),
                estimate_words(one.old, one.unit),
                estimate_words(one.new, one.unit),
            )
            for one in consequences
        ),
        links=links,
    )


def _note(finding: Finding) -> OverviewNote:
    return OverviewNote(
        status=_STATUS[finding.level],
        subject=finding.subject,
        message=finding.message,
        places=tuple(_place(spot) for spot in finding.spots[:_MOST_PLACES] if spot.file),
    )


def _place(spot: Spot) -> str:
    place = spot.file if spot.line is None else f"{spot.file}:{spot.line}"
    return f"{place} ({spot.words})" if spot.words else place
