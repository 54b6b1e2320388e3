"""What a model means, executable and vectorised.

The emitted models are written separately; that they agree with this file,
decision by decision and to the last bit, is the check. `DEVELOPERS.md` states
the meaning in words, in the order of a decision.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

from behavgen.formulas import random_stream
from behavgen.formulas.node_law import node_law_delay
from behavgen.model import ComparatorModel, DelayEffect
from behavgen.operating_point import OperatingPoint, evaluate, operating_point

__all__ = [
    "CERTAIN_SIGMAS",
    "Decisions",
    "Reference",
    "Trace",
]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

CERTAIN_SIGMAS = 8.3
"""No draw reaches this many sigmas, so that beyond it noise cannot change a bit."""


class Decisions(NamedTuple):
    """Outcome of decisions, shape (N,) each.

    Parameters
    ----------
    bits : ndarray of int
        1 or 0; of an unresolved decision the coin's result, else -1.
    ready_times_s : ndarray
        When the outputs are valid, s; NaN if unresolved.
    unresolved : ndarray of bool
    """

    bits: Integers
    ready_times_s: Floats
    unresolved: npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Trace:
    """Decisions in the simulator's terms, shape (N,) each.

    Parameters
    ----------
    overdrive_v : ndarray
        Effective overdrive `e`, signed, V.
    leaning : ndarray of int
        1 if ``e > 0``, else 0: the bit if it resolves.
    delay_ticks : ndarray of int
        Delay in units of the time precision, at least 1.
    unresolved : ndarray of bool
    bits : ndarray of int
        As in `Decisions`.
    reset_ticks : ndarray of int
        Reset delay in units of the time precision.
    """

    overdrive_v: Floats
    leaning: Integers
    delay_ticks: Integers
    unresolved: npt.NDArray[np.bool_]
    bits: Integers
    reset_ticks: Integers


class Reference:
    """One instance of a comparator.

    Parameters
    ----------
    model : ComparatorModel
    seed : int
        Instance seed, as the parameter SEED of the emitted models.
    run_seed : int
        Chip-wide seed, as the plusarg ``+behavgen_seed``.
    noise, mismatch, delay_on : bool
        As the parameters NOISE_ON, MISMATCH_ON, DELAY_ON.
    offset_shift_v : float
        Added to the trip point, V.
    when_unresolved : str or None
        ``"x"``, ``"coin"`` or ``"hold"``; None: as the model says.
    force_unresolved_every : int
        Every so many decisions one is unresolved whatever its overdrive; 0: none.

    Notes
    -----
    All methods take the operating condition by keyword and broadcast it:
    `vdd` in V, `temp_c` in degrees Celsius, `vcm` in V, `process` by name.
    Defaults: the middle of the model's box and its first process.
    Conditions outside the characterised range are clamped to it.
    """

    def __init__(
        self,
        model: ComparatorModel,
        *,
        seed: int = 1,
        run_seed: int = 0,
        noise: bool = True,
        mismatch: bool = False,
        delay_on: bool = True,
        offset_shift_v: float = 0.0,
        when_unresolved: str | None = None,
        force_unresolved_every: int = 0,
    ) -> None:
        self.model = model
        self.noise = noise and model.noise is not None
        self.mismatch = mismatch and model.mismatch is not None
        self.delay_on = delay_on and model.delay is not None
        self.offset_shift_v = offset_shift_v
        self.when_unresolved = when_unresolved or model.cell.when_unresolved
        self.force_unresolved_every = force_unresolved_every
        self._keys = tuple(random_stream.stream_key(seed, run_seed, c) for c in range(3))

    def offset(self, **condition: npt.ArrayLike) -> Floats:
        """Nominal trip point in V, without mismatch and OFFSET_SHIFT_V."""
        point = self.point((), condition)
        effect = self.model.offset
        value = evaluate(effect.surface, point) if effect else np.zeros(len(point.vdd_v))
        return value.reshape(point.shape)

    def mismatch_v(self, **condition: npt.ArrayLike) -> Floats:
        """Offset of the instance beyond the nominal trip point in V; 0 when switched off."""
        point = self.point((), condition)
        return self._mismatch(point).reshape(point.shape)

    def noise_sigma(self, **condition: npt.ArrayLike) -> Floats:
        """Input-referred noise of one decision in V; 0 where not characterised."""
        point = self.point((), condition)
        return self._sigma(point).reshape(point.shape)

    def delay(self, overdrive_v: npt.ArrayLike, **condition: npt.ArrayLike) -> Floats:
        """Delay in s at the magnitude of an overdrive in V; NaN where not characterised."""
        point, overdrive = self._with(overdrive_v, condition)
        if self.model.delay is None:
            return np.full(point.shape, np.nan)
        return _delay_s(self.model.delay, overdrive, point).reshape(point.shape)

    def reset_delay(self, **condition: npt.ArrayLike) -> Floats:
        """Time in s from the reset edge to the outputs' reset state; 0 where not characterised."""
        point = self.point((), condition)
        return self._reset_s(point).reshape(point.shape)

    def window(self, resolve_time_s: npt.ArrayLike, **condition: npt.ArrayLike) -> Floats:
        """Width in V of the input interval still unresolved at a time after the edge.

        ``W(t) = 2 delay^-1(t)``; infinite where even the largest characterised
        overdrive is not yet resolved, NaN where the delay is not characterised.
        """
        point, resolve = self._with(resolve_time_s, condition)
        effect = self.model.delay
        if effect is None:
            return np.full(point.shape, np.nan)
        return (2.0 * _overdrive_at(effect, resolve, point)).reshape(point.shape)

    def probability(self, vdiff_v: npt.ArrayLike, **condition: npt.ArrayLike) -> Floats:
        """Probability of a one at a differential input in V, over noise, were it to resolve."""
        from scipy.special import ndtr  # noqa: PLC0415

        point, vdiff = self._with(vdiff_v, condition)
        distance = self._distance(vdiff, point)
        if not self.noise:
            return (distance > 0.0).astype(float).reshape(point.shape)
        return np.asarray(ndtr(distance / self._sigma(point)), dtype=float).reshape(point.shape)

    def decide(
        self,
        vdiff_v: npt.ArrayLike,
        edge_times_s: npt.ArrayLike,
        decision_end_times_s: npt.ArrayLike,
        *,
        first_decision: int = 0,
        **condition: npt.ArrayLike,
    ) -> Decisions:
        """Decide once an edge.

        Parameters
        ----------
        vdiff_v : array_like, shape (N,)
            Differential input at each edge, V.
        edge_times_s, decision_end_times_s : array_like, shape (N,)
            When each decision phase begins and ends, s.
        first_decision : int
            Number of the first decision in the instance's random streams.
        """
        ticks = self.model.cell.ticks_per_second
        edge = np.rint(np.asarray(edge_times_s, dtype=float) * ticks).astype(np.int64)
        end = np.rint(np.asarray(decision_end_times_s, dtype=float) * ticks).astype(np.int64)
        edge, end, vdiff = np.broadcast_arrays(edge, end, np.asarray(vdiff_v, dtype=float))
        trace = self.trace(vdiff, end - edge, first_decision=first_decision, **condition)
        ready = np.where(trace.unresolved, np.nan, (edge + trace.delay_ticks) / ticks)
        return Decisions(trace.bits, ready, trace.unresolved)

    def trace(
        self,
        vdiff_v: npt.ArrayLike,
        phase_ticks: npt.ArrayLike,
        *,
        first_decision: int = 0,
        **condition: npt.ArrayLike,
    ) -> Trace:
        """Decide in the simulator's terms.

        Parameters
        ----------
        vdiff_v : array_like, shape (N,)
            ``inp - inn`` as subtracted in double precision, V.
        phase_ticks : array_like of int, shape (N,)
            Length of each decision phase in units of the time precision.
        """
        point, vdiff = self._with(vdiff_v, condition)
        number = first_decision + np.arange(len(vdiff), dtype=np.int64)
        e = self._effective_overdrive(vdiff, number, point)
        leaning = (e > 0.0).astype(np.int64)
        delay = self._delay_ticks(np.abs(e), point)
        unresolved = self.delay_on & (delay > np.asarray(phase_ticks, dtype=np.int64))
        if self.force_unresolved_every > 0:
            unresolved = unresolved | ((number + 1) % self.force_unresolved_every == 0)
        return Trace(
            overdrive_v=e,
            leaning=leaning,
            delay_ticks=delay,
            unresolved=unresolved,
            bits=np.where(unresolved, self._unresolved_bits(number), leaning),
            reset_ticks=self._reset_ticks(point),
        )

    def law(self, point: OperatingPoint) -> tuple[Floats, Floats]:
        """Return ln of the node overdrives (K,) and tau with the node delays, (N, K + 1), s."""
        assert self.model.delay is not None
        log_node, tau, nodes = _law(self.model.delay, point)
        return log_node, np.column_stack([tau, nodes])

    def _effective_overdrive(
        self, vdiff: Floats, number: Integers, point: OperatingPoint
    ) -> Floats:
        e = self._distance(vdiff, point)
        if not self.noise:
            return e
        sigma = self._sigma(point)
        uncertain = np.abs(e) < CERTAIN_SIGMAS * sigma
        bits = random_stream.random_bits(self._keys[random_stream.NOISE], number[uncertain])
        e[uncertain] += sigma[uncertain] * random_stream.standard_normal(bits)
        return e

    def _distance(self, vdiff: Floats, point: OperatingPoint) -> Floats:
        effect = self.model.offset
        offset = evaluate(effect.surface, point) if effect else 0.0
        return (vdiff - (offset + self.offset_shift_v)) - self._mismatch(point)

    def _mismatch(self, point: OperatingPoint) -> Floats:
        total = np.zeros(len(point.vdd_v))
        if not self.mismatch or self.model.mismatch is None:
            return total
        components = self.model.mismatch.components
        bits = random_stream.random_bits(
            self._keys[random_stream.MISMATCH], np.arange(len(components))
        )
        for component, z in zip(components, random_stream.standard_normal(bits), strict=True):
            total = total + evaluate(component, point) * z
        return total

    def _sigma(self, point: OperatingPoint) -> Floats:
        effect = self.model.noise
        return evaluate(effect.surface, point) if effect else np.zeros(len(point.vdd_v))

    def _delay_ticks(self, magnitude: Floats, point: OperatingPoint) -> Integers:
        if not self.delay_on or self.model.delay is None:
            return np.ones(len(magnitude), dtype=np.int64)
        ticks = self.model.cell.ticks_per_second
        delay = _delay_s(self.model.delay, magnitude, point)
        return np.maximum(np.floor(delay * ticks + 0.5).astype(np.int64), 1)

    def _reset_s(self, point: OperatingPoint) -> Floats:
        effect = self.model.reset
        return evaluate(effect.surface, point) if effect else np.zeros(len(point.vdd_v))

    def _reset_ticks(self, point: OperatingPoint) -> Integers:
        if not self.delay_on:
            return np.zeros(len(point.vdd_v), dtype=np.int64)
        reset = self._reset_s(point) * self.model.cell.ticks_per_second
        return np.floor(reset + 0.5).astype(np.int64)

    def _unresolved_bits(self, number: Integers) -> Integers:
        if self.when_unresolved != "coin":
            return np.full(len(number), -1, dtype=np.int64)
        bits = random_stream.random_bits(self._keys[random_stream.COIN], number)
        return random_stream.coin(bits)

    def _with(
        self, value: npt.ArrayLike, condition: dict[str, npt.ArrayLike]
    ) -> tuple[OperatingPoint, Floats]:
        array = np.asarray(value, dtype=float)
        point = self.point(array.shape, condition)
        return point, np.broadcast_to(array, point.shape).astype(float).ravel()

    def point(self, shape: tuple[int, ...], condition: dict[str, npt.ArrayLike]) -> OperatingPoint:
        """Return an operating condition given by keyword, broadcast against a shape."""
        return operating_point(self.model, shape, condition)


def _law(effect: DelayEffect, point: OperatingPoint) -> tuple[Floats, Floats, Floats]:
    """Return ln of the node overdrives (K,), tau (N,) and node delays (N, K)."""
    log_node = np.log(np.array(effect.node_overdrive_v))
    nodes = np.stack([evaluate(node, point) for node in effect.nodes], axis=-1)
    return log_node, evaluate(effect.tau, point), nodes


def _delay_s(effect: DelayEffect, magnitude: Floats, point: OperatingPoint) -> Floats:
    log_node, tau, nodes = _law(effect, point)
    overdrive = np.maximum(np.abs(magnitude), effect.floor_v)
    return node_law_delay(overdrive, log_node, tau, nodes)


def _overdrive_at(effect: DelayEffect, delay_s: Floats, point: OperatingPoint) -> Floats:
    """Invert the delay law: closed form on the regenerative tail, bisection above."""
    log_node, tau, nodes = _law(effect, point)
    tail = log_node[0] - (delay_s - nodes[:, 0]) / tau
    low = np.full(len(delay_s), log_node[0])
    high = np.full(len(delay_s), log_node[-1])
    for _ in range(60):
        middle = 0.5 * (low + high)
        slower = node_law_delay(np.exp(middle), log_node, tau, nodes) > delay_s
        low, high = np.where(slower, middle, low), np.where(slower, high, middle)
    inside = np.where(delay_s < nodes[:, -1], np.inf, np.exp(0.5 * (low + high)))
    return np.where(delay_s >= nodes[:, 0], np.exp(np.minimum(tail, log_node[0])), inside)
