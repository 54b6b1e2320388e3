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
from behavgen.fit.s_curve_likelihood import (
    Rows,
    counts_loglik,
    evaluate,
    flat_loglik,
    profile_end,
)
from behavgen.units import format_si

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
    decisions, ones : ndarray of int
        In total.
    lowest_v, highest_v : ndarray
        Range of the levels, V; infinite where there is no decision.
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
        what, allowed = _WORDS[Reason(self.reason[curve])](self, curve)
        return Fault(what=what, allowed=allowed)


def identify(rows: Rows, level: float = 0.95) -> Identification:
    """Judge every curve, see `Identification`.

    A curve is fine when it has two levels or more, ones and zeros overlap, and it
    rises by more than `LEAST_SLOPE_Z` standard errors.
    """
    trials = rows.ones + rows.zeros
    lowest_v, highest_v = _ends(rows, trials > 0)
    lowest_zero_v, highest_zero_v = _ends(rows, rows.zeros > 0)
    lowest_one_v, highest_one_v = _ends(rows, rows.ones > 0)
    slope_z = _slope_z(rows, trials)
    all_ones, decisions = rows.total(rows.ones), rows.total(trials)
    reason = np.select(
        [
            lowest_v >= highest_v,
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

    Its supremum, at sigma zero, is that of the one level with both outcomes, if there is one.
    """
    both = (rows.vdiff_v == highest_zero_v[rows.curve]) & (rows.vdiff_v == lowest_one_v[rows.curve])
    supremum = counts_loglik(rows.total(rows.ones * both), rows.total(rows.zeros * both))
    target = supremum - 0.5 * normal_quantile(level) ** 2
    bound_v = np.full(rows.curves, np.inf)
    bounded = flat_loglik(rows) < target
    low_v, high_v = _ends(rows, rows.ones + rows.zeros > 0)
    rows, offset_v = rows.of(bounded), 0.5 * (highest_zero_v + lowest_one_v)[bounded]
    sigma_v = 0.25 * (high_v - low_v)[bounded]
    bound_v[bounded] = profile_end(
        rows,
        parameter=1,
        side=1,
        offset_v=offset_v,
        sigma_v=sigma_v,
        local=evaluate(rows, offset_v, sigma_v),
        target=target[bounded],
    )
    return bound_v


def _volts(x: float) -> str:
    return format_si(x, "V", digits=4)


def _too_few(found: Identification, c: int) -> tuple[str, str]:
    only = f"all {found.decisions[c]} decisions are at {_volts(found.lowest_v[c])}"
    what = only if found.decisions[c] else "there is no decision"
    return (
        f"{what}: one input level cannot tell offset and sigma apart",
        "measure at two levels or more, best five to nine within 2 sigma of the trip point",
    )


def _one_sided(found: Identification, c: int) -> tuple[str, str]:
    ones = bool(found.ones[c])
    span = f"{_volts(found.lowest_v[c])} to {_volts(found.highest_v[c])}"
    beyond = f"below {_volts(found.lowest_v[c])}" if ones else f"above {_volts(found.highest_v[c])}"
    return (
        f"all {found.decisions[c]} decisions from {span} are {'ones' if ones else 'zeros'}",
        f"the trip point lies {beyond}, or inp and inn are not what the columns say; "
        "measure on both sides of it",
    )


def _separated(found: Identification, c: int) -> tuple[str, str]:
    low_v, high_v = found.highest_zero_v[c], found.lowest_one_v[c]
    bound_v, confidence = found.sigma_bound_v[c], f"{100 * found.level:g} %"
    bounded = (
        f"sigma is at most {_volts(bound_v)} ({confidence})"
        if np.isfinite(bound_v)
        else "sigma may have any size"
    )
    if low_v < high_v:
        seen = f"only zeros up to {_volts(low_v)}, only ones from {_volts(high_v)} on"
        middle_v, half_v = 0.5 * (low_v + high_v), 0.5 * (high_v - low_v)
    else:
        seen = f"only the level {_volts(low_v)} gave both"
        middle_v, half_v = low_v, min(1.5 * bound_v, 0.5 * (found.highest_v[c] - found.lowest_v[c]))
    return (
        f"ones and zeros do not overlap: {seen}; {bounded}, its value cannot be told",
        f"measure levels {_volts(half_v / 3)} apart from {_volts(middle_v - half_v)} to "
        f"{_volts(middle_v + half_v)}, closer again if they still do not overlap: two levels or "
        "more, best within 1.5 sigma of the trip point, must give both ones and zeros",
    )


def _reversed(found: Identification, c: int) -> tuple[str, str]:
    return (
        f"the share of ones falls as vdiff rises ({found.slope_z[c]:.1f} standard errors)",
        "vdiff is V(inp) - V(inn): swap the inputs' roles or the sense of the bit",
    )


def _flat(found: Identification, c: int) -> tuple[str, str]:
    span = f"{_volts(found.lowest_v[c])} to {_volts(found.highest_v[c])}"
    return (
        f"the share of ones does not rise from {span}: "
        f"slope {found.slope_z[c]:.1f} standard errors, {LEAST_SLOPE_Z:.1f} needed",
        "measure a wider range of levels, about +-2 sigma around the trip point, "
        "or more decisions at each",
    )


_WORDS = {
    Reason.TOO_FEW: _too_few,
    Reason.ONE_SIDED: _one_sided,
    Reason.SEPARATED: _separated,
    Reason.REVERSED: _reversed,
    Reason.FLAT: _flat,
}
