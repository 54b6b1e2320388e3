"""A verdict as a flat list: what was looked at, what was found, and where to look.

Everything that is written for people and for CI systems is made from it.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from behavgen.condition_words import condition_words
from behavgen.limits import quantity_words
from behavgen.regress.comparison import (
    DRIVEN_BY,
    Comparison,
    DrivingRow,
    InterfaceChange,
    QuantityDrift,
)
from behavgen.regress.verdict import (
    MET,
    NOT_MET,
    UNCHARACTERISED,
    CellVerdict,
    LimitVerdict,
    RunVerdict,
)
from behavgen.regress.words import (
    drift_words,
    estimate_words,
)

__all__ = [
    "KINDS",
    "LEVELS",
    "Finding",
    "Spot",
    "cell_findings",
    "comparison_findings",
    "run_findings",
]

LEVELS = ("passed", "note", "warning", "failed", "error")
"""From what is fine to what could not be looked at; ``failed`` and ``error`` fail a run."""

KINDS = {
    "interface": "the emitted modules keep their ports, parameters and codes",
    "drift": "fitted numbers stay where the baseline has them, but for noise and agreed drift",
    "limit": "numbers obey the limits in the project file",
    "check": "the emitted model does what its reference says",
    "inputs": "tables can be read and fitted",
    "baseline": "the recorded models and the project have the same cells",
    "provenance": "the tables of a cell belong together",
}
"""Kinds of findings and what holds where they pass."""

_MOST_SPOTS = 10


@dataclass(frozen=True, slots=True, kw_only=True)
class Spot:
    """A place in a file of the user's; `file` is relative to the project file's folder.

    An empty `file` is the project file itself; `line` None is the whole file.
    """

    file: str = ""
    line: int | None = None
    words: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One thing that was looked at.

    Parameters
    ----------
    cell, kind, subject : str
        What: ``"latch_a"``, a key of `KINDS`, and e.g. ``"delay"``.
    level : str
        One of `LEVELS`.
    message : str
        What was found, one sentence without its full stop.
    spots : tuple of Spot
        Where to look, the most telling place first.
    """

    cell: str
    kind: str
    subject: str
    level: str
    message: str
    spots: tuple[Spot, ...] = ()

    @property
    def fails(self) -> bool:
        """Whether it fails a run."""
        return self.level in ("failed", "error")


def run_findings(run: RunVerdict) -> tuple[Finding, ...]:
    """Return the findings of all cells, then the cells that are gone."""
    gone = (
        Finding(
            cell=name,
            kind="baseline",
            subject="cell",
            level="failed",
            message="recorded in the baseline, but no longer in the project",
            spots=(Spot(),),
        )
        for name in run.gone
    )
    return (*(finding for cell in run.cells for finding in cell_findings(cell)), *gone)


def cell_findings(cell: CellVerdict) -> tuple[Finding, ...]:
    """Return everything that was looked at in one cell."""
    return tuple(_findings(cell))


def _findings(cell: CellVerdict) -> Iterator[Finding]:
    for fault in cell.error.faults if cell.error else ():
        spot = Spot(file=fault.file, line=fault.row)
        yield Finding(cell=cell.name, kind="inputs", subject=fault.column or "tables",
                      level="error", message=str(fault), spots=(spot,))  # fmt: skip
    if cell.comparison is not None:
        yield from comparison_findings(cell.name, cell.comparison, line=cell.line)
    for verdict in cell.limits:
        yield _limit_finding(cell.name, verdict)
    if cell.check is not None:
        said = "agrees" if cell.check.passed else "disagrees"
        yield Finding(
            cell=cell.name,
            kind="check",
            subject="emitted model",
            level="passed" if cell.check.passed else "failed",
            message=f"{said} with the reference over {cell.check.decisions} decisions",
            spots=(_cell_spot(cell.line),),
        )
    for notice in cell.notices:
        yield Finding(cell=cell.name, kind="provenance", subject="tables", level="warning",
                      message=notice, spots=(_cell_spot(cell.line),))  # fmt: skip


def comparison_findings(cell: str, comparison: Comparison, *, line: int = 0) -> Iterator[Finding]:
    """Yield what a comparison found: interface, then numbers, then what else to know."""
    here = _cell_spot(line)
    for change in comparison.interface:
        yield _interface_finding(cell, change, here)
    if not comparison.interface:
        yield Finding(cell=cell, kind="interface", subject="module", level="passed",
                      message="unchanged")  # fmt: skip
    for quantity in comparison.quantities:
        rows = _rows_of(quantity, comparison.rows)
        yield _drift_finding(cell, quantity, rows, here)
    for notice in comparison.notices:
        yield Finding(cell=cell, kind="provenance", subject="tables", level="warning",
                      message=notice, spots=(here,))  # fmt: skip


def _cell_spot(line: int) -> Spot:
    return Spot(line=line or None)


def _interface_finding(cell: str, change: InterfaceChange, here: Spot) -> Finding:
    if change.breaks:
        message = f"interface break: {change.old} -> {change.new}"
        return Finding(cell=cell, kind="interface", subject=change.what, level="failed",
                       message=message, spots=(here,))  # fmt: skip
    return Finding(cell=cell, kind="interface", subject=change.what, level="note",
                   message=f"added: {change.new}", spots=(here,))  # fmt: skip


_LEVEL_OF = {
    "same": "passed",
    "within noise": "passed",
    "within limit": "note",
    "beyond": "failed",
}


def _drift_finding(
    cell: str, quantity: QuantityDrift, rows: Iterable[DrivingRow], here: Spot
) -> Finding:
    spots = [
        Spot(file=row.file, line=row.line, words=f"{row.residual_text} from the old model")
        for row in rows
        if row.file
    ]
    level = _LEVEL_OF[quantity.state]
    if quantity.presence == "gained":
        level = "note"
    return Finding(
        cell=cell,
        kind="drift",
        subject=quantity_words(quantity.of),
        level=level,
        message=_drift_message(quantity),
        spots=(*spots[:_MOST_SPOTS], here) if level in ("note", "failed") else (),
    )


def _drift_message(quantity: QuantityDrift) -> str:
    leading = quantity.leading
    if quantity.presence == "lost":
        return "was characterised, is not now"
    if leading is None:
        return "characterised now, not before" if quantity.presence == "gained" else "not compared"
    if quantity.state == "same":
        return "the same"
    if quantity.state == "within noise":
        return f"within noise, at most {drift_words(leading)}"
    count = sum(drift.state == quantity.state for drift in quantity.drifts)
    share = f"{count} of {quantity.compared} compared numbers"
    if quantity.state == "within limit":
        limit = quantity.limit.text if quantity.limit else ""
        return f"drift within its limit of {limit} ({share}); {drift_words(leading)}"
    limit = f"beyond its limit of {quantity.limit.text}" if quantity.limit else "without a limit"
    return f"drift {limit} ({share}); {drift_words(leading)}"


def _rows_of(quantity: QuantityDrift, rows: Iterable[DrivingRow]) -> list[DrivingRow]:
    return [row for row in rows if row.quantity in DRIVEN_BY[quantity.of]]


def _limit_finding(cell: str, verdict: LimitVerdict) -> Finding:
    limit = verdict.limit
    if verdict.state == UNCHARACTERISED:
        level = "warning" if limit.cell else "note"
    else:
        level = {MET: "passed", NOT_MET: "failed"}.get(verdict.state, "warning")
    return Finding(
        cell=cell,
        kind="limit",
        subject=limit.text,
        level=level,
        message=_limit_message(verdict),
        spots=(Spot(line=limit.line or None),),
    )


def _limit_message(verdict: LimitVerdict) -> str:
    words = verdict.state
    if verdict.estimate is not None:
        words += f": {estimate_words(verdict.estimate, verdict.limit.unit)}"
    if verdict.condition is not None and (where := condition_words(verdict.condition)):
        words += f" in {where}"
    return f"{words}; {verdict.reason}" if verdict.reason else words
