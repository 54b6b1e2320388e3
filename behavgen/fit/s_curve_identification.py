"""Whether an S-curve has an offset and a sigma at all, told before fitting, in words.

A probit regression has a finite maximum only where ones and zeros overlap
(A. Albert & J. A. Anderson, Biometrika 71, 1984); that the curve rises is judged by
the score test of its slope (P. Armitage, Biometrics 11, 1955). Both need no fit.
"""

from __future__ import annotations

import enum
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault
from behavgen.fit.intervals import normal_quantile
from behavgen.fit.s_curve_likelihood import Rows, profile_end

__all__ = ["Identification", "Reason", "identify"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

LEAST_SLOPE_Z = 3.291
"""A slope nearer to zero than this many standard errors is none: two-sided 0.1 %."""


class Reason(enum.IntEnum):
    """Why an S-curve can, or cannot, be fitted."""

    FINE = 0
    TOO_FEW = 1
    ONE_SIDED = 2
    SEPARATED = 3
    REVERSED = 4
    FLAT = 5


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Identification:
    """What can be known of each curve without a fit, shape (C,) each.

    Parameters
    ----------
    reason : ndarray of int
        One of `Reason`.
    levels, decisions, ones : ndarray of int
        Distinct input levels, decisions and ones in total.
    lowest_v, highest_v : ndarray
        Range of the levels, V.
    highest_zero_v, lowest_one_v : ndarray
        Highest level that gave a zero, lowest that gave a one, V; infinite
        where there is none.
    slope_z : ndarray
        Slope over its standard error where it is zero (score test).
    sigma_bound_v : ndarray
        For separated curves the largest sigma that the counts allow at `level`, V;
        infinite where they allow any. NaN for all others.
    level : float
        Confidence of that bound.
    """

    reason: Integers
    levels: Integers
    decisions: Integers
    ones: Integers
    lowest_v: Floats
    highest_v: Floats
    highest_zero_v: Floats
    lowest_one_v: Floats
    slope_z: Floats
    sigma_bound_v: Floats
    level: float

    def fault(self, curve: int) -> Fault:
        """Return what was found and what to measure instead; for curves that are not fine."""
        return Fault(**_WORDS[Reason(self.reason[curve])](self, curve))


def identify(rows: Rows, level: float = 0.95) -> Identification:
    """Judge every curve, see `Identification`.

    A curve is fine when it has two levels or more, ones and zeros overlap, and it
    rises by more than `LEAST_SLOPE_Z` standard errors.
    """
    trials = rows.ones + rows.zeros
    used = trials > 0
    lowest_v, highest_v = _ends(rows, used)
    lowest_zero_v, highest_zero_v = _ends(rows, rows.zeros > 0)
    lowest_one_v, highest_one_v = _ends(rows, rows.ones > 0)
    slope_z = _slope_z(rows, trials)
    all_ones, decisions = rows.total(rows.ones), rows.total(trials)
    levels = _distinct_levels(rows, used)
    reason = np.select(
        [
            levels < 2,
            (all_ones == 0) | (all_ones == decisions),
            lowest_one_v >= highest_zero_v,
            (highest_one_v <= lowest_zero_v) | (slope_z <= -LEAST_SLOPE_Z),
            slope_z < LEAST_SLOPE_Z,
        ],
        [Reason.TOO_FEW, Reason.ONE_SIDED, Reason.SEPARATED, Reason.REVERSED, Reason.FLAT],
        Reason.FINE,
    ).astype(np.int64)
    bound_v = np.full(rows.curves, np.nan)
    separated = reason == Reason.SEPARATED
    bound_v[separated] = _sigma_bound(
        rows.of(separated), highest_zero_v[separated], lowest_one_v[separated], level
    )
    return Identification(
        reason=reason,
        levels=levels,
        decisions=decisions.astype(np.int64),
        ones=all_ones.astype(np.int64),
        lowest_v=lowest_v,
        highest_v=highest_v,
        highest_zero_v=highest_zero_v,
        lowest_one_v=lowest_one_v,
        slope_z=slope_z,
        sigma_bound_v=bound_v,
        level=level,
    )


def _ends(rows: Rows, chosen: npt.NDArray[np.bool_]) -> tuple[Floats, Floats]:
    """Return lowest and highest level among the chosen rows of each curve."""
    low, high = np.full(rows.curves, np.inf), np.full(rows.curves, -np.inf)
    np.minimum.at(low, rows.curve[chosen], rows.vdiff_v[chosen])
    np.maximum.at(high, rows.curve[chosen], rows.vdiff_v[chosen])
    return low, high


def _distinct_levels(rows: Rows, used: npt.NDArray[np.bool_]) -> Integers:
    curve, vdiff_v = rows.curve[used], rows.vdiff_v[used]
    order = np.lexsort((vdiff_v, curve))
    curve, vdiff_v = curve[order], vdiff_v[order]
    new = np.ones(curve.size, dtype=bool)
    new[1:] = (np.diff(curve) > 0) | (np.diff(vdiff_v) > 0)
    return np.bincount(curve[new], minlength=rows.curves)


def _slope_z(rows: Rows, trials: Floats) -> Floats:
    """Return the score statistic of the slope; 0 where all decisions are alike."""
    decisions = np.maximum(rows.total(trials), 1.0)
    share = rows.total(rows.ones) / decisions
    apart = rows.vdiff_v - (rows.total(trials * rows.vdiff_v) / decisions)[rows.curve]
    score = rows.total((rows.ones - trials * share[rows.curve]) * apart)
    variance = share * (1.0 - share) * rows.total(trials * apart * apart)
    return np.where(variance > 0.0, score / np.sqrt(np.where(variance > 0.0, variance, 1.0)), 0.0)


def _sigma_bound(rows: Rows, highest_zero_v: Floats, lowest_one_v: Floats, level: float) -> Floats:
    """Return where the profile likelihood of sigma has fallen by half a chi-square quantile.

    Its supremum, at sigma zero, gives every level its own probability.
    """
    if rows.curves == 0:
        return np.empty(0)
    trials = rows.ones + rows.zeros
    target = _counts_loglik(rows, trials, rows.ones, rows.zeros) - 0.5 * normal_quantile(level) ** 2
    decisions = rows.total(trials)
    share = (rows.total(rows.ones) / decisions)[rows.curve]
    flat = rows.total(_xlogy(rows.ones, share) + _xlogy(rows.zeros, 1.0 - share))
    bounded = flat < target
    ...
