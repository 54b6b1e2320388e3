"""Shifts over reset time -> a sum of exponentials and a floor.

With the time constants given the curve is linear in everything else (separable
least squares; G. H. Golub, V. Pereyra, SIAM J. Numer. Anal. 10, 1973, 413-432),
so that only they are searched, on a grid first. Errors count relative to the
shift. A row that only says "at least so much" counts while the curve is below it.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.optimize import minimize, nnls

from behavgen.fit.law_solution import inverse_of

__all__ = ["CurveShape", "MemoryCurves", "MemoryRows", "fit_curves"]

Floats = npt.NDArray[np.float64]
Truths = npt.NDArray[np.bool_]

_GRID = {1: 48, 2: 24}
"""Time constants tried a term; two terms take all pairs."""
_SEARCH = {"xatol": 1e-8, "fatol": 1e-15, "maxiter": 200}
_SHORT_SEARCH = {"xatol": 1e-3, "fatol": 1e-6, "maxiter": 40}


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MemoryRows:
    """Rows of a memory table, shape (N,) each.

    Parameters
    ----------
    reset_time_s, shift_v : ndarray
    scale_v : ndarray
        By which an error is divided.
    is_bound : ndarray of bool
        The shift is at least so large.
    site : ndarray of int
        Operating condition.
    """

    reset_time_s: Floats
    shift_v: Floats
    scale_v: Floats
    is_bound: Truths
    site: npt.NDArray[np.intp]

    def where(self, use: Truths) -> MemoryRows:
        """Return some of the rows."""
        return MemoryRows(
            reset_time_s=self.reset_time_s[use],
            shift_v=self.shift_v[use],
            scale_v=self.scale_v[use],
            is_bound=self.is_bound[use],
            site=self.site[use],
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class CurveShape:
    """How many exponentials, and whether something lasts."""

    terms: int
    floor: bool

    @property
    def heights(self) -> int:
        """Number of parameters in which the curve is linear."""
        return self.terms + self.floor


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MemoryCurves:
    """Curves of G groups of rows that share their time constants.

    Parameters
    ----------
    tau_s : ndarray, shape (K,)
        Rising.
    heights_v : ndarray, shape (G, K + floor)
        Of the terms at `start_s`, then the floor; not negative.
    start_s : float
        The shortest measured reset time; terms are told from there, where data are.
    squares : float
        Sum of squared relative errors.
    """

    tau_s: Floats
    heights_v: Floats
    start_s: float
    squares: float

    def shift_v(self, reset_time_s: Floats, group: npt.NDArray[np.intp]) -> Floats:
        """Return the shift of rows in their groups, V."""
        basis = _basis(reset_time_s - self.start_s, self.tau_s, self.heights_v.shape[1])
        shift: Floats = (basis * self.heights_v[group]).sum(axis=-1)
        return shift

    def log_parameters(self) -> Floats:
        """Return ln of heights at no reset, ln tau and, if any, ln floor, (G, 2 K + floor)."""
        heights = np.log(self.heights_v)
        terms = len(self.tau_s)
        heights[:, :terms] += self.start_s / self.tau_s
        tau = np.broadcast_to(np.log(self.tau_s), (len(heights), terms))
        return np.column_stack([heights[:, :terms], tau, heights[:, terms:]])


def fit_curves(
    rows: MemoryRows,
    group: npt.NDArray[np.intp],
    shape: CurveShape,
    near_log_tau: Floats | None = None,
) -> MemoryCurves | None:
    """Fit groups of rows with shared time constants; None where the shape is one part too many.

    Parameters
    ----------
    rows : MemoryRows
    group : ndarray of int, shape (N,)
        0, 1, ... without gaps.
    shape : CurveShape
    near_log_tau : ndarray, shape (K,), optional
        ln of time constants in s to start from instead of a grid.
    """
    measured_s = rows.reset_time_s[~rows.is_bound]
    start_s = float(measured_s.min())

    def squares(log_tau: Floats) -> float:
        return _solved(rows, group, shape, start_s, log_tau)[1]

    log_tau = np.empty(0)
    if shape.terms:
        grid = _grid(measured_s, shape.terms) if near_log_tau is None else [near_log_tau]
        best = grid[int(np.argmin([squares(candidate) for candidate in grid]))]
        options = _SEARCH if near_log_tau is None else _SHORT_SEARCH
        log_tau = np.sort(minimize(squares, best, method="Nelder-Mead", options=options).x)
    heights, total = _solved(rows, group, shape, start_s, log_tau)
    if not (heights > 0.0).all() or (np.diff(log_tau) < 1e-3).any():
        return None
    return MemoryCurves(tau_s=np.exp(log_tau), heights_v=heights, start_s=start_s, squares=total)


def _grid(reset_time_s: Floats, terms: int) -> list[Floats]:
    """Return ln of time constants that the reset times can tell from nothing and from a floor."""
    times = np.unique(reset_time_s)
    shortest = max(0.1 * np.diff(times).min(), times[0] / 300.0)
    single = np.linspace(np.log(shortest), np.log(10.0 * np.ptp(times)), _GRID[terms])
    if terms == 1:
        return list(single[:, None])
    first, second = np.triu_indices(len(single), k=1)
    return list(np.column_stack([single[first], single[second]]))


def _basis(time_s: Floats, tau_s: Floats, heights: int) -> Floats:
    decays = np.exp(np.minimum(-time_s[:, None] / tau_s, 300.0))
    return np.column_stack([decays, np.ones((len(time_s), heights - len(tau_s)))])


def _solved(
    rows: MemoryRows,
    group: npt.NDArray[np.intp],
    shape: CurveShape,
    start_s: float,
    log_tau: Floats,
) -> tuple[Floats, float]:
    """Return each group's heights (G, H) and the sum of squares for given time constants.

    Bounds count once the curve falls short of them.
    """
    tau_s = np.exp(np.clip(log_tau, -100.0, 100.0))
    basis = _basis(rows.reset_time_s - start_s, tau_s, shape.heights)
    scaled, target = basis / rows.scale_v[:, None], rows.shift_v / rows.scale_v
    short = np.zeros(len(target), dtype=bool)
    for _ in range(1 + int(rows.is_bound.sum())):
        counts = short | ~rows.is_bound
        heights = _heights(scaled[counts], target[counts], group[counts])
        error = (scaled * heights[group]).sum(axis=-1) - target
        before, short = short, rows.is_bound & (error < 0.0)
        if (short == before).all():
            break
    return heights, float(error[counts] @ error[counts])


def _heights(scaled: Floats, target: Floats, group: npt.NDArray[np.intp]) -> Floats:
    """Solve each group for heights that are not negative, (G, H)."""
    member = group == np.arange(int(group.max()) + 1)[:, None]
    columns = (member[..., None] * scaled).transpose(0, 2, 1)
    heights: Floats = (inverse_of(columns @ scaled) @ (columns @ target)[..., None])[..., 0]
    for g in np.flatnonzero((heights < 0.0).any(axis=-1)):
        heights[g] = nnls(scaled[member[g]], target[member[g]])[0]
    return heights
