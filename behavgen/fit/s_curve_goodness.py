"""How well fitted S-curves agree with the counts they were fitted to."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
import numpy.typing as npt
from scipy.special import chdtrc

from behavgen.fit.s_curve_likelihood import Rows, counts_loglik
from behavgen.formulas.gaussian import GaussianTails, gaussian_tails

__all__ = ["MISFIT_P", "Fitted", "Goodness", "judge_goodness", "tail_z"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

MISFIT_P = 1e-3
"""A curve with a goodness p-value below this does not follow the law; its intervals are widened."""

_LEAST_EVIDENCE = 0.05
"""Expected goodness statistic, in squared residuals, below which there is nothing to test."""


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
    """Compare squared residuals with their expectation.

    Pearson's statistic lets one improbable decision far out on the curve cry wolf,
    and its chi-square law fails for single decisions. The test therefore damps
    each term, ``r^2 / (v + 1)`` with the binomial variance `v`, and refers the sum
    to the scaled chi-square variable with its mean and variance, which follow from
    the fourth binomial moment ``v + 3 v^2 (1 - 2/n)`` and the rows' leverages
    (derived; for `v` well above 1 it is Pearson's test).
    """
    rows, total = at.rows, at.rows.total
    below, above = np.exp(at.tails.log_below), np.exp(at.tails.log_above)
    variance = at.trials * below * above
    residual2 = np.square(rows.ones - at.trials * below)
    free = 1.0 - at.weight * _leverage(at)
    damped = 1.0 / (variance + 1.0)
    statistic = total(residual2 * damped)
    mean = total(variance * free * damped)
    kurtosis = variance * (1.0 - 6.0 * below * above)
    spread = total((2.0 * variance**2 * free + kurtosis * free**2) * damped**2)
    degrees_of_freedom = np.bincount(rows.curve[at.trials > 0], minlength=rows.curves) - 2
    testable = (degrees_of_freedom > 0) & (mean > _LEAST_EVIDENCE)
    p = np.full(rows.curves, np.nan)
    scale = 2.0 * mean[testable] / spread[testable]
    p[testable] = chdtrc(scale * mean[testable], scale * statistic[testable])
    overdispersion = np.ones(rows.curves)
    misfit = testable & (np.nan_to_num(p, nan=1.0) < MISFIT_P)
    overdispersion[misfit] = np.maximum(statistic[misfit] / mean[misfit], 1.0)
    return Goodness(
        deviance=2.0 * (total(counts_loglik(rows.ones, rows.zeros)) - at.loglik),
        pearson=total(residual2 / np.maximum(variance, np.finfo(float).tiny)),
        degrees_of_freedom=degrees_of_freedom,
        p=p,
        overdispersion=overdispersion,
    )


def _leverage(at: Fitted) -> Floats:
    """Return the variance of each row's fitted z."""
    c, curve = at.covariance, at.rows.curve
    return c[curve, 0, 0] + at.z * (2.0 * c[curve, 0, 1] + at.z * c[curve, 1, 1])


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
