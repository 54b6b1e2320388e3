"""What was understood of a cell's tables: rows, conditions, ranges, gaps.

`summarise` gives it as data, `summary_lines` as aligned ASCII text.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from behavgen.quantities import QUANTITIES
from behavgen.tables.characterisation import Characterisation
from behavgen.tables.condition_sets import CONDITION_NAMES, ConditionSet, per_process
from behavgen.tables.gaps import gaps
from behavgen.tables.summary_facts import described_quantities
from behavgen.units import format_celsius, format_si

__all__ = ["QuantitySummary", "TablesSummary", "summarise", "summary_lines"]


@dataclass(frozen=True, slots=True, kw_only=True)
class QuantitySummary:
    """One quantity in a line.

    Parameters
    ----------
    quantity : str
        Its name.
    files : tuple of str
        Relative to the project.
    rows, failed_rows : int
        Rows used, and rows dropped as failed runs.
    conditions : int
        Distinct operating conditions.
    facts : tuple of str
        What to print behind the rows: conditions, ranges with units, remarks.
    """

    quantity: str
    files: tuple[str, ...]
    rows: int
    failed_rows: int
    conditions: int
    facts: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class TablesSummary:
    """All tables of a cell, what is absent, and what deserves a look.

    `box` says over which conditions the cell is characterised: those of the delays,
    without them those of all tables.
    """

    cell: str
    box: tuple[str, ...]
    quantities: tuple[QuantitySummary, ...]
    absent: tuple[str, ...]
    notices: tuple[str, ...]


def summarise(tables: Characterisation) -> TablesSummary:
    """Gather what a user should know about the tables of a cell."""
    described = described_quantities(tables)
    quantities = []
    for name in QUANTITIES:
        if name not in described:
            continue
        conditions, facts = described[name]
        sources = [source for source in tables.sources if source.quantity == name]
        quantities.append(
            QuantitySummary(
                quantity=name,
                files=tuple(source.file for source in sources),
                rows=sum(source.rows for source in sources),
                failed_rows=sum(source.failed_rows for source in sources),
                conditions=len(conditions),
                facts=facts,
            )
        )
    sets = {name: conditions for name, (conditions, _) in described.items()}
    return TablesSummary(
        cell=tables.cell,
        box=_box(sets.get("delay") or frozenset().union(*sets.values())),
        quantities=tuple(quantities),
        absent=tuple(name for name in QUANTITIES if name not in described),
        notices=(*tables.notices, *gaps(tables, sets)),
    )


def summary_lines(summary: TablesSummary) -> list[str]:
    """Return the summary as aligned text, ASCII only."""
    lines = [
        [
            quantity.quantity,
            quantity.files[0] if len(quantity.files) == 1 else f"{len(quantity.files)} files",
            f"{quantity.rows} rows",
            ", ".join([*_failed(quantity), *quantity.facts[:1]]),
            *quantity.facts[1:],
        ]
        for quantity in summary.quantities
    ]
    texts = [summary.cell]
    texts += _aligned(lines)
    texts += _labelled("box", ["   ".join(summary.box)] if summary.box else [])
    texts += _labelled("absent", [" ".join(summary.absent)] if summary.absent else [])
    texts += _labelled("look at", summary.notices)
    return texts


def _box(conditions: ConditionSet) -> tuple[str, ...]:
    """Return the range of each condition, and the processes."""
    facts = []
    for index, write in enumerate((None, _volts, format_celsius, _volts)):
        values = sorted(value for row in conditions if isinstance(value := row[index], float))
        if write is not None and values:
            ends = dict.fromkeys((write(values[0]), write(values[-1])))
            facts.append(f"{CONDITION_NAMES[index]} {'..'.join(ends)}")
    if processes := per_process(conditions):
        facts.append(f"process {' '.join(processes)}")
    return tuple(facts)


def _failed(quantity: QuantitySummary) -> list[str]:
    return [f"{quantity.failed_rows} failed"] if quantity.failed_rows else []


def _volts(value: float) -> str:
    return format_si(value, "V")


def _aligned(lines: Sequence[Sequence[str]]) -> list[str]:
    """Pad cells to common widths: numbers of rows to the right, all else to the left."""
    columns = max((len(line) for line in lines), default=0)
    widths = [
        max((len(line[column]) for line in lines if column < len(line)), default=0)
        for column in range(columns)
    ]
    return [
        "  "
        + "   ".join(
            cell.rjust(width) if column == _ROWS_COLUMN else cell.ljust(width)
            for column, (cell, width) in enumerate(zip(line, widths, strict=False))
        ).rstrip()
        for line in lines
    ]


_ROWS_COLUMN = 2
_LABEL_WIDTH = 7


def _labelled(label: str, texts: Iterable[str]) -> list[str]:
    return [f"  {label.ljust(_LABEL_WIDTH)}  {text}" for text in texts]
