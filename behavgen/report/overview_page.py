"""The page of all cells: who passed, and what wants a look."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from markupsafe import Markup

from behavgen.report.html import csp_hash, html_environment, shipped_text
from behavgen.report.numbers import count_text

__all__ = ["OverviewCell", "OverviewNote", "Tally", "overview_page"]

_PASSED, _LOOK, _FAILED = "passed", "stale", "failed"
"""Statuses as the style sheet names them; in the middle what passed but wants a look."""


@dataclass(frozen=True, slots=True, kw_only=True)
class OverviewNote:
    """One thing found of a cell.

    Parameters
    ----------
    status : str
        ``"passed"``, ``"stale"`` (wants a look) or ``"failed"``.
    subject, message : str
    places : tuple of str
        Files and lines to look at.
    """

    status: str
    subject: str
    message: str
    places: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class OverviewCell:
    """One cell.

    Parameters
    ----------
    name, description : str
    status : str
        As of a note.
    verdict : str
        In few words.
    notes : tuple of OverviewNote
        What wants a look, the worst first.
    consequences : tuple of (str, str, str)
        What a drift does: the number, what it was, what it is.
    links : tuple of (str, str)
        Words and a path relative to the page.
    """

    name: str
    description: str
    status: str
    verdict: str
    notes: tuple[OverviewNote, ...] = ()
    consequences: tuple[tuple[str, str, str], ...] = ()
    links: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Tally:
    """How many cells came out alike."""

    status: str
    words: str


@dataclass(frozen=True, slots=True, kw_only=True)
class _Content:
    """Everything the template prints."""

    title: str
    status: str
    headline: str
    tallies: tuple[Tally, ...]
    cells: tuple[OverviewCell, ...]
    gone: tuple[str, ...]
    cautions: tuple[str, ...]
    trends: str
    footer: str


def overview_page(
    cells: Sequence[OverviewCell],
    *,
    title: str,
    gone: Sequence[str] = (),
    cautions: Sequence[str] = (),
    trends: str = "",
    footer: str = "",
) -> str:
    """Return one self-contained HTML page; it runs no script and loads nothing.

    Parameters
    ----------
    cells : sequence of OverviewCell
    title : str
        Of the project.
    gone : sequence of str
        Recorded cells that the project has no more.
    cautions : sequence of str
        Full sentences.
    trends : str
        Path of the page of trends relative to this one; "" where there is none.
    footer : str
    """
    failed = bool(gone) or any(cell.status == _FAILED for cell in cells)
    content = _Content(
        title=title,
        status=_FAILED if failed else _PASSED,
        headline="Not passed" if failed else "Passed",
        tallies=_tallies(cells),
        cells=tuple(cells),
        gone=tuple(gone),
        cautions=tuple(cautions),
        trends=trends,
        footer=footer,
    )
    style = shipped_text("report/style.css").strip()
    template = html_environment().get_template("report/overview.html")
    return template.render(content=content, style=Markup(style), style_hash=csp_hash(style))


def _tallies(cells: Sequence[OverviewCell]) -> tuple[Tally, ...]:
    words = {_FAILED: "failed", _LOOK: "passed, want a look", _PASSED: "passed"}
    counts = {status: sum(cell.status == status for cell in cells) for status in words}
    return tuple(
        Tally(status=status, words=f"{count_text(count)} {words[status]}")
        for status, count in counts.items()
        if count
    )
