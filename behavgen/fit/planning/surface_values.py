"""What a model's surfaces say at a condition, and at which conditions its tables lie."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import CONDITION_NAMES
from behavgen.model import ComparatorModel, Condition, Surface
from behavgen.operating_point import evaluate, operating_point
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["candidate_levels", "log_effects", "tabulated", "value_at"]

Floats = npt.NDArray[np.float64]

_UNKNOWN_EFFECT = 0.3
"""Taken where no effect is known: a condition moves delay or noise by a third (common practice)."""
_LEAST_EFFECT = 0.02


def value_at(model: ComparatorModel, surface: Surface, condition: Condition) -> float:
    """Return a surface's value, SI; what the condition leaves open is the middle of the box."""
    given: dict[str, npt.ArrayLike] = {}
    if condition.process:
        given["process"] = condition.process
    if condition.vdd_v is not None:
        given["vdd"] = condition.vdd_v
    if condition.temperature_k is not None:
        given["temp_c"] = condition.temperature_k - ZERO_CELSIUS_K
    if condition.vcm_v is not None:
        given["vcm"] = condition.vcm_v
    return float(evaluate(surface, operating_point(model, (), given))[0])


def log_effects(model: ComparatorModel, surface: Surface, process: str) -> Floats:
    """Return how much each condition moves ln(value) from the middle of the box to an end.

    Conditions that the surface does not see are taken to move it as much as the
    strongest that it does see.

    Returns
    -------
    ndarray, shape (3,), in the order of `CONDITION_NAMES`
    """
    seen = {axis.condition for axis in surface.axes}
    found = np.full(len(CONDITION_NAMES), np.nan)
    for k, name in enumerate(CONDITION_NAMES):
        span = getattr(model.box, name)
        if name in seen and span is not None:
            ends = [
                value_at(model, surface, replace(Condition(process=process), **{name: end}))
                for end in (span.low, span.high)
            ]
            found[k] = max(0.5 * abs(np.log(ends[1] / ends[0])), _LEAST_EFFECT)
    return np.where(np.isnan(found), np.nanmax([*found, _UNKNOWN_EFFECT * (not seen)]), found)


def candidate_levels(model: ComparatorModel) -> tuple[Floats, ...]:
    """Return the levels of each condition at which to measure, in the order of `CONDITION_NAMES`.

    Those that any table of the cell has inside the box; where these are fewer than
    three, the ends and the middle of the box; empty where no table says.
    """
    found = []
    for name in CONDITION_NAMES:
        span = getattr(model.box, name)
        given = {getattr(points.condition, name) for points in model.points} - {None}
        levels = np.array(sorted(given), dtype=float)
        if span is not None:
            levels = levels[(levels >= span.low) & (levels <= span.high)]
            if len(levels) < 3 and span.low < span.high:
                levels = np.unique([span.low, span.middle, span.high])
        found.append(levels)
    return tuple(found)


def tabulated(model: ComparatorModel, quantity: str, process: str) -> Floats:
    """Return the distinct conditions of a quantity's rows in a process.

    Rows that name no process count for every one.

    Returns
    -------
    ndarray, shape (C, 3), in the order of `CONDITION_NAMES`
        NaN where a table does not say.
    """
    rows = {
        tuple(getattr(points.condition, name) for name in CONDITION_NAMES)
        for points in model.points
        if points.quantity == quantity and points.condition.process in ("", process)
    }
    values = np.array(sorted(rows, key=str), dtype=float)
    return values.reshape(-1, len(CONDITION_NAMES))
