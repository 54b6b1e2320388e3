"""Likelihood of many S-curves at once: evaluated, maximised, profiled.

``P(1) = Phi(z)``, ``z = (vdiff - offset) / sigma``. Rows of all curves lie in one
flat array and name their curve, so curves may differ in length; sums over a
curve are one `numpy.bincount`, and no loop runs over curves.

Everything is worked out in a curve's own units: shifts of the offset in
sigmas and changes of ln sigma. All derivatives then follow from five sums
over rows, whatever the scale of the voltages.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
import numpy.typing as npt
from scipy.special import ndtri

from behavgen.formulas.gaussian import gaussian_tails

__all__ = ["Local", "Maximum", "Rows", "evaluate", "maximise", "profile_end"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Booleans = npt.NDArray[np.bool_]

_MAX_STEPS = 60
_SETTLED = 1e-4
"""Newton step, in standard errors, after which the next one is exact to rounding."""


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
        return np.bincount(self.curve, per_row, minlength=self.curves)

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


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Maximum:
    """Maximum likelihood estimates, shape (C,) each."""

    offset_v: Floats
    sigma_v: Floats
    converged: Booleans


def maximise(rows: Rows) -> Maximum:
    """Return the maximum likelihood estimates of curves known to have one.

    Newton's method on the linear predictor ``z -> z + shift + stretch z``, in which
    the log likelihood is concave (J. W. Pratt, J. Am. Stat. Assoc. 76, 1981); a
    step that lowers it is halved. Curves that have settled drop out of the work.
    """
    offset_v, sigma_v = _start(rows)
    loglik = np.full(rows.curves, -np.inf)
    converged = np.zeros(rows.curves, dtype=bool)
    live = np.arange(rows.curves)
    shift, stretch = np.zeros(rows.curves), np.zeros(rows.curves)
    for _ in range(_MAX_STEPS):
        trial_v = _moved(offset_v[live], sigma_v[live], shift, stretch)
        local = evaluate(rows, *trial_v)
        better = local.loglik >= loglik[live] - 1e-12 * np.abs(local.loglik)
        taken = live[better]
        offset_v[taken], sigma_v[taken] = trial_v[0][better], trial_v[1][better]
        loglik[taken] = local.loglik[better]
        newton = _newton_step(local)
        shift = np.where(better, newton[0], 0.5 * shift)
        stretch = np.where(better, newton[1], 0.5 * stretch)
        gain = shift * local.s0 + stretch * local.s1
        settled = better & (gain < _SETTLED**2)
        last = live[settled]
        offset_v[last], sigma_v[last] = _moved(
            offset_v[last], sigma_v[last], shift[settled], stretch[settled]
        )
        converged[last] = True
        rows, live = rows.of(~settled), live[~settled]
        shift, stretch = shift[~settled], stretch[~settled]
        if not live.size:
            break
    return Maximum(offset_v=offset_v, sigma_v=sigma_v, converged=converged)


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


def _moved(
    offset_v: Floats, sigma_v: Floats, shift: Floats, stretch: Floats
) -> tuple[Floats, Floats]:
    """Return offset and sigma after ``z -> z + shift + stretch z``."""
    new_sigma_v = sigma_v / (1.0 + stretch)
    return offset_v - shift * new_sigma_v, new_sigma_v


def _newton_step(local: Local) -> tuple[Floats, Floats]:
    """Return shift and stretch, shortened where sigma would grow more than tenfold."""
    det = local.q0 * local.q2 - local.q1 * local.q1
    shift = (local.q2 * local.s0 - local.q1 * local.s1) / det
    stretch = (local.q0 * local.s1 - local.q1 * local.s0) / det
    shorter = 0.9 / np.maximum(-stretch, 0.9)
    return shift * shorter, stretch * shorter


def profile_end(
    rows: Rows, parameter: int, offset_v: Floats, sigma_v: Floats, target: Floats
) -> Floats:
    """Return where the profile likelihood of a parameter falls to a target.

    Newton's method on "the other parameter is at its best" and "the log
    likelihood is at the target" together (D. J. Venzon & S. H. Moolgavkar, Applied
    Statistics 37, 1988).

    Parameters
    ----------
    rows : Rows
    parameter : int
        0 for the offset, 1 for sigma.
    offset_v, sigma_v : ndarray, shape (C,)
        A start on the wanted side of the maximum.
    target : ndarray, shape (C,)
        Log likelihood on the scale of `evaluate`.

    Returns
    -------
    ndarray, shape (C,)
        The parameter in V; NaN where no end was found.
    """
    end_v = np.full(rows.curves, np.nan)
    live = np.arange(rows.curves)
    for _ in range(_MAX_STEPS):
        shift, growth = _profile_step(parameter, evaluate(rows, offset_v, sigma_v), target)
        size = np.maximum(np.abs(shift), 2.0 * np.abs(growth))
        shorter = 1.0 / np.maximum(size, 1.0)
        offset_v = offset_v + shorter * shift * sigma_v
        sigma_v = sigma_v * np.exp(shorter * growth)
        settled = size < _SETTLED**1.5
        end_v[live[settled]] = (offset_v, sigma_v)[parameter][settled]
        rows, live, target = rows.of(~settled), live[~settled], target[~settled]
        offset_v, sigma_v = offset_v[~settled], sigma_v[~settled]
        if not live.size:
            break
    return end_v


def _profile_step(parameter: int, local: Local, target: Floats) -> tuple[Floats, Floats]:
    """Return the change of the offset in sigmas and of ln sigma."""
    excess = local.loglik - target
    mixed = local.s0 - local.q1
    if parameter == 0:
        row, wanting = (mixed, local.s1 - local.q2), local.s1
    else:
        row, wanting = (-local.q0, mixed), local.s0
    det = local.s0 * row[1] - local.s1 * row[0]
    shift = (excess * row[1] - wanting * local.s1) / det
    growth = (wanting * local.s0 - excess * row[0]) / det
    return shift, growth
