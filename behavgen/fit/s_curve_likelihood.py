"""Likelihood of many S-curves at once: evaluated, maximised, profiled.

``P(1) = Phi(z)``, ``z = (vdiff - offset) / sigma``. Rows of all curves lie in one
flat array and name their curve, so curves may differ in length; sums over a
curve are one `numpy.bincount`, and no loop runs over curves.

Everything is worked out in a curve's own units: shifts of the offset in
sigmas and changes of ln sigma. All derivatives then follow from five sums
over rows, whatever the scale of the voltages.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
import numpy.typing as npt
from scipy.special import ndtri, xlogy

from behavgen.formulas.gaussian import gaussian_tails

__all__ = [
    "Local",
    "Rows",
    "Settled",
    "counts_loglik",
    "evaluate",
    "flat_loglik",
    "maximise",
    "profile_end",
]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Booleans = npt.NDArray[np.bool_]

_MAX_STEPS = 60
_SETTLED = 1e-3
"""Newton step, in standard errors, after which the error is of the order of its square."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Rows:
    """Counts at input levels, shape (N,) each, of `curves` S-curves.

    `curve` names the curve of each row, 0 to ``curves - 1``, in any order.
    """

    vdiff_v: Floats
    ones: Floats
    zeros: Floats
    curve: Integers
    curves: int

    def total(self, per_row: Floats) -> Floats:
        """Sum over the rows of each curve, shape (C,)."""
        sums = np.bincount(self.curve, weights=per_row, minlength=self.curves)
        return np.asarray(sums, dtype=float)

    def of(self, wanted: Booleans) -> Rows:
        """Return the rows of the wanted curves, renumbered; `wanted` of shape (C,)."""
        if wanted.all():
            return self
        keep = wanted[self.curve]
        return Rows(
            vdiff_v=self.vdiff_v[keep],
            ones=self.ones[keep],
            zeros=self.zeros[keep],
            curve=(np.cumsum(wanted) - 1)[self.curve[keep]],
            curves=int(wanted.sum()),
        )


class Local(NamedTuple):
    """Log likelihood of each curve and its derivatives by z, shape (C,) each.

    ``s_k = sum (dl/dz) z^k`` and ``q_k = sum (-d2l/dz2) z^k`` over a curve's rows.
    """

    loglik: Floats
    s0: Floats
    s1: Floats
    q0: Floats
    q1: Floats
    q2: Floats

    def of(self, wanted: Booleans) -> Local:
        """Return the wanted curves' part."""
        return Local(*(part[wanted] for part in self))


def evaluate(rows: Rows, offset_v: Floats, sigma_v: Floats) -> Local:
    """Return the log likelihood, without its constant, and its derivatives."""
    z = (rows.vdiff_v - offset_v[rows.curve]) / sigma_v[rows.curve]
    tails = gaussian_tails(z)
    up, down = rows.ones * tails.hazard_below, rows.zeros * tails.hazard_above
    slope = up - down
    bend = up * (z + tails.hazard_below) + down * (tails.hazard_above - z)
    bend_z = bend * z
    return Local(
        loglik=rows.total(rows.ones * tails.log_below + rows.zeros * tails.log_above),
        s0=rows.total(slope),
        s1=rows.total(slope * z),
        q0=rows.total(bend),
        q1=rows.total(bend_z),
        q2=rows.total(bend_z * z),
    )


def counts_loglik(ones: Floats, zeros: Floats) -> Floats:
    """Return the log likelihood of counts at their own proportion, without its constant."""
    trials = np.maximum(ones + zeros, 1.0)
    loglik: Floats = xlogy(ones, ones / trials) + xlogy(zeros, zeros / trials)
    return loglik


def flat_loglik(rows: Rows) -> Floats:
    """Return the log likelihood of each curve as sigma grows without bound, shape (C,)."""
    return counts_loglik(rows.total(rows.ones), rows.total(rows.zeros))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Settled:
    """Where a walk over the likelihood ended, shape (C,) each."""

    offset_v: Floats
    sigma_v: Floats
    converged: Booleans


Step = tuple[Floats, Floats]
"""``z -> z + shift + stretch z``: shift and stretch, shape (C,) each."""


def maximise(rows: Rows) -> Settled:
    """Return the maximum likelihood estimates of curves known to have one.

    Newton's method on the linear predictor, in which the log likelihood is
    concave (J. W. Pratt, J. Am. Stat. Assoc. 76, 1981).
    """
    still = np.zeros(rows.curves)
    return _walk(
        rows,
        _start(rows),
        (still, still),
        lambda local, _: _newton_step(local),
        np.full(rows.curves, -np.inf),
        climb=True,
    )


def _start(rows: Rows) -> tuple[Floats, Floats]:
    """Weighted line through the empirical probits (D. J. Finney, Probit Analysis, 1971)."""
    trials = rows.ones + rows.zeros
    share = (rows.ones + 0.5) / (trials + 1.0)
    probit = ndtri(share)
    weight = trials * np.exp(-probit * probit) / (share * (1.0 - share))
    total = rows.total(weight)
    level = rows.total(weight * rows.vdiff_v) / total
    height = rows.total(weight * probit) / total
    apart = rows.vdiff_v - level[rows.curve]
    spread = rows.total(weight * apart * apart)
    slope = rows.total(weight * apart * probit) / spread
    flattest = 0.1 / np.sqrt(spread / total)
    slope = np.maximum(slope, flattest)
    return level - height / slope, 1.0 / slope


def profile_end(
    rows: Rows,
    *,
    parameter: int,
    side: int,
    offset_v: Floats,
    sigma_v: Floats,
    local: Local,
    target: Floats,
) -> Floats:
    """Return where the profile likelihood of a parameter falls to a target.

    That is the parameter's extreme over all lines ``z(vdiff)`` whose log likelihood
    reaches the target, a convex set. Each step goes to the extreme over the
    ellipse that the local quadratic makes of that set.

    Parameters
    ----------
    rows : Rows
    parameter : int
        0 for the offset, 1 for sigma.
    side : int
        -1 for the lower end, 1 for the upper.
    offset_v, sigma_v : ndarray, shape (C,)
        A start, such as the maximum.
    local : Local
        `evaluate` there.
    target : ndarray, shape (C,)
        Log likelihood on the scale of `evaluate`.

    Returns
    -------
    ndarray, shape (C,)
        The parameter in V; NaN where no end was found.
    """
    end = _walk(
        rows,
        (offset_v, sigma_v),
        _extreme_step(parameter, side, local, target),
        lambda here, live: _extreme_step(parameter, side, here, target[live]),
        target - np.abs(local.loglik - target),
        climb=False,
    )
    return np.where(end.converged, (end.offset_v, end.sigma_v)[parameter], np.nan)


def _walk(
    rows: Rows,
    start: tuple[Floats, Floats],
    step: Step,
    next_step: Callable[[Local, Integers], Step],
    floor: Floats,
    *,
    climb: bool,
) -> Settled:
    """Take steps until they are far below a standard error.

    A step that ends below the floor is halved; when climbing, the floor is the
    likelihood reached. Curves that have settled drop out of the work.

    Parameters
    ----------
    rows : Rows
    start : tuple of ndarray, shape (C,)
        Offset and sigma, V.
    step : Step
        The first one.
    next_step : callable
        From the derivatives at the curves named by an index array, the next step.
    floor : ndarray, shape (C,)
        Log likelihood.
    climb : bool
    """
    offset_v, sigma_v = start[0].copy(), start[1].copy()
    floor = floor.copy()
    converged = np.zeros(rows.curves, dtype=bool)
    live = np.arange(rows.curves)
    shift, stretch = step
    for _ in range(_MAX_STEPS):
        trial_v = _moved(offset_v[live], sigma_v[live], shift, stretch)
        local = evaluate(rows, *trial_v)
        kept = local.loglik >= floor[live]
        offset_v[live[kept]], sigma_v[live[kept]] = trial_v[0][kept], trial_v[1][kept]
        if climb:
            floor[live[kept]] = local.loglik[kept] - 1e-12 * np.abs(local.loglik[kept])
        shift, stretch = 0.5 * shift, 0.5 * stretch
        shift[kept], stretch[kept] = next_step(local.of(kept), live[kept])
        settled = kept & (_size2(local, shift, stretch) < _SETTLED**2)
        last = live[settled]
        offset_v[last], sigma_v[last] = _moved(
            offset_v[last], sigma_v[last], shift[settled], stretch[settled]
        )
        converged[last] = True
        rows, live = rows.of(~settled), live[~settled]
        shift, stretch = shift[~settled], stretch[~settled]
        if not live.size:
            break
    return Settled(offset_v=offset_v, sigma_v=sigma_v, converged=converged)


def _size2(local: Local, shift: Floats, stretch: Floats) -> Floats:
    """Return the square of a step in standard errors."""
    return (local.q0 * shift + 2.0 * local.q1 * stretch) * shift + local.q2 * stretch * stretch


def _moved(
    offset_v: Floats, sigma_v: Floats, shift: Floats, stretch: Floats
) -> tuple[Floats, Floats]:
    """Return offset and sigma after ``z -> z + shift + stretch z``.

    Steps are shortened where sigma would grow more than tenfold.
    """
    shorter = 0.9 / np.maximum(-stretch, 0.9)
    new_sigma_v = sigma_v / (1.0 + shorter * stretch)
    return offset_v - shorter * shift * new_sigma_v, new_sigma_v


def _newton_step(local: Local) -> tuple[Floats, Floats]:
    """Return the shift and stretch that reach the top of the local quadratic."""
    det = local.q0 * local.q2 - local.q1 * local.q1
    shift = (local.q2 * local.s0 - local.q1 * local.s1) / det
    stretch = (local.q0 * local.s1 - local.q1 * local.s0) / det
    return shift, stretch


def _extreme_step(parameter: int, side: int, local: Local, target: Floats) -> tuple[Floats, Floats]:
    """Return shift and stretch to the extreme of a parameter over the local ellipse.

    A higher offset is a lower shift, a higher sigma a lower stretch. Where the
    ellipse is empty the step goes to its centre.
    """
    shift, stretch = _newton_step(local)
    top = local.loglik - target + 0.5 * (shift * local.s0 + stretch * local.s1)
    det = local.q0 * local.q2 - local.q1 * local.q1
    own = local.q2 if parameter == 0 else local.q0
    reach = side * np.sqrt(2.0 * np.maximum(top, 0.0) / (det * own))
    if parameter == 0:
        return shift - reach * local.q2, stretch + reach * local.q1
    return shift + reach * local.q1, stretch - reach * local.q0
