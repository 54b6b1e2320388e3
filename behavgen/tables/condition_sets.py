"""Distinct operating conditions, and how far one table's cover another's."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable

import polars as pl

from behavgen.tables.characterisation import Conditions

__all__ = [
    "CONDITION_NAMES",
    "ConditionSet",
    "condition_set",
    "count_covered",
    "names_not_given",
    "per_process",
]

CONDITION_NAMES = ("process", "vdd", "temp", "vcm")

ConditionSet = frozenset[tuple[str | float | None, ...]]
"""Distinct (process, supply V, temperature K, common mode V); None: holds everywhere."""


def condition_set(*tables: Conditions) -> ConditionSet:
    """Return the distinct conditions of the rows of some tables."""
    return frozenset(row for conditions in tables for row in _distinct(conditions).rows())


def names_not_given(conditions: ConditionSet) -> tuple[str, ...]:
    """Return the conditions that no row fixes."""
    return tuple(
        name
        for index, name in enumerate(CONDITION_NAMES)
        if all(row[index] is None for row in conditions)
    )


def per_process(conditions: ConditionSet) -> dict[str, int]:
    """Return how many conditions each named process has, most first, then by name."""
    counts = Counter(str(row[0]) for row in conditions if row[0] is not None)
    return dict(sorted(counts.items(), key=lambda item: (-item[1], item[0])))


def count_covered(conditions: ConditionSet, among: ConditionSet) -> int:
    """Return how many of `conditions` are also conditions of `among`.

    What either side leaves open fits everything.
    """
    both = [
        index
        for index in range(len(CONDITION_NAMES))
        if all(row[index] is not None for rows in (conditions, among) for row in rows)
    ]
    known = {tuple(row[index] for index in both) for row in among}
    return sum(tuple(row[index] for index in both) in known for row in conditions)


def _distinct(conditions: Conditions) -> pl.DataFrame:
    columns: Iterable[tuple[str, pl.Series]] = zip(
        CONDITION_NAMES,
        (
            pl.Series(conditions.process, dtype=pl.String),
            pl.Series(conditions.vdd_v),
            pl.Series(conditions.temperature_k),
            pl.Series(conditions.vcm_v),
        ),
        strict=True,
    )
    frame = pl.DataFrame(dict(columns)).unique()
    return frame.with_columns(
        pl.when(pl.col("process") != "").then("process").alias("process"),
        pl.col("vdd", "temp", "vcm").fill_nan(None),
    )
