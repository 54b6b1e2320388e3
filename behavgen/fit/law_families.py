"""Textbook delay laws, fitted at every condition and carried by nodes.

Each law is linear in everything but one or two voltages. For given voltages
the rest is linear least squares (separable least squares; G. H. Golub,
V. Pereyra, SIAM J. Numer. Anal. 10, 1973, 413-432), so that the voltages are
found on a grid that closes in on its best point and by Newton steps from
there, for all conditions at once and without starting values.

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

_GRID = 9
_ZOOMS = 3
_NEWTON_STEPS = 8
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


def solve_families(rows: DelayRows) -> list[LawSolution]:
    """Fit every textbook law that the rows can tell from a constant, at all conditions."""
    used = rows.weight > 0.0
    distinct = min(len(np.unique(v[u])) for v, u in zip(rows.overdrive_v, used, strict=True))
    lowest, highest = rows.overdrive_v[used].min(), rows.overdrive_v[used].max()
    return [
        _solve(rows, family, lowest, highest)
        for family in _FAMILIES
        if distinct > 2 * family.voltages + 3
    ]


def _solve(rows: DelayRows, family: _Family, lowest: float, highest: float) -> LawSolution:
    shape = _polished(rows, family, _best_shape(rows, family, highest))
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


def _best_shape(rows: DelayRows, family: _Family, highest: float) -> Floats:
    """Return the logarithms of the voltages, shape (C, S), by a grid that closes in."""
    conditions = len(rows.delay_s)
    centre = np.full((conditions, family.voltages), np.log(0.05 * highest))
    reach = np.log(200.0)
    for _ in range(_ZOOMS):
        steps = np.linspace(-reach, reach, _GRID)
        mesh = np.stack(np.meshgrid(*[steps] * family.voltages, indexing="ij"), axis=-1)
        offsets = mesh.reshape(-1, family.voltages)
        squares = np.stack([_linear(rows, family, centre + offset)[1] for offset in offsets])
        centre = centre + offsets[np.argmin(squares, axis=0)]
        reach *= 2.5 / (_GRID - 1)
    return centre


def _polished(rows: DelayRows, family: _Family, shape: Floats) -> Floats:
    """Take Gauss-Newton steps in all parameters, keeping those that lower the squares."""
    linear, squares = _linear(rows, family, shape)
    factor = (np.sqrt(rows.weight) / rows.delay_s)[..., None]
    for _ in range(_NEWTON_STEPS):
        scaled = _jacobian(family, rows.overdrive_v, shape, linear) * factor
        model = _delay(family, rows.overdrive_v, shape, linear)
        gap = ((rows.delay_s - model) * factor[..., 0])[..., None]
        step = inverse_of(scaled.transpose(0, 2, 1) @ scaled) @ scaled.transpose(0, 2, 1) @ gap
        trial = shape + np.clip(step[:, -family.voltages :, 0], -1.0, 1.0)
        trial_linear, trial_squares = _linear(rows, family, trial)
        better = trial_squares < squares
        shape = np.where(better[:, None], trial, shape)
        linear = np.where(better[:, None], trial_linear, linear)
        squares = np.minimum(squares, trial_squares)
    return shape


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
