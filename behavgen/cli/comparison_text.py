"""How the command line writes what became of a cell."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import TYPE_CHECKING

from behavgen.cli.terminal import aligned
from behavgen.cli.wording import behind, labelled

if TYPE_CHECKING:
    from behavgen.regress.comparison import Comparison, DrivingRow
    from behavgen.regress.findings import Finding
    from behavgen.regress.since import Since

__all__ = ["comparison_lines", "finding_lines", "quiet_lines", "since_lines"]

_LABELS = {
    "interface": "interface",
    "drift": "drift",
    "limit": "limits",
    "check": "check",
    "inputs": "refused",
    "baseline": "baseline",
    "provenance": "look at",
}
_SHOWN_ROWS = 5


def finding_lines(findings: Iterable[Finding]) -> Iterator[str]:
    """Yield what deserves attention, and in one line what does not."""
    listed = list(findings)
    for kind, label in _LABELS.items():
        mine = [finding for finding in listed if finding.kind == kind]
        label_here = label
        for finding in mine:
            if finding.level == "passed" and kind == "drift":
                continue
            subject = "" if kind in ("provenance", "inputs") else f"{finding.subject}: "
            yield from labelled(label_here, f"{subject}{finding.message}")
            label_here = ""
        if calm := _calm_drifts(mine):
            yield from labelled(label_here, calm)


def quiet_lines(findings: Iterable[Finding]) -> Iterator[str]:
    """Yield the drifts that noise explains, for readers who ask for more."""
    for finding in findings:
        if finding.kind == "drift" and finding.level == "passed":
            yield from labelled("", f"{finding.subject}: {finding.message}")


def comparison_lines(comparison: Comparison) -> Iterator[str]:
    """Yield the rows that drive a drift and what the drift does."""
    from behavgen.condition_words import condition_words  # noqa: PLC0415
    from behavgen.regress.words import estimate_words  # noqa: PLC0415  numpy

    rows = [
        (row.place or row.quantity, row.residual_text, condition_words(row.condition))
        for row in _first_of_each(comparison)
    ]
    yield from behind("rows", aligned(rows, indent=0))
    by_place: dict[str, list[tuple[str, str, str]]] = {}
    for one in comparison.consequences:
        old, new = (estimate_words(estimate, one.unit) for estimate in (one.old, one.new))
        by_place.setdefault(condition_words(one.condition), []).append((one.what, old, f"-> {new}"))
    label = "so"
    for where, lines in by_place.items():
        yield from labelled(label, f"in {where}" if where else "everywhere")
        yield from behind("", aligned(lines, indent=2))
        label = ""


def since_lines(changes: Iterable[Since]) -> Iterator[str]:
    """Yield what the headline was in a past run and is now."""
    from behavgen.regress.words import number_words, share_words  # noqa: PLC0415

    rows = []
    for one in changes:
        old, new = one.old.value, one.new.value
        share = share_words((new - old) / abs(old)) if old else ""
        words = [number_words(value, one.unit) for value in (old, new)]
        rows.append((one.parameter, words[0], f"-> {words[1]}", share))
    yield from behind("since", aligned(rows, indent=0))


def _first_of_each(comparison: Comparison) -> Iterator[DrivingRow]:
    seen: dict[str, int] = {}
    for row in comparison.rows:
        seen[row.quantity] = seen.get(row.quantity, 0) + 1
        if seen[row.quantity] <= _SHOWN_ROWS:
            yield row


def _calm_drifts(findings: Iterable[Finding]) -> str:
    """Name the quantities that have not moved, or by no more than noise."""
    groups: dict[str, list[str]] = {"the same": [], "within noise": []}
    for finding in findings:
        if finding.kind == "drift" and finding.level == "passed":
            group = "within noise" if finding.message.startswith("within noise") else "the same"
            groups[group].append(finding.subject)
    return "; ".join(f"{words}: {', '.join(names)}" for words, names in groups.items() if names)
