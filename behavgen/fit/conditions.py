"""Rows of a table -> the distinct operating conditions they were measured at."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.model import Box, Condition, Range
from behavgen.tables.characterisation import Conditions

__all__ = ["CONDITION_NAMES", "Sites", "conditions_of", "find_sites", "inside", "range_of"]

Floats = npt.NDArray[np.float64]

CONDITION_NAMES = ("temperature_k", "vdd_v", "vcm_v")
"""Numeric conditions in the order in which surfaces fold them, slowest first."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Sites:
    """The distinct conditions of a table.

    Parameters
    ----------
    values : ndarray, shape (C, 3)
        Temperature (K), supply (V), common mode (V); NaN: holds everywhere.
    process : tuple of str, length C
        "" holds for all.
    of_row : ndarray of int, shape (N,)
        Index of each row's site.
    """

    values: Floats
    process: tuple[str, ...]
    of_row: npt.NDArray[np.intp]

    @property
    def count(self) -> int:
        """Number of distinct conditions."""
        return len(self.process)


def find_sites(conditions: Conditions) -> Sites:
    """Return the distinct conditions, in the order of their first row."""
    values = np.stack([getattr(conditions, name) for name in CONDITION_NAMES], axis=-1)
    _, process_code = np.unique(conditions.process, return_inverse=True)
    keys = np.column_stack([np.nan_to_num(values, nan=-1.0), process_code])
    _, first, inverse = np.unique(keys, axis=0, return_index=True, return_inverse=True)
    order = np.argsort(first)
    rank = np.empty_like(order)
    rank[order] = np.arange(len(order))
    rows = first[order]
    return Sites(
        values=values[rows],
        process=tuple(str(name) for name in conditions.process[rows]),
        of_row=rank[inverse.ravel()],
    )


def conditions_of(sites: Sites) -> tuple[Condition, ...]:
    """Return the sites as the model's conditions."""
    return tuple(
        Condition(
            process=process,
            temperature_k=_given(row[0]),
            vdd_v=_given(row[1]),
            vcm_v=_given(row[2]),
        )
        for process, row in zip(sites.process, sites.values, strict=True)
    )


def _given(value: float) -> float | None:
    return None if np.isnan(value) else float(value)


def range_of(values: Floats, overdrive_v: Range | None = None) -> Box:
    """Return the box spanned by conditions, shape (C, 3); all-NaN columns give None."""
    spans = [
        None if np.isnan(column).all() else Range(low=float(column.min()), high=float(column.max()))
        for column in values.T
    ]
    return Box(temperature_k=spans[0], vdd_v=spans[1], vcm_v=spans[2], overdrive_v=overdrive_v)


def inside(box: Box, values: Floats) -> npt.NDArray[np.bool_]:
    """Return which conditions, shape (C, 3), lie in a box; what either leaves open does."""
    within = np.ones(len(values), dtype=bool)
    for name, column in zip(CONDITION_NAMES, values.T, strict=True):
        span: Range | None = getattr(box, name)
        if span is not None:
            within &= np.isnan(column) | ((column >= span.low) & (column <= span.high))
    return within
