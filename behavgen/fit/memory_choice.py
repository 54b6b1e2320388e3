"""Which memory curve: how many exponentials, a floor or none, and what conditions share.

Chosen by leaving rows out. What fits and foresees as well with fewer numbers is taken.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from enum import IntEnum

import numpy as np
import numpy.typing as npt

from behavgen.fit.memory_curve import CurveShape, MemoryRows, fit_curves

__all__ = ["MemoryChoice", "Sharing", "choose_memory", "shift_of"]

Floats = npt.NDArray[np.float64]

_AS_GOOD = 1.05
"""Fewer numbers are preferred while the error rises by no more than this factor,"""
_NEGLIGIBLE = 2e-3
"""or by no more than this."""
_FOLDS = 10
_SHAPES = tuple(
    CurveShape(terms=terms, floor=floor)
    for terms, floor in ((1, False), (0, True), (1, True), (2, False), (2, True))
)


class Sharing(IntEnum):
    """What the conditions have in common."""

    ALL = 0
    """One curve."""
    TIMES = 1
    """The time constants; heights are each condition's own."""
    NOTHING = 2
    """Each condition has a curve of its own."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MemoryChoice:
    """The chosen curve at every condition.

    Parameters
    ----------
    shape : CurveShape
    sharing : Sharing
    log_parameters : ndarray, shape (C, 2 K + floor)
        ln of heights at no reset (V), ln of time constants (s), ln of the floor (V).
    spent : int
        Numbers that were fitted.
    """

    shape: CurveShape
    sharing: Sharing
    log_parameters: Floats
    spent: int


def shift_of(log_parameters: Floats, shape: CurveShape, rows: MemoryRows) -> Floats:
    """Return the uncapped shift at rows, shape (N,) in V; parameters as in `MemoryChoice`."""
    here = log_parameters[rows.site]
    terms = shape.terms
    age = rows.reset_time_s[:, None] * np.exp(-here[:, terms : 2 * terms])
    parts = np.column_stack([here[:, :terms] - age, here[:, 2 * terms :]])
    shift: Floats = np.exp(parts).sum(axis=-1)
    return shift


def choose_memory(rows: MemoryRows, conditions: int) -> MemoryChoice | None:
    """Choose the curve; None where no part of one would be positive.

    Parameters
    ----------
    rows : MemoryRows
        Each condition has a measured row, and all of them two or more reset times.
    conditions : int
    """
    found: list[tuple[MemoryChoice, float]] = []
    ways = itertools.product(_SHAPES, Sharing if conditions > 1 else (Sharing.ALL,))
    for shape, sharing in sorted(ways, key=lambda way: _spent(conditions, *way)):
        spent = _spent(conditions, shape, sharing)
        if spent >= int((~rows.is_bound).sum()) and shape is not _SHAPES[0]:
            continue
        fitted = _fitted(rows, conditions, shape, sharing)
        if fitted is None:
            continue
        choice = MemoryChoice(shape=shape, sharing=sharing, log_parameters=fitted, spent=spent)
        found.append((choice, _cost(rows, conditions, choice)))
        if found[-1][1] <= _NEGLIGIBLE:
            break
    least = min((cost for _, cost in found), default=0.0)
    good = [f for f in found if f[1] <= max(_AS_GOOD * least, least + _NEGLIGIBLE)]
    return min(good, key=lambda f: (f[0].spent, f[1]))[0] if good else None


def _spent(conditions: int, shape: CurveShape, sharing: Sharing) -> int:
    times = 1 if sharing < Sharing.NOTHING else conditions
    heights = 1 if sharing == Sharing.ALL else conditions
    return times * shape.terms + heights * shape.heights


def _fitted(
    rows: MemoryRows,
    conditions: int,
    shape: CurveShape,
    sharing: Sharing,
    near: Floats | None = None,
) -> Floats | None:
    """Return every condition's parameters, maybe near others; None where rows cannot tell them."""
    if not _identified(rows, conditions, shape, sharing):
        return None
    log_tau = None if near is None else near[:, shape.terms : 2 * shape.terms]
    if sharing == Sharing.NOTHING:
        parts = []
        for c in range(conditions):
            own = rows.where(rows.site == c)
            start = None if log_tau is None else log_tau[c]
            parts.append(fit_curves(own, np.zeros_like(own.site), shape, start))
        curves = [part for part in parts if part is not None]
        if len(curves) < conditions:
            return None
        return np.concatenate([curve.log_parameters() for curve in curves])
    together = np.zeros_like(rows.site) if sharing == Sharing.ALL else rows.site
    curve = fit_curves(rows, together, shape, None if log_tau is None else log_tau.mean(axis=0))
    if curve is None:
        return None
    parameters = curve.log_parameters()
    return np.broadcast_to(parameters, (conditions, parameters.shape[1]))


def _identified(rows: MemoryRows, conditions: int, shape: CurveShape, sharing: Sharing) -> bool:
    measured = rows.where(~rows.is_bound)
    times = [len(np.unique(measured.reset_time_s[measured.site == c])) for c in range(conditions)]
    whole = shape.heights + shape.terms
    if sharing == Sharing.NOTHING:
        return min(times) >= whole
    enough = len(np.unique(measured.reset_time_s)) >= whole
    if sharing == Sharing.ALL:
        return enough
    spare = len(measured.shift_v) - _spent(conditions, shape, sharing)
    return enough and min(times) >= shape.heights and spare >= 0 and max(times) > 1


def _cost(rows: MemoryRows, conditions: int, choice: MemoryChoice) -> float:
    """Return the mean relative error of rows fitted plus that of rows left out."""
    measured = ~rows.is_bound
    error = shift_of(choice.log_parameters, choice.shape, rows) / rows.scale_v
    fitted = np.abs(error - rows.shift_v / rows.scale_v)[measured].mean()
    return float(fitted + _left_out(rows, conditions, choice))


def _left_out(rows: MemoryRows, conditions: int, choice: MemoryChoice) -> float:
    """Return the mean relative error of rows left out; one that nothing foresees counts as 1.

    Where the rest cannot tell a condition's own curve, conditions share more.
    """
    measured = np.flatnonzero(~rows.is_bound)
    folds = min(_FOLDS, len(measured))
    error = np.ones(len(measured))
    for fold in range(folds):
        left = measured[fold::folds]
        keep = np.ones(len(rows.shift_v), dtype=bool)
        keep[left] = False
        for sharing in range(choice.sharing, -1, -1):
            fitted = _fitted(
                rows.where(keep), conditions, choice.shape, Sharing(sharing), choice.log_parameters
            )
            if fitted is not None:
                away = rows.where(np.isin(np.arange(len(keep)), left))
                missed = shift_of(fitted, choice.shape, away) - away.shift_v
                error[fold::folds] = np.minimum(np.abs(missed) / away.scale_v, 1.0)
                break
    return float(error.mean())
