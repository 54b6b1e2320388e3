"""At which overdrives to measure delays for a wanted interval of tau and of the delay.

Errors count relative to the delay, as in the fit: with relative scatter `s` the rows
at overdrives `v` leave the law's parameters the covariance ``s^2 (J^T J)^-1``, `J`
being relative delays per unit of each parameter. Tau is what the tail tells, the
more decades the better; the rest of the curve is told by rows along it.

Simulation without noise repeats itself, so that its scatter is the law's lack of
fit: the same arithmetic holds as long as the law stays the same and its misfit
looks random from row to row, and no row tells anything twice.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import inf, log

import numpy as np
import numpy.typing as npt

from behavgen.fit.intervals import student_quantile
from behavgen.fit.law_families import solve_families
from behavgen.fit.law_solution import DelayRows, LawSolution, inverse_of
from behavgen.fit.planning.sample_deviation import mean_deviation
from behavgen.formulas.node_law import node_law_basis, node_law_delay

__all__ = [
    "MOST_ROWS",
    "DelayHalves",
    "KnownDelay",
    "PlannedDelays",
    "delay_halves",
    "plan_delays",
]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

MOST_ROWS = 400
"""More new rows at a condition are no plan: the law has to fit better, or the tail be longer."""

_FEWEST_TAIL_ROWS = 4
_ROUNDS = 30
_MOST_AT_ONCE = 2.0
_CAREFUL = 1.5
"""Rows grow with less than the square of what is missing, so as not to add too many."""

_CURVE_POINTS = 60
_STEP = 1.05
_BEND = 0.05
"""Relative difference of the local slope from tau at the end of the tail."""


@dataclass(frozen=True, slots=True, kw_only=True)
class KnownDelay:
    """What is known of the delay at one condition before the measurement.

    Parameters
    ----------
    law : str
        Name of the law, as in `model.DelayEffect`.
    tau_s : float
    node_overdrive_v, node_s : tuple of float, length K
        The law as its nodes carry it.
    scatter : float
        Relative standard deviation of a row from the law.
    overdrive_v : tuple of float
        Rows there are already: magnitudes, windows with half their width.
    """

    law: str
    tau_s: float
    node_overdrive_v: tuple[float, ...]
    node_s: tuple[float, ...]
    scatter: float
    overdrive_v: tuple[float, ...] = ()

    def delay_s(self, overdrive_v: npt.ArrayLike) -> Floats:
        """Return the delay at overdrives in V, shape (N,)."""
        magnitude = np.asarray(overdrive_v, dtype=float)
        log_node = np.log(self.node_overdrive_v)
        return node_law_delay(magnitude, log_node, np.array(self.tau_s), np.array(self.node_s))

    @property
    def tail_end_v(self) -> float:
        """Overdrive up to which the delay falls by tau per unit of its logarithm, V."""
        ends_v = np.geomspace(self.node_overdrive_v[0], self.node_overdrive_v[-1], _CURVE_POINTS)
        rise_s = self.delay_s(ends_v / _STEP) - self.delay_s(ends_v)
        bent = np.flatnonzero(np.abs(rise_s / (self.tau_s * log(_STEP)) - 1.0) > _BEND)
        return float(ends_v[max(int(bent[0]) - 1, 0)] if bent.size else ends_v[-1])

    def is_tail(self, overdrive_v: float) -> bool:
        """Whether an overdrive lies in the tail; of a straight law all do."""
        tail_end_v = self.tail_end_v
        return overdrive_v < tail_end_v or tail_end_v == self.node_overdrive_v[-1]


@dataclass(frozen=True, slots=True, kw_only=True)
class PlannedDelays:
    """Overdrives to measure at a condition, and the intervals this promises.

    Parameters
    ----------
    tail_v, curve_v : tuple of float
        Overdrives to add in the tail and above it, V, rising.
    tau_half, delay_half : float
        Half widths of the intervals of tau and of the delay where it is widest,
        relative, with all rows.
    scatter : float
        Relative standard deviation of a row that this rests on.
    level : float
        Confidence, 0..1.
    """

    tail_v: tuple[float, ...]
    curve_v: tuple[float, ...]
    tau_half: float
    delay_half: float
    scatter: float
    level: float

    @property
    def simulations(self) -> int:
        """Decisions to simulate at each condition."""
        return len(self.tail_v) + len(self.curve_v)


@dataclass(frozen=True, slots=True, kw_only=True)
class DelayHalves:
    """Mean half widths of intervals at one condition, relative.

    Parameters
    ----------
    tau, delay : float
        Of tau, and of the delay at the overdrive where it is widest.
    widest_v : float
        That overdrive, V.
    """

    tau: float
    delay: float
    widest_v: float


def plan_delays(
    known: KnownDelay,
    *,
    lowest_v: float,
    tau_within: float = inf,
    delay_within: float = inf,
    level: float = 0.95,
) -> PlannedDelays | None:
    """Return the overdrives to add so that tau and delay reach the wanted intervals.

    Rows spread evenly over the decades of the tail, and over those of the curve.

    Parameters
    ----------
    known : KnownDelay
    lowest_v : float
        Smallest overdrive that can be measured, V, below the tail's end.
    tau_within, delay_within : float
        Wanted half widths of the intervals of tau and of the delay anywhere from
        `lowest_v` to the last node, relative.
    level : float
        Confidence, 0..1.

    Returns
    -------
    PlannedDelays or None
        None when the rows there are reach both. When `MOST_ROWS` do not, they
        are planned and promise what they reach.
    """

    def enough(found: DelayHalves) -> bool:
        return found.tau <= tau_within and found.delay <= delay_within

    if known.overdrive_v and enough(delay_halves(known, lowest_v=lowest_v, level=level)):
        return None
    there = _by_part(known, known.overdrive_v)
    more: Integers = np.zeros_like(there)
    if not known.overdrive_v:  # two rows a node, and the tail's own
        more = _by_part(known, (*known.node_overdrive_v, *known.node_overdrive_v))
        more[0] += _FEWEST_TAIL_ROWS
    for _ in range(_ROUNDS):
        tail_v, curve_v = _spread(known, lowest_v, more)
        added = (*known.overdrive_v, *tail_v, *curve_v)
        found = delay_halves(replace(known, overdrive_v=added), lowest_v=lowest_v, level=level)
        if enough(found) or more.sum() >= MOST_ROWS:
            break
        in_tail = known.is_tail(found.widest_v)
        tau, delay = found.tau / tau_within, found.delay / delay_within
        more = _grown(there, more, max(tau, delay * in_tail), delay * (not in_tail))
    return PlannedDelays(
        tail_v=tail_v,
        curve_v=curve_v,
        tau_half=found.tau,
        delay_half=found.delay,
        scatter=known.scatter,
        level=level,
    )


def delay_halves(known: KnownDelay, *, lowest_v: float, level: float = 0.95) -> DelayHalves:
    """Return the intervals to expect of the rows there are.

    Parameters
    ----------
    known : KnownDelay
        With rows enough to tell its law's parameters.
    lowest_v : float
        The delay is looked at from this overdrive to the last node, V.
    level : float
        Confidence, 0..1.
    """
    solution = _solution(known)
    widest_v = np.geomspace(lowest_v, known.node_overdrive_v[-1], _CURVE_POINTS)
    along = node_law_basis(widest_v, solution.log_node) / known.delay_s(widest_v)[:, None]
    inverse = solution.inverse[0]
    delay = np.sqrt(np.einsum("nk,kl,nl->n", along, inverse, along))
    tau = float(np.sqrt(inverse[0, 0])) / known.tau_s
    freedom = float(solution.freedom[0])
    reach = float(student_quantile(level, freedom)) * known.scatter * mean_deviation(freedom)
    widest = int(np.argmax(delay))
    return DelayHalves(
        tau=reach * tau, delay=reach * float(delay[widest]), widest_v=float(widest_v[widest])
    )


def _by_part(known: KnownDelay, overdrives_v: Sequence[float]) -> Integers:
    """Return how many overdrives lie in the tail and how many above it."""
    in_tail = sum(known.is_tail(v) for v in overdrives_v)
    return np.array([in_tail, len(overdrives_v) - in_tail])


def _grown(there: Integers, more: Integers, *short: float) -> Integers:
    """Return how many rows to add in each part, from how many times its halves are too wide."""
    factor = np.clip(short, 1.0, _MOST_AT_ONCE) ** _CAREFUL
    wanted = np.ceil((there + more) * factor).astype(np.int64) - there
    return np.rint(wanted * min(1.0, MOST_ROWS / wanted.sum())).astype(np.int64)


def _spread(
    known: KnownDelay, lowest_v: float, more: Integers
) -> tuple[tuple[float, ...], tuple[float, ...]]:
    """Return overdrives to add in the tail and along the curve, even in their logarithm."""
    tail_end_v, last_v = known.tail_end_v, known.node_overdrive_v[-1]
    tail = np.geomspace(lowest_v, tail_end_v, int(more[0]), endpoint=tail_end_v == last_v)
    curve = np.geomspace(tail_end_v, last_v, int(more[1]))
    return tuple(map(_rounded, tail)), tuple(map(_rounded, curve))


def _rounded(overdrive_v: float) -> float:
    return float(f"{overdrive_v:.3g}")


def _solution(known: KnownDelay) -> LawSolution:
    """Return the known law as fitted to rows of unit scatter at its overdrives."""
    overdrive_v = np.array([known.overdrive_v])
    delay_s = known.delay_s(overdrive_v[0])[None]
    rows = DelayRows(overdrive_v=overdrive_v, delay_s=delay_s, weight=np.ones_like(delay_s))
    for solution in solve_families(rows) if known.law.endswith("law") else ():
        if solution.name == known.law:
            return solution
    log_node = np.log(known.node_overdrive_v)
    basis = node_law_basis(overdrive_v[0], log_node) / delay_s[0][:, None]
    return LawSolution.of(
        name=known.law,
        rows=rows,
        log_node=log_node,
        parameters=np.array([[known.tau_s, *known.node_s]]),
        inverse=inverse_of(basis.T @ basis)[None],
        squares=np.zeros(1),
        spent=np.array([float(basis.shape[1])]),
    )
