"""How well fitted S-curves agree with the counts they were fitted to."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
import numpy.typing as npt
from scipy.special import chdtrc

from behavgen.fit.s_curve_likelihood import Rows, counts_loglik
from behavgen.formulas.gaussian import GaussianTails, gaussian_tails, normal_pdf

__all__ = ["MISFIT_P", "Fitted", "Goodness", "judge_goodness", "tail_z"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

MISFIT_P = 1e-3
"""A curve with a goodness p-value below this does not follow the law; its intervals are widened."""

_LEAST_EVIDENCE = 0.05
"""Expected goodness statistic, in squared residuals, below which there is nothing to test."""

_CELL_VARIANCE = 5.0
"""Levels are pooled until so many wrong decisions are expected (common practice: 5)."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Fitted:
    """Rows seen from the fitted curves: shape (N,) a row, shape (C,) a curve.

    `weight` is each row's expected information on z; `covariance`, of (offset in
    sigmas, ln sigma), the inverse of a curve's expected information.
    """

    rows: Rows
    offset_v: Floats
    sigma_v: Floats
    z: Floats
    tails: GaussianTails
    trials: Floats
    weight: Floats
    covariance: Floats
    loglik: Floats

    @classmethod
    def of(cls, rows: Rows, offset_v: Floats, sigma_v: Floats) -> Fitted:
        """Look at rows from curves with these offsets and sigmas, shape (C,), V."""
        z = (rows.vdiff_v - offset_v[rows.curve]) / sigma_v[rows.curve]
        tails = gaussian_tails(z)
        trials = rows.ones + rows.zeros
        weight = trials * tails.hazard_below * tails.hazard_above
        weight_z = weight * z
        w0, w1, w2 = rows.total(weight), rows.total(weight_z), rows.total(weight_z * z)
        adjugate = np.stack([np.stack([w2, -w1], -1), np.stack([-w1, w0], -1)], -1)
        return cls(
            rows=rows,
            offset_v=offset_v,
            sigma_v=sigma_v,
            z=z,
            tails=tails,
            trials=trials,
            weight=weight,
            covariance=adjugate / (w0 * w2 - w1 * w1)[:, None, None],
            loglik=rows.total(rows.ones * tails.log_below + rows.zeros * tails.log_above),
        )


class Goodness(NamedTuple):
    """Agreement of each curve with its counts, as in the fields of `SCurveFits`."""

    deviance: Floats
    pearson: Floats
    degrees_of_freedom: Integers
    p: Floats
    overdispersion: Floats


def judge_goodness(at: Fitted) -> Goodness:
    """Compare counts with the fitted curves; see `_statistic` for the test."""
    rows, total = at.rows, at.rows.total
    below, above = np.exp(at.tails.log_below), np.exp(at.tails.log_above)
    variance = at.trials * below * above
    residual = rows.ones - at.trials * below
    statistic, mean, spread = _statistic(at, residual, variance, below * above)
    degrees_of_freedom = np.bincount(rows.curve[at.trials > 0], minlength=rows.curves) - 2
    testable = (degrees_of_freedom > 0) & (mean > _LEAST_EVIDENCE)
    p = np.full(rows.curves, np.nan)
    scale = 2.0 * mean[testable] / spread[testable]
    p[testable] = chdtrc(scale * mean[testable], scale * statistic[testable])
    overdispersion = np.ones(rows.curves)
    misfit = np.nan_to_num(p, nan=1.0) < MISFIT_P
    overdispersion[misfit] = np.maximum(statistic[misfit] / mean[misfit], 1.0)
    return Goodness(
        deviance=2.0 * (total(counts_loglik(rows.ones, rows.zeros)) - at.loglik),
        pearson=total(residual**2 / np.maximum(variance, np.finfo(float).tiny)),
        degrees_of_freedom=degrees_of_freedom,
        p=p,
        overdispersion=overdispersion,
    )


def _statistic(
    at: Fitted, residual: Floats, variance: Floats, spread: Floats
) -> tuple[Floats, Floats, Floats]:
    """Return a sum of squared residuals with its mean and variance if the law holds.

    Pearson's statistic lets one improbable decision far out on the curve cry wolf,
    and says nothing of single decisions. Here neighbouring levels are first pooled
    into cells, then each cell's term is damped, ``r^2 / (v + 1)`` with its binomial
    variance `v`. Referred to the scaled chi-square variable of the same mean and
    variance this is Pearson's test where `v` is large. The moments follow from the
    fourth binomial moment ``3 v^2 + v (1 - 6 p q)`` and each cell's leverage, the
    part of its variance that the two fitted parameters take (derived).

    Parameters
    ----------
    at : Fitted
    residual, variance, spread : ndarray, shape (N,)
        Ones less expected ones, binomial variance, and ``p q``, of each row.
    """
    cell, curve = _cells(at, variance)
    r, v = np.bincount(cell, residual), np.bincount(cell, variance)
    excess = np.bincount(cell, variance * (1.0 - 6.0 * spread))
    slope = at.trials * normal_pdf(at.z)
    shift, stretch = np.bincount(cell, slope), np.bincount(cell, slope * at.z)
    c = at.covariance[curve]
    taken = shift * shift * c[:, 0, 0] + stretch * (2 * shift * c[:, 0, 1] + stretch * c[:, 1, 1])
    free = 1.0 - taken / np.maximum(v, np.finfo(float).tiny)
    damped = 1.0 / (v + 1.0)

    def total(per_cell: Floats) -> Floats:
        sums = np.bincount(curve, weights=per_cell, minlength=at.rows.curves)
        return np.asarray(sums, dtype=float)

    return (
        total(r * r * damped),
        total(v * free * damped),
        total((2.0 * v * v * free + excess * free * free) * damped * damped),
    )


def _cells(at: Fitted, variance: Floats) -> tuple[Integers, Integers]:
    """Pool neighbouring levels of a curve; return each row's cell and each cell's curve.

    A cell spans `_CELL_VARIANCE`; levels that carry more stand alone.
    """
    order = np.lexsort((at.z, at.rows.curve))
    curve, own = at.rows.curve[order], variance[order]
    first = np.ones(curve.size, dtype=bool)
    first[1:] = np.diff(curve) > 0
    so_far = np.cumsum(own) - 0.5 * own
    step = np.floor((so_far - so_far[first][np.cumsum(first) - 1]) / _CELL_VARIANCE)
    first[1:] |= np.diff(step) > 0
    cell = np.empty(curve.size, dtype=np.int64)
    cell[order] = np.cumsum(first) - 1
    return cell, curve[first]


def tail_z(at: Fitted) -> Floats:
    """Return the score statistic of a cubic bend of z, held constant beyond 2 sigma."""
    total, weight = at.rows.total, at.weight
    inner = np.clip(at.z, -2.0, 2.0)
    bend = inner * inner * inner
    slope = at.rows.ones * at.tails.hazard_below - at.rows.zeros * at.tails.hazard_above
    along = np.stack([total(weight * bend), total(weight * bend * at.z)], -1)
    own = total(weight * bend**2)
    left = own - np.einsum("ci,cij,cj->c", along, at.covariance, along)
    telling = left > 1e-9 * own
    return np.where(telling, total(slope * bend) / np.sqrt(np.where(telling, left, 1.0)), np.nan)
