"""Textbook delay laws, fitted at every condition and carried by nodes.

Each law is linear in everything but one or two voltages. For given voltages
the rest is linear least squares (separable least squares; G. H. Golub,
V. Pereyra, SIAM J. Numer. Anal. 10, 1973, 413-432), so that the voltages are
found from the best of a few scales by damped Gauss-Newton steps (K. Levenberg,
Q. Appl. Math. 2, 1944, 164-168), for all conditions at once and without
starting values from the user.

| law            | delay(v)                                                     |
|----------------|--------------------------------------------------------------|
| soft           | t0 + tau ln(1 + Vx/v): regeneration from a finite swing       |
| saturating     | t0 - tau ln sinh(v/Vs): transconductor I tanh(v/Vs)           |
| integrating    | t0 + tau ln(1 + Vx/v) + ts/(1 + v/Vi): integration shortened  |
|                | by the overdrive, then regeneration                           |
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.law_solution import DelayRows, LawSolution, inverse_of

__all__ = ["solve_families"]

Floats = npt.NDArray[np.float64]

_SCALES = 7
_APART = np.log(0.3)
"""A second voltage starts at this distance in ln from the first."""
_MOST_STEPS = 200
_SETTLED = 1e-13
"""Relative change of the squares below which a step changes nothing."""
_NODES = 12
_STRAIGHT = 1e-3
"""The tail of a textbook law is straight below this share of its smallest voltage."""
_STEP = 1e-4


@dataclass(frozen=True, slots=True, kw_only=True)
class _Family:
    """A law: its name and its linear terms for given logarithms of its voltages.

    `terms(v, shape)` takes overdrives (..., R) and shapes (..., S) and returns
    (..., R, P); the first term is the constant, the second has the slope -1 in
    ln v far below the voltages.
    """

    name: str
    voltages: int
    terms: Callable[[Floats, Floats], Floats]


def _soft(v: Floats, shape: Floats) -> Floats:
    return np.stack([np.ones_like(v), np.log1p(np.exp(shape[..., :1]) / v)], axis=-1)


def _saturating(v: Floats, shape: Floats) -> Floats:
    x = v / np.exp(shape[..., :1])
    log_sinh = x + np.log(-np.expm1(-2.0 * x)) - np.log(2.0)
    return np.stack([np.ones_like(v), -log_sinh], axis=-1)


def _integrating(v: Floats, shape: Floats) -> Floats:
    shorter = 1.0 / (1.0 + v / np.exp(shape[..., 1:]))
    return np.concatenate([_soft(v, shape), shorter[..., None]], axis=-1)


_FAMILIES = (
    _Family(name="soft regeneration law", voltages=1, terms=_soft),
    _Family(name="saturating regeneration law", voltages=1, terms=_saturating),
    _Family(name="integration and regeneration law", voltages=2, terms=_integrating),
)


def solve_families(rows: DelayRows, only: str = "") -> list[LawSolution]:
    """Fit textbook laws at all conditions, as far as the rows can tell their parameters.

    Parameters
    ----------
    rows : DelayRows
    only : str
        Name of a single law to fit.
    """
    used = rows.weight > 0.0
    distinct = min(len(np.unique(v[u])) for v, u in zip(rows.overdrive_v, used, strict=True))
    lowest, highest = rows.overdrive_v[used].min(), rows.overdrive_v[used].max()
    return [
        _solve(rows, family, lowest, highest)
        for family in _FAMILIES
        if distinct > 2 * family.voltages + 3 and only in ("", family.name)
    ]


def _solve(rows: DelayRows, family: _Family, lowest: float, highest: float) -> LawSolution:
    shape = _polished(rows, family, _best_scale(rows, family, highest))
    linear, _ = _linear(rows, family, shape)
    first = max(float(np.exp(shape.min())) * _STRAIGHT, 0.1 * lowest)
    log_node = np.linspace(np.log(min(first, 0.3 * highest)), np.log(highest), _NODES)
    at_nodes = np.broadcast_to(np.exp(log_node), (len(shape), _NODES))
    nodes = _delay(family, at_nodes, shape, linear)
    jacobian = _jacobian(family, rows.overdrive_v, shape, linear)
    scaled = jacobian * (np.sqrt(rows.weight) / rows.delay_s)[..., None]
    inverse = inverse_of(scaled.transpose(0, 2, 1) @ scaled)
    to_nodes = _jacobian(family, at_nodes, shape, linear)
    to_tau = np.zeros_like(to_nodes[:, :1])
    to_tau[..., 1] = 1.0
    mapping = np.concatenate([to_tau, to_nodes], axis=1)
    residual = _delay(family, rows.overdrive_v, shape, linear) / rows.delay_s - 1.0
    squares = (rows.weight * residual**2).sum(axis=-1)
    return LawSolution.of(
        name=family.name,
        rows=rows,
        log_node=log_node,
        parameters=np.concatenate([linear[:, 1:2], nodes], axis=1),
        inverse=mapping @ inverse @ mapping.transpose(0, 2, 1),
        squares=squares,
        spent=np.full(len(shape), float(jacobian.shape[-1])),
    )


def _best_scale(rows: DelayRows, family: _Family, highest: float) -> Floats:
    """Return starting logarithms of the voltages, shape (C, S), the best of a few scales."""
    scales = np.log(highest) + np.linspace(np.log(3e-3), np.log(3.0), _SCALES)
    trials = scales[:, None] + _APART * np.arange(family.voltages)
    conditions = len(rows.delay_s)
    squares = [
        _linear(rows, family, np.broadcast_to(trial, (conditions, family.voltages)))[1]
        for trial in trials
    ]
    return trials[np.argmin(squares, axis=0)]


def _polished(rows: DelayRows, family: _Family, shape: Floats) -> Floats:
    """Take damped Gauss-Newton steps at every condition until its squares settle."""
    shape = shape.copy()
    linear, squares = _linear(rows, family, shape)
    damping = np.full(len(shape), 1e-3)
    active = np.arange(len(shape))
    for _ in range(_MOST_STEPS):
        here = rows.at(active)
        trial = shape[active] + _step(here, family, shape[active], linear[active], damping[active])
        trial_linear, trial_squares = _linear(here, family, trial)
        better = trial_squares <= squares[active]
        unsettled = np.abs(trial_squares - squares[active]) > _SETTLED * squares[active]
        taken = active[better]
        shape[taken], linear[taken] = trial[better], trial_linear[better]
        squares[taken] = trial_squares[better]
        damping[active] *= np.where(better, 0.1, 7.0)
        active = active[unsettled & (damping[active] < 1e9)]
        if len(active) == 0:
            break
    return shape


def _step(
    rows: DelayRows, family: _Family, shape: Floats, linear: Floats, damping: Floats
) -> Floats:
    """Return the damped Gauss-Newton step of the voltages' logarithms, shape (C, S)."""
    factor = np.sqrt(rows.weight) / rows.delay_s
    scaled = _jacobian(family, rows.overdrive_v, shape, linear) * factor[..., None]
    gap = np.sqrt(rows.weight) - (scaled[..., : linear.shape[-1]] @ linear[..., None])[..., 0]
    transposed = scaled.transpose(0, 2, 1)
    normal = transposed @ scaled
    diagonal = np.diagonal(normal, axis1=-2, axis2=-1)
    normal = normal + (damping[:, None] * diagonal)[..., None] * np.eye(normal.shape[-1])
    step = (inverse_of(normal) @ (transposed @ gap[..., None]))[:, -family.voltages :, 0]
    return np.clip(step, -1.0, 1.0)


def _linear(rows: DelayRows, family: _Family, shape: Floats) -> tuple[Floats, Floats]:
    """Return the linear coefficients (C, P) and the weighted squares (C,) at given voltages."""
    root = np.sqrt(rows.weight)
    terms = family.terms(rows.overdrive_v, shape)
    scaled = terms * (root / rows.delay_s)[..., None]
    inverse = inverse_of(scaled.transpose(0, 2, 1) @ scaled)
    coefficients = (inverse @ (scaled.transpose(0, 2, 1) @ root[..., None]))[..., 0]
    residual = (scaled @ coefficients[..., None])[..., 0] - root
    absurd = (coefficients[:, 1:] <= 0.0).any(axis=-1)
    return coefficients, (residual**2).sum(axis=-1) + np.where(absurd, 1e9, 0.0)


def _delay(family: _Family, v: Floats, shape: Floats, linear: Floats) -> Floats:
    return (family.terms(v, shape) @ linear[..., None])[..., 0]


def _jacobian(family: _Family, v: Floats, shape: Floats, linear: Floats) -> Floats:
    """Return d(delay) / d(coefficients, ln voltages), shape (C, R, P + S)."""
    columns = [family.terms(v, shape)]
    for k in range(family.voltages):
        step = np.zeros(family.voltages)
        step[k] = _STEP
        rise = _delay(family, v, shape + step, linear) - _delay(family, v, shape - step, linear)
        columns.append(rise[..., None] / (2.0 * _STEP))
    return np.concatenate(columns, axis=-1)
