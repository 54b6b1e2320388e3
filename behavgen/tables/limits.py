"""The declared limits of columns as polars expressions."""

from __future__ import annotations

import math
from collections.abc import Mapping

import polars as pl

from behavgen.quantities import Column

__all__ = ["breaks_limits", "breaks_order"]


def breaks_limits(column: Column, value: pl.Expr) -> pl.Expr:
    """Tell whether a number in SI is one that the column may not hold."""
    broken = (value <= column.above) if math.isfinite(column.above) else (value < column.at_least)
    if math.isfinite(column.at_most):
        broken |= value > column.at_most
    if column.whole:
        broken |= value != value.floor()
    return broken


def breaks_order(
    pair: tuple[str, str], operands: Mapping[str, pl.Expr], fixed: Mapping[str, str | float]
) -> pl.Expr:
    """Tell whether the first column of a pair exceeds the second.

    Parameters
    ----------
    pair : (str, str)
        Column names.
    operands : mapping
        Columns that a row has.
    fixed : mapping
        Values that hold for the whole file, for columns it does not have.
    """
    lesser, greater = (
        operands[name] if name in operands else pl.lit(float(fixed[name])) for name in pair
    )
    return lesser > greater
