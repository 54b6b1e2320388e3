"""What was understood of a cell's tables: rows, conditions, ranges, gaps.

`summarise` gives it as data, `summary_lines` as aligned ASCII text.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np

from behavgen.project import CellSettings
from behavgen.quantities import QUANTITIES
from behavgen.tables.characterisation import (
    Characterisation,
    Conditions,
    DelayTable,
    Floats,
    NoiseTable,
    OffsetStatistics,
    OffsetTable,
    ResetTable,
    TableSource,
    WindowTable,
)
from behavgen.tables.condition_sets import (
    ConditionSet,
    condition_set,
    covered_by,
    merged,
    per_process,
)
from behavgen.units import ZERO_CELSIUS_K, format_si

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
    """All tables of a cell, what is absent, and what deserves a look."""

    cell: str
    quantities: tuple[QuantitySummary, ...]
    absent: tuple[str, ...]
    notices: tuple[str, ...]


def summarise(tables: Characterisation) -> TablesSummary:
    """Gather what a user should know about the tables of a cell."""
    sets = {name: condition_set(conditions) for name, conditions in _all_conditions(tables).items()}
    quantities = tuple(
        _summary_of(name, tables, sets[name]) for name in QUANTITIES if name in sets
    )
    ignored = {notice.partition(" ")[0] for notice in tables.notices if "not modelled" in notice}
    absent = tuple(name for name in QUANTITIES if name not in sets and name not in ignored)
    return TablesSummary(
        cell=tables.cell,
        quantities=quantities,
        absent=absent,
        notices=(*tables.notices, *_gaps(tables, sets)),
    )
