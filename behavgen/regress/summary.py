"""A run in Markdown, for the page that a CI system shows of a job."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Sequence

from behavgen.condition_words import condition_words
from behavgen.regress.findings import Finding
from behavgen.regress.verdict import CellVerdict, RunVerdict
from behavgen.regress.words import estimate_words

__all__ = ["markdown_summary"]

_MOST_CELLS = 200
_MOST_FINDINGS = 20
_MOST_SPOTS = 5
_SPECIAL = re.compile(r"([\\`*_{}\[\]<>|#])")
_MARKS = {"failed": "failed", "error": "error", "warning": "warning", "note": "note"}


def markdown_summary(run: RunVerdict, findings: Sequence[Finding], *, caution: str) -> str:
    """Return the summary: the verdict, the cells that want a look, the caution.

    Parameters
    ----------
    run : RunVerdict
    findings : sequence of Finding
        Those of the run.
    caution : str
        One sentence for the end.
    """
    lines = [
        f"## Comparator models: {'passed' if run.passed else 'NOT passed'}",
        "",
        *_verdict(run),
        "",
        *_cells(run, findings),
        f"*{_escaped(caution)}*",
    ]
    return "\n".join(lines) + "\n"


def _verdict(run: RunVerdict) -> Iterator[str]:
    failed = [cell.name for cell in run.cells if not cell.passed]
    yield f"{len(run.cells)} cells, {len(failed)} not passed."
    for name in run.gone:
        yield f"\n- **{_escaped(name)}** is in the baseline, but no longer in the project."


def _cells(run: RunVerdict, findings: Sequence[Finding]) -> Iterator[str]:
    by_cell: dict[str, list[Finding]] = {}
    for finding in findings:
        if finding.level in _MARKS:
            by_cell.setdefault(finding.cell, []).append(finding)
    noted = [cell for cell in run.cells if cell.name in by_cell]
    noted.sort(key=lambda cell: cell.passed)  # those that failed first
    for cell in noted[:_MOST_CELLS]:
        yield from _cell(cell, by_cell[cell.name])
    if len(noted) > _MOST_CELLS:
        yield f"And {len(noted) - _MOST_CELLS} more cells; the page and the JSON have them all."
        yield ""


def _cell(cell: CellVerdict, findings: Sequence[Finding]) -> Iterator[str]:
    yield f"### {_escaped(cell.name)}: {'passed' if cell.passed else 'NOT passed'}"
    yield ""
    for finding in findings[:_MOST_FINDINGS]:
        yield f"- **{_MARKS[finding.level]}**, {_escaped(finding.subject)}: " + _escaped(
            finding.message
        )
        for spot in finding.spots[:_MOST_SPOTS]:
            if spot.file:
                place = spot.file if spot.line is None else f"{spot.file}:{spot.line}"
                yield f"  - {_escaped(f'{place} {spot.words}'.rstrip())}"
    if len(findings) > _MOST_FINDINGS:
        yield f"- and {len(findings) - _MOST_FINDINGS} more"
    yield ""
    yield from _consequences(cell)


def _consequences(cell: CellVerdict) -> Iterable[str]:
    if cell.comparison is None or not cell.comparison.consequences:
        return []
    rows = [
        (
            f"{one.what}, {condition_words(one.condition)}",
            estimate_words(one.old, one.unit),
            estimate_words(one.new, one.unit),
        )
        for one in cell.comparison.consequences
    ]
    lines = ["| number | baseline | now |", "|---|---|---|"]
    lines += ["| " + " | ".join(map(_escaped, row)) + " |" for row in rows]
    return [*lines, ""]


def _escaped(text: str) -> str:
    """Return a text whose characters mean themselves (CommonMark 0.31, 2.4)."""
    return _SPECIAL.sub(r"\\\1", text.replace("\n", " "))
