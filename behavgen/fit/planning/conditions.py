"""Which operating conditions to measure next.

A surface over conditions is a polynomial whose low powers the tables decide and
whose high ones, as far as nobody measured them, are only known to be smaller. That
knowledge, a prior variance for every term, makes the prediction variance finite
everywhere in the box, so that it can be asked where it is largest: there the next
condition tells most of all terms together (W. DuMouchel, B. Jones, Technometrics 36,
1994, 37-47). An axis measured at one level shows as ignorance of its slope, at two
levels of its bend, a star of conditions as ignorance of its corners.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from math import inf

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import CONDITION_NAMES
from behavgen.fit.intervals import normal_quantile
from behavgen.model import Box, Condition, Range

__all__ = ["NextCondition", "PlannedConditions", "ThinAxis", "plan_conditions", "thin_axes"]

Floats = npt.NDArray[np.float64]

_HIGHEST_POWER = 2
_DECAY = 0.3
"""Prior spread of a term over that of one whose total power is lower by one, as in the fit."""
_CONSTANT_SPREAD = 1e3
_GRID_LEVELS = 5
"""Candidates on each axis: ends, middle and the quarters between."""
_ENOUGH_LEVELS = 3


@dataclass(frozen=True, slots=True, kw_only=True)
class NextCondition:
    """A condition to measure, and what is known of it now.

    Parameters
    ----------
    condition : Condition
    half : float
        Half width of the interval of the predicted value there when its turn
        comes, relative.
    """

    condition: Condition
    half: float


@dataclass(frozen=True, slots=True, kw_only=True)
class PlannedConditions:
    """Conditions to measure, in order.

    Parameters
    ----------
    measured : int
        Distinct conditions there are.
    half_now, half_then : float
        Half width of the widest interval in the box, relative, now and with all
        of `following`.
    following : tuple of NextCondition
        Empty when `half_now` is small enough already.
    level : float
        Confidence, 0..1.
    """

    measured: int
    half_now: float
    half_then: float
    following: tuple[NextCondition, ...]
    level: float


@dataclass(frozen=True, slots=True, kw_only=True)
class ThinAxis:
    """A condition measured at too few levels to show a bend; `missing` would complete it.

    Parameters
    ----------
    name : str
        One of `CONDITION_NAMES`.
    levels : tuple of float
        Measured, SI.
    missing : tuple of float
        To measure, SI; empty where the tables do not say how far the axis reaches.
    """

    name: str
    levels: tuple[float, ...]
    missing: tuple[float, ...]


def plan_conditions(
    measured: Floats,
    box: Box,
    *,
    effects: Floats,
    scatter: float,
    within: float,
    process: str = "",
    most: int = 6,
    level: float = 0.95,
) -> PlannedConditions:
    """Return the conditions that narrow the widest interval in the box, one after the other.

    Parameters
    ----------
    measured : ndarray, shape (C, 3)
        Conditions there are, in the order of `CONDITION_NAMES`, at least one. A
        column with NaN has no influence and is left out.
    box : Box
        Where predictions are wanted.
    effects : ndarray, shape (3,)
        How much each condition changes the logarithm of the value from the middle
        of the box to its end; a guess where nobody knows.
    scatter : float
        Standard error of the logarithm of one measured value.
    within : float
        Wanted half width, relative.
    process : str
        Written into the conditions returned.
    most : int
        Conditions to return at most.
    level : float
        Confidence, 0..1.
    """
    use = [k for k in range(len(CONDITION_NAMES)) if _varies(measured[:, k], _span(box, k))]
    grid = _grid(box, use)
    terms = _scaled_terms(_coordinates(grid, box, use), effects[use])
    known = _scaled_terms(_coordinates(measured, box, use), effects[use])
    covariance = np.linalg.inv(known.T @ known / scatter**2 + np.eye(known.shape[1]))
    quantile = normal_quantile(level)
    following: list[NextCondition] = []
    half_now = half = inf
    while True:
        halves = quantile * np.sqrt(np.einsum("nt,tu,nu->n", terms, covariance, terms))
        widest = int(np.argmax(halves))
        half = float(halves[widest])
        half_now = half if not following else half_now
        if half <= within or len(following) == most:
            break
        condition = _condition(grid[widest], measured, process)
        following.append(NextCondition(condition=condition, half=half))
        covariance = _with_one_more(covariance, terms[widest], scatter)
    return PlannedConditions(
        measured=len(measured),
        half_now=half_now,
        half_then=half,
        following=tuple(following),
        level=level,
    )


def thin_axes(measured: Floats, box: Box) -> tuple[ThinAxis, ...]:
    """Return the conditions measured at one or two levels only.

    Parameters
    ----------
    measured : ndarray, shape (C, 3)
        In the order of `CONDITION_NAMES`; a column with NaN has no influence.
    box : Box
        Where predictions are wanted.
    """
    found = []
    for k, name in enumerate(CONDITION_NAMES):
        levels = np.unique(measured[:, k])
        if np.isnan(levels).any() or len(levels) >= _ENOUGH_LEVELS:
            continue
        span = _span(box, k)
        wanted = {span.low, span.middle, span.high} if span and span.low < span.high else set()
        missing = sorted(value for value in wanted if not np.isclose(value, levels).any())
        found.append(
            ThinAxis(name=name, levels=tuple(levels.tolist()), missing=tuple(missing)),
        )
    return tuple(found)


def _span(box: Box, axis: int) -> Range | None:
    span: Range | None = getattr(box, CONDITION_NAMES[axis])
    return span


def _varies(column: Floats, span: Range | None) -> bool:
    return span is not None and span.low < span.high and not np.isnan(column).any()


def _grid(box: Box, use: list[int]) -> Floats:
    """Return the candidates, shape (N, 3); NaN where a condition has no influence."""
    levels = [np.array([np.nan])] * len(CONDITION_NAMES)
    for k in use:
        span = _span(box, k)
        assert span is not None
        levels[k] = np.linspace(span.low, span.high, _GRID_LEVELS)
    return np.stack(np.meshgrid(*levels, indexing="ij"), axis=-1).reshape(-1, len(levels))


def _coordinates(values: Floats, box: Box, use: list[int]) -> Floats:
    """Return conditions from -1 to 1 over the box, shape (N, axes)."""
    columns = []
    for k in use:
        span = _span(box, k)
        assert span is not None
        columns.append((values[:, k] - span.middle) / (0.5 * (span.high - span.low)))
    return np.stack(columns, axis=-1) if columns else np.empty((len(values), 0))


def _scaled_terms(coordinates: Floats, effects: Floats) -> Floats:
    """Return the terms of the surface times their prior spreads, shape (N, terms)."""
    powers = np.array(
        list(itertools.product(range(_HIGHEST_POWER + 1), repeat=coordinates.shape[1])), dtype=float
    )
    order = powers.sum(axis=-1)
    mean_log_effect = powers @ np.log(np.maximum(effects, 1e-12)) / np.maximum(order, 1.0)
    spread = np.exp(mean_log_effect) * _DECAY ** (order - 1.0)
    spread[order == 0.0] = _CONSTANT_SPREAD
    terms: Floats = np.prod(coordinates[:, None, :] ** powers, axis=-1) * spread
    return terms


def _with_one_more(covariance: Floats, term: Floats, scatter: float) -> Floats:
    """Return the covariance after one more value (J. Sherman, W. J. Morrison, 1950)."""
    across = covariance @ term
    return covariance - np.outer(across, across) / (scatter**2 + term @ across)


def _condition(row: Floats, measured: Floats, process: str) -> Condition:
    """Return a candidate as a condition; what has a single level in the tables keeps it."""
    values: dict[str, float | None] = {}
    for name, value, column in zip(CONDITION_NAMES, row, measured.T, strict=True):
        only = column[0] if not np.isnan(column).any() and np.ptp(column) == 0.0 else None
        values[name] = only if np.isnan(value) else float(value)
    return Condition(process=process, **values)
