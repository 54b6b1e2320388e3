"""S-curves: offset and noise sigma from counted decisions, many curves at once.

``P(1) = Phi((vdiff - offset) / sigma)`` by maximum likelihood (D. J. Finney, Probit
Analysis, 1971). Intervals come from the profile likelihood, whose coverage holds
where plain standard errors of sigma fall short; standard errors come from the
expected information, as other fits want them for weights.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
import numpy.typing as npt

from behavgen.fit.intervals import normal_quantile, student_quantile
from behavgen.fit.s_curve_goodness import MISFIT_P, Fitted, Goodness, judge_goodness, tail_z
from behavgen.fit.s_curve_identification import Identification, Reason, identify
from behavgen.fit.s_curve_likelihood import (
    Rows,
    evaluate,
    flat_loglik,
    maximise,
    profile_end,
)

__all__ = ["SCurveFits", "fit_s_curves", "misfit_notice"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Booleans = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SCurveFits:
    """Fits of `C` S-curves, shape (C,) each; NaN where `identification` is not fine.

    Parameters
    ----------
    identification : Identification
        Whether each curve could be fitted, and the words if not.
    offset_v, sigma_v : ndarray
        Trip point and noise sigma, V.
    covariance : ndarray, shape (C, 2, 2)
        Of (offset in V, ln sigma); expected information, times `overdispersion`.
    offset_low_v, offset_high_v, sigma_low_v, sigma_high_v : ndarray
        Profile likelihood intervals at `level`, V; infinite where the counts
        allow no slope at all at that level.
    level : float
        Confidence, 0..1.
    loglik : ndarray
        Log likelihood without the binomial coefficients.
    deviance, pearson : ndarray
        Distance of the counts from the curve.
    degrees_of_freedom : ndarray of int
        Rows with decisions, less 2.
    goodness_p : ndarray
        Probability of a worse fit if the law holds; NaN where two rows carry all.
    overdispersion : ndarray
        Factor by which variances exceed binomial ones; 1 unless `goodness_p` is
        below `MISFIT_P`.
    tail_z : ndarray
        Standard normal if the noise is Gaussian; below zero for heavier tails,
        above zero for lighter ones. NaN with less than three rows that tell.
    converged : ndarray of bool
        Estimates and both intervals were found.
    """

    identification: Identification
    offset_v: Floats
    sigma_v: Floats
    covariance: Floats
    offset_low_v: Floats
    offset_high_v: Floats
    sigma_low_v: Floats
    sigma_high_v: Floats
    level: float
    loglik: Floats
    deviance: Floats
    pearson: Floats
    degrees_of_freedom: Integers
    goodness_p: Floats
    overdispersion: Floats
    tail_z: Floats
    converged: Booleans

    @property
    def offset_error_v(self) -> Floats:
        """Standard error of the offset, V."""
        error_v: Floats = np.sqrt(self.covariance[:, 0, 0])
        return error_v

    @property
    def sigma_error_v(self) -> Floats:
        """Standard error of sigma, V."""
        error_v: Floats = self.sigma_v * np.sqrt(self.covariance[:, 1, 1])
        return error_v


def fit_s_curves(
    vdiff_v: npt.ArrayLike,
    trials: npt.ArrayLike,
    ones: npt.ArrayLike,
    curve: npt.ArrayLike,
    *,
    level: float = 0.95,
) -> SCurveFits:
    """Fit every S-curve of a table.

    Parameters
    ----------
    vdiff_v : array_like, shape (N,)
        Input level, V.
    trials, ones : array_like of int, shape (N,)
        Decisions at that level and how many were one.
    curve : array_like of int, shape (N,)
        Which curve the row belongs to, 0 to C-1, in any order.
    level : float
        Confidence of the intervals, 0..1.

    Returns
    -------
    SCurveFits
        Curves that cannot be identified are NaN and say why in `identification`.
    """
    index = np.asarray(curve, dtype=np.int64)
    counted = np.asarray(ones, dtype=float)
    rows = Rows(
        vdiff_v=np.asarray(vdiff_v, dtype=float),
        ones=counted,
        zeros=np.asarray(trials, dtype=float) - counted,
        curve=index,
        curves=int(index.max(initial=-1)) + 1,
    )
    identification = identify(rows, level)
    fine = identification.reason == Reason.FINE
    fits = _fit(rows.of(fine), level)
    return SCurveFits(
        identification=identification,
        level=level,
        **{name: _spread(column, fine) for name, column in fits._asdict().items()},
    )


def misfit_notice(fits: SCurveFits, curve: int) -> str:
    """Return how a curve departs from the law and what that did to it; "" if it does not.

    Each of the two tests behind it speaks up by chance once in a thousand curves.
    """
    p, z = fits.goodness_p[curve], fits.tail_z[curve]
    found = []
    if p < MISFIT_P:
        found.append(
            f"the counts scatter more than binomial ones around a Gaussian S-curve (p = {p:.1g}): "
            f"variances of offset and sigma are multiplied by {fits.overdispersion[curve]:.3g}; "
            "look for drift, memory between decisions or mixed conditions"
        )
    if abs(z) > normal_quantile(1.0 - MISFIT_P):
        found.append(
            f"the noise has {'heavier' if z < 0 else 'lighter'} tails than Gaussian "
            f"({abs(z):.1f} standard errors): error rates far out are no predictions"
        )
    return "; ".join(found)


class _Columns(NamedTuple):
    """Fields of `SCurveFits`, for the curves that are fine."""

    offset_v: Floats
    sigma_v: Floats
    covariance: Floats
    offset_low_v: Floats
    offset_high_v: Floats
    sigma_low_v: Floats
    sigma_high_v: Floats
    loglik: Floats
    deviance: Floats
    pearson: Floats
    degrees_of_freedom: Integers
    goodness_p: Floats
    overdispersion: Floats
    tail_z: Floats
    converged: Booleans


def _spread(column: npt.NDArray[Any], fine: Booleans) -> npt.NDArray[Any]:
    """Return `column` at the fine curves and NaN, 0 or False elsewhere."""
    empty = np.nan if column.dtype.kind == "f" else 0
    spread = np.full(fine.shape + column.shape[1:], empty, dtype=column.dtype)
    spread[fine] = column
    return spread


def _fit(rows: Rows, level: float) -> _Columns:
    best = maximise(rows)
    at = Fitted.of(rows, best.offset_v, best.sigma_v)
    goodness = judge_goodness(at)
    ends = _profile_intervals(at, goodness, level)
    covariance = at.covariance * goodness.overdispersion[:, None, None]
    covariance[:, 0, :] *= at.sigma_v[:, None]
    covariance[:, :, 0] *= at.sigma_v[:, None]
    return _Columns(
        offset_v=at.offset_v,
        sigma_v=at.sigma_v,
        covariance=covariance,
        offset_low_v=ends[0],
        offset_high_v=ends[1],
        sigma_low_v=ends[2],
        sigma_high_v=ends[3],
        loglik=at.loglik,
        deviance=goodness.deviance,
        pearson=goodness.pearson,
        degrees_of_freedom=goodness.degrees_of_freedom,
        goodness_p=goodness.p,
        overdispersion=goodness.overdispersion,
        tail_z=tail_z(at),
        converged=best.converged & ~np.isnan(ends).any(axis=0),
    )


def _profile_intervals(at: Fitted, goodness: Goodness, level: float) -> Floats:
    """Return offset low and high, sigma low and high, shape (4, C), V.

    A misfit's likelihood is divided by its overdispersion and referred to
    Student's t (Finney 1971, heterogeneity factor).
    """
    spread = goodness.overdispersion
    quantile = np.full(spread.shape, normal_quantile(level))
    misfit = spread > 1.0
    quantile[misfit] = student_quantile(level, goodness.degrees_of_freedom[misfit])
    reach = quantile * np.sqrt(spread)
    target = at.loglik - 0.5 * reach**2
    bounded = flat_loglik(at.rows) < target
    local = evaluate(at.rows, at.offset_v, at.sigma_v)
    ends = np.empty((4, at.rows.curves))
    for i, (parameter, side) in enumerate(((0, -1), (0, 1), (1, -1), (1, 1))):
        finds = bounded if i != 2 else np.ones_like(bounded)
        ends[i] = side * np.inf
        ends[i, finds] = profile_end(
            at.rows.of(finds),
            parameter=parameter,
            side=side,
            offset_v=at.offset_v[finds],
            sigma_v=at.sigma_v[finds],
            local=local.of(finds),
            target=target[finds],
        )
    return ends
