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
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import CONDITION_NAMES
from behavgen.fit.intervals import normal_quantile
from behavgen.model import Condition

__all__ = ["NextCondition", "PlannedConditions", "ThinAxis", "plan_conditions", "thin_axes"]

Floats = npt.NDArray[np.float64]

_HIGHEST_POWER = 2
_DECAY = 0.3
"""Prior spread of a term over that of one whose total power is lower by one, as in the fit."""
_CONSTANT_SPREAD = 1e3
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
    levels: Sequence[Floats],
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
        Conditions there are, in the order of `CONDITION_NAMES`. A column with NaN
        has no influence and is left out.
    levels : sequence of 3 ndarrays
        Levels of each condition to choose from, rising; their ends span the box.
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
    use = [k for k in range(len(levels)) if _varies(measured[:, k], levels[k])]
    grid = _grid(levels, use)
    terms = _scaled_terms(_coordinates(grid, levels, use), effects[use])
    known = _scaled_terms(_coordinates(measured, levels, use), effects[use])
    information = known.T @ known / scatter**2 + np.eye(known.shape[1])
    covariance = np.asarray(np.linalg.inv(information), dtype=np.float64)
    halves = _halves(terms, covariance, level)
    half_now = float(halves.max())
    open_ones = ~_is_among(grid[:, use], measured[:, use])
    following: list[NextCondition] = []
    while (halves * open_ones).max() > within and len(following) < most:
        first = not len(measured) and not following
        widest = len(grid) // 2 if first else int(np.argmax(halves * open_ones))
        open_ones[widest] = False
        condition = _condition(grid[widest], measured, process)
        following.append(NextCondition(condition=condition, half=float(halves[widest])))
        covariance = _with_one_more(covariance, terms[widest], scatter)
        halves = _halves(terms, covariance, level)
    return PlannedConditions(
        measured=len(measured),
        half_now=half_now,
        half_then=float(halves.max()),
        following=tuple(following),
        level=level,
    )


def thin_axes(measured: Floats, levels: Sequence[Floats]) -> tuple[ThinAxis, ...]:
    """Return the conditions measured at one or two levels only.

    Parameters
    ----------
    measured : ndarray, shape (C, 3)
        In the order of `CONDITION_NAMES`; a column with NaN has no influence.
    levels : sequence of 3 ndarrays
        Levels of each condition to choose from.
    """
    found = []
    for name, column, choice in zip(CONDITION_NAMES, measured.T, levels, strict=True):
        own = np.unique(column)
        if 0 < len(own) < _ENOUGH_LEVELS and not np.isnan(own).any():
            missing = _far_levels(own, choice)
            found.append(ThinAxis(name=name, levels=tuple(own.tolist()), missing=missing))
    return tuple(found)


def _far_levels(own: Floats, choice: Floats) -> tuple[float, ...]:
    """Return the levels, each as far as can be from those before, that complete three."""
    have = list(own)
    while len(have) < _ENOUGH_LEVELS and len(choice):
        away = np.abs(choice[:, None] - np.array(have)).min(axis=-1)
        if np.isclose(away.max(), 0.0):
            break
        have.append(float(choice[int(np.argmax(away))]))
    return tuple(sorted(have[len(own) :]))


def _varies(column: Floats, levels: Floats) -> bool:
    return len(levels) > 1 and not np.isnan(column).any()


def _grid(levels: Sequence[Floats], use: list[int]) -> Floats:
    """Return the candidates, shape (N, 3); NaN where a condition has no influence."""
    choice = [levels[k] if k in use else np.array([np.nan]) for k in range(len(levels))]
    return np.stack(np.meshgrid(*choice, indexing="ij"), axis=-1).reshape(-1, len(levels))


def _is_among(rows: Floats, others: Floats) -> npt.NDArray[np.bool_]:
    """Tell which rows, shape (N, axes), are among others, shape (C, axes)."""
    alike = np.isclose(rows[:, None], others).all(axis=-1)
    return np.asarray(alike.any(axis=-1), dtype=np.bool_)


def _coordinates(values: Floats, levels: Sequence[Floats], use: list[int]) -> Floats:
    """Return conditions from -1 to 1 over the box, shape (N, axes)."""
    ends = np.array([[levels[k][0], levels[k][-1]] for k in use]).reshape(-1, 2)
    return (values[:, use] - ends.mean(axis=-1)) / (0.5 * np.diff(ends, axis=-1)[:, 0])


def _halves(terms: Floats, covariance: Floats, level: float) -> Floats:
    variance = np.einsum("nt,tu,nu->n", terms, covariance, terms)
    halves: Floats = normal_quantile(level) * np.sqrt(variance)
    return halves


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
    across: Floats = covariance @ term
    return covariance - np.outer(across, across) / (scatter**2 + term @ across)


def _condition(row: Floats, measured: Floats, process: str) -> Condition:
    """Return a candidate as a condition; what has a single level in the tables keeps it."""
    values: dict[str, float | None] = {}
    for name, value, column in zip(CONDITION_NAMES, row, measured.T, strict=True):
        alike = len(column) > 0 and bool((column == column[0]).all())
        only = float(column[0]) if alike else None
        values[name] = only if np.isnan(value) else float(value)
    return Condition(process=process, **values)
