"""What a model means, executable and vectorised.

The emitted models are written separately; that they agree with this file,
decision by decision and to the last bit, is the check. `DEVELOPERS.md` states
the meaning in words, in the order of a decision.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from behavgen.formulas import random_stream
from behavgen.formulas.memory import signs_before
from behavgen.model import ComparatorModel
from behavgen.operating_point import (
    OperatingPoint,
    delay_law,
    delay_s,
    energy_j,
    evaluate,
    memory_shift_v,
    operating_point,
    overdrive_at,
)
from behavgen.trace import Decisions, Trace

__all__ = [
    "CERTAIN_SIGMAS",
    "Decisions",
    "Reference",
    "Trace",
]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Truths = npt.NDArray[np.bool_]

_SIGNS = np.array([-1.0, 0.0, 1.0])
"""Of a decision that was a zero, unresolved, or a one."""

CERTAIN_SIGMAS = 8.3
"""No draw reaches this many sigmas, so that beyond it noise cannot change a bit."""


class Reference:
    """One instance of a comparator.

    Parameters
    ----------
    model : ComparatorModel
    seed : int
        Instance seed, as the parameter SEED of the emitted models.
    run_seed : int
        Chip-wide seed, as the plusarg ``+behavgen_seed``.
    noise, mismatch, memory, delay_on : bool
        As the parameters NOISE_ON, MISMATCH_ON, MEMORY_ON, DELAY_ON.
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
        memory: bool = True,
        delay_on: bool = True,
        offset_shift_v: float = 0.0,
        when_unresolved: str | None = None,
        force_unresolved_every: int = 0,
    ) -> None:
        self.model = model
        self.noise = noise and model.noise is not None
        self.mismatch = mismatch and model.mismatch is not None
        self.memory = memory and model.memory is not None
        self.delay_on = delay_on and model.delay is not None
        self.offset_shift_v = offset_shift_v
        self.when_unresolved = when_unresolved or model.cell.when_unresolved
        self.force_unresolved_every = force_unresolved_every
        self._drawn: tuple[Integers, Floats] | None = None
        self._last_point: OperatingPoint | None = None
        """Much is asked at the same conditions in a row; a point knows what surfaces are worth."""
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
        return delay_s(self.model.delay, overdrive, point).reshape(point.shape)

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
        return (2.0 * overdrive_at(effect, resolve, point)).reshape(point.shape)

    def memory_shift(self, reset_time_s: npt.ArrayLike, **condition: npt.ArrayLike) -> Floats:
        """Shift of the trip point in V in favour of the previous decision; 0 when switched off.

        `reset_time_s` runs from the reset edge to the decision edge.
        """
        point, reset = self._with(reset_time_s, condition)
        return self._memory_shift(reset, point).reshape(point.shape)

    def energy(self, overdrive_v: npt.ArrayLike, **condition: npt.ArrayLike) -> Floats:
        """Energy in J of a decision that resolves; NaN where not characterised."""
        point, overdrive = self._with(overdrive_v, condition)
        if self.model.energy is None:
            return np.full(point.shape, np.nan)
        time_s = self.delay(overdrive_v, **condition).ravel()
        return energy_j(self.model.energy, overdrive, time_s, point).reshape(point.shape)

    def probability(self, vdiff_v: npt.ArrayLike, **condition: npt.ArrayLike) -> Floats:
        """Probability of a one at a differential input in V, over noise, were it to resolve.

        Without memory of the previous decision.
        """
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
            Differential input when it is sampled: an aperture's centre after each edge, V.
        edge_times_s, decision_end_times_s : array_like, shape (N,)
            When each decision phase begins and ends, s; in their order each decision
            remembers the one before, the first none.
        first_decision : int
            Number of the first decision in the instance's random streams.
        """
        ticks = self.model.cell.ticks_per_second
        edge = np.rint(np.asarray(edge_times_s, dtype=float) * ticks).astype(np.int64)
        end = np.rint(np.asarray(decision_end_times_s, dtype=float) * ticks).astype(np.int64)
        edge, end, vdiff = np.broadcast_arrays(edge, end, np.asarray(vdiff_v, dtype=float))
        reset = np.append(-1, edge[1:] - end[:-1]) if edge.ndim else None
        trace = self.trace(vdiff, end - edge, reset, first_decision=first_decision,
                           sign_before=0, **condition)  # fmt: skip
        ready = np.where(trace.unresolved, np.nan, (edge + trace.delay_ticks) / ticks)
        return Decisions(trace.bits, ready, trace.unresolved)

    def trace(
        self,
        vdiff_v: npt.ArrayLike,
        phase_ticks: npt.ArrayLike,
        reset_phase_ticks: npt.ArrayLike | None = None,
        *,
        first_decision: int = 0,
        sign_before: int = 0,
        **condition: npt.ArrayLike,
    ) -> Trace:
        """Decide in the simulator's terms.

        Parameters
        ----------
        vdiff_v : array_like, shape (N,)
            ``inp - inn`` as subtracted in double precision, V.
        phase_ticks : array_like of int, shape (N,)
            Length of each decision phase in units of the time precision.
        reset_phase_ticks : array_like of int, shape (N,), optional
            Length of the reset before each decision; negative: there is nothing to
            remember. None: no decision remembers the one before.
        sign_before : int
            1, -1 or 0: the decision before the first was a one, a zero or unresolved.
        """
        point, vdiff = self._with(vdiff_v, condition)
        number = first_decision + np.arange(len(vdiff), dtype=np.int64)
        phase = np.broadcast_to(np.asarray(phase_ticks, dtype=np.int64), vdiff.shape)
        memory = self._memories(reset_phase_ticks, point)
        e = self._effective_overdrive(self._distance(vdiff, point) - memory, number, point)
        aperture = self._aperture_ticks(point)
        delay = np.maximum(self._delay_ticks(np.abs(e), point), aperture + 1)
        unresolved = self._unresolved(delay, phase, number)
        found = _met(e, unresolved, sign_before)
        e, delay, unresolved = e[found], delay[found], unresolved[found]
        leaning = (e > 0.0).astype(np.int64)
        return Trace(
            overdrive_v=e,
            leaning=leaning,
            delay_ticks=delay,
            unresolved=unresolved,
            bits=np.where(unresolved, self._unresolved_bits(number), leaning),
            reset_ticks=self._reset_ticks(point),
            aperture_ticks=aperture,
            memory_v=memory[found],
            energy_j=self._energy(e, np.where(unresolved, phase, delay), unresolved, point),
        )

    def law(self, point: OperatingPoint) -> tuple[Floats, Floats]:
        """Return ln of the node overdrives (K,) and tau with the node delays, (N, K + 1), s."""
        assert self.model.delay is not None
        log_node, tau, nodes = delay_law(self.model.delay, point)
        return log_node, np.column_stack([tau, nodes])

    def _memories(self, reset_ticks: npt.ArrayLike | None, point: OperatingPoint) -> Floats:
        """Return the memory after a zero, an unresolved decision and a one, (3, N); (1, N) if 0."""
        if not self.memory or reset_ticks is None:
            return np.zeros((1, len(point.vdd_v)))
        ticks = np.broadcast_to(np.asarray(reset_ticks, dtype=np.int64), point.vdd_v.shape)
        reset_s = np.maximum(ticks, 0) / self.model.cell.ticks_per_second
        shift = np.where(ticks < 0, 0.0, self._memory_shift(reset_s, point))
        return -(_SIGNS[:, None] * shift)

    def _memory_shift(self, reset_s: Floats, point: OperatingPoint) -> Floats:
        effect = self.model.memory if self.memory else None
        return memory_shift_v(effect, reset_s, point) if effect else np.zeros(len(reset_s))

    def _effective_overdrive(self, e: Floats, number: Integers, point: OperatingPoint) -> Floats:
        if not self.noise:
            return e
        sigma = self._sigma(point)
        uncertain = np.abs(e) < CERTAIN_SIGMAS * sigma
        return np.where(uncertain, e + sigma * self._noise_draws(number), e)

    def _noise_draws(self, number: Integers) -> Floats:
        """Return the standard normal number of each decision; the last ones are kept."""
        last = self._drawn
        if last is not None and np.array_equal(last[0], number):
            return last[1]
        bits = random_stream.random_bits(self._keys[random_stream.NOISE], number)
        drawn = random_stream.standard_normal(bits)
        self._drawn = (number, drawn)
        return drawn

    def _unresolved(self, delay: Integers, phase: Integers, number: Integers) -> Truths:
        unresolved = self.delay_on & (delay > phase)
        if self.force_unresolved_every > 0:
            unresolved = unresolved | ((number + 1) % self.force_unresolved_every == 0)
        return unresolved

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
            return np.ones(magnitude.shape, dtype=np.int64)
        delay = delay_s(self.model.delay, magnitude, point)
        return np.floor(delay * self.model.cell.ticks_per_second + 0.5).astype(np.int64)

    def _aperture_ticks(self, point: OperatingPoint) -> Integers:
        effect = self.model.aperture
        if effect is None or not self.delay_on:
            return np.zeros(len(point.vdd_v), dtype=np.int64)
        centre = np.maximum(evaluate(effect.centre, point), 0.0)
        return np.floor(centre * self.model.cell.ticks_per_second + 0.5).astype(np.int64)

    def _energy(
        self, e: Floats, ticks: Integers, unresolved: Truths, point: OperatingPoint
    ) -> Floats:
        if self.model.energy is None:
            return np.zeros(len(e))
        time_s = ticks / self.model.cell.ticks_per_second
        return energy_j(self.model.energy, np.where(unresolved, 0.0, e), time_s, point)

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
        point = operating_point(self.model, shape, condition)
        last = self._last_point
        if last is not None and last.equals(point):
            return last
        self._last_point = point
        return point


def _met(e: Floats, unresolved: Truths, sign_before: int) -> tuple[Integers, Integers]:
    """Return which of the alternatives, shape (1 or 3, N), each decision of a sequence meets."""
    row = np.zeros(e.shape[1], dtype=np.int64)
    if len(e) > 1:
        sign_after = np.where(unresolved, 0, np.where(e > 0.0, 1, -1)).astype(np.int8)
        row += signs_before(sign_after, sign_before) + 1
    return row, np.arange(len(row))
