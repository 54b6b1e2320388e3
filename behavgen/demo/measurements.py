"""What a characterisation bench measures on the invented latch.

Every search halves brackets, sixteen-fold at a time because the runs of one
pass are solved together. All results come from solved waveforms.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import numpy.typing as npt

from behavgen.demo.latch import Circuit, clock_fall, separation

__all__ = [
    "count_ones",
    "decision_delay",
    "input_noise",
    "metastable_window",
    "reset_delay",
    "trip_point",
]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

STEP_S = 0.5e-12
RESET_BEFORE_S = 80e-12  # several reset time constants: nothing of the past is left
SECTIONS = 16
SMALLEST_OVERDRIVE_V = 1e-8


def _times(until_s: float) -> Floats:
    steps = round((until_s + RESET_BEFORE_S) / STEP_S)
    return np.asarray(np.arange(steps + 1) * STEP_S - RESET_BEFORE_S)


def _search(low: Floats, high: Floats, passes: int, beyond: Callable[[Floats], Floats]) -> Floats:
    """Return where `beyond` turns from false to true between `low` and `high`, shape (N, 1).

    Each pass narrows the bracket sixteen-fold.
    """
    fractions = np.arange(SECTIONS + 1) / SECTIONS
    for _ in range(passes):
        grid = low + (high - low) * fractions
        below = np.count_nonzero(beyond(grid[:, 1:-1]) == 0, axis=1)[:, None]
        low = np.take_along_axis(grid, below, axis=1)
        high = np.take_along_axis(grid, below + 1, axis=1)
    return np.asarray((low + high) / 2)


def trip_point(circuit: Circuit, *, span_v: float, passes: int, until_s: float) -> Floats:
    """Return the input at which the noise-free decision turns, V, shape (N, 1).

    Parameters
    ----------
    circuit : Circuit
        N circuits.
    span_v : float
        Searched on both sides of zero, V.
    passes : int
        The bracket ends ``2 span_v / 16**passes`` wide.
    until_s : float
        When the decision is read, s after the edge.
    """
    edge = np.full_like(circuit.pair_overdrive_v, span_v)
    times_s = _times(until_s)
    return _search(-edge, edge, passes, lambda v: separation(circuit, v, times_s)[-1] > 0)


def _crossing_time(times_s: Floats, trace: Floats) -> Floats:
    """Return when `trace`, shape (T, ...), first turns positive; NaN where it never does.

    Inverts the cubic through the four samples around the crossing.
    """
    positive = trace > 0
    crosses = positive.any(axis=0)
    after = np.clip(np.argmax(positive, axis=0)[crosses], 2, len(times_s) - 2)
    around = after + np.arange(-2, 2)[:, None]
    a, b, c, d = np.take_along_axis(trace[:, crosses], around, axis=0)
    first, second, third = c - a / 3 - b / 2 - d / 6, (c - 2 * b + a) / 2, (d - a) / 6 + (b - c) / 2
    x = b / (b - c)
    for _ in range(5):  # Newton from the chord; two or three rounds suffice
        value = b + x * (first + x * (second + x * third))
        x = x - value / (first + x * (2 * second + x * 3 * third))
    found_s = np.full(crosses.shape, np.nan)
    found_s[crosses] = times_s[after - 1] + x * STEP_S
    return found_s


def decision_delay(circuit: Circuit, vdiff_v: Floats, *, watched_s: float) -> Floats:
    """Return the delay to a separation of half the supply, s, shape (N, K).

    NaN: not there after `watched_s`.
    """
    times_s = _times(watched_s)
    trace_v = separation(circuit, vdiff_v, times_s)
    return _crossing_time(times_s, np.abs(trace_v) - circuit.vdd_v / 2)


def reset_delay(circuit: Circuit) -> Floats:
    """Return the time from the reset edge to a separation of half the supply, s, shape (N, 1)."""
    times_s = _times(100e-12)
    trace_v = separation(
        circuit, np.zeros_like(circuit.pair_overdrive_v), times_s, clock=clock_fall, decided=True
    )
    return _crossing_time(times_s, circuit.vdd_v / 2 - trace_v)


def metastable_window(
    circuit: Circuit, resolve_time_s: Floats, trip_v: Floats, *, searched_span_v: float
) -> Floats:
    """Return the width of the inputs still unresolved at `resolve_time_s`, V, shape (N, 1).

    NaN where it is wider than `searched_span_v`, centred on the trip point.
    """
    times_s = _times(float(resolve_time_s.max()))
    widest_v = searched_span_v / 2

    def edge(sign: float) -> Floats:
        def resolved(log_overdrive: Floats) -> Floats:
            vdiff_v = trip_v + sign * np.exp(log_overdrive)
            trace_v = separation(circuit, vdiff_v, times_s)
            delay_s = _crossing_time(times_s, np.abs(trace_v) - circuit.vdd_v / 2)
            return np.asarray(delay_s <= resolve_time_s)

        low = np.full_like(trip_v, np.log(SMALLEST_OVERDRIVE_V))
        high = np.full_like(trip_v, np.log(widest_v))
        found_v = np.exp(_search(low, high, 5, resolved))
        return np.where(resolved(high), found_v, np.nan)

    return np.asarray(edge(1.0) + edge(-1.0))


def count_ones(
    circuit: Circuit, levels_v: Floats, trials: int, *, until_s: float, noise: np.random.Generator
) -> Integers:
    """Return how many of `trials` noisy decisions are one, shape (N, L), levels of shape (L,)."""
    vdiff_v = np.repeat(levels_v, trials)[None, :]
    last_v = separation(circuit, vdiff_v, _times(until_s), noise=noise)[-1]
    is_one = last_v.reshape(last_v.shape[0], -1, trials) > 0
    return np.asarray(np.count_nonzero(is_one, axis=2), dtype=np.int64)


def input_noise(
    circuit: Circuit, trip_v: Floats, trials: int, *, until_s: float, noise: np.random.Generator
) -> Floats:
    """Return noise referred to the input, V, shape (N,).

    The spread of the outputs at the trip point, still small at `until_s`, over the
    gain from input to outputs at that moment.
    """
    times_s = _times(until_s)
    nudge_v = 1e-5 * np.array([[-1.0, 1.0]])
    pair_v = separation(circuit, trip_v + nudge_v, times_s)[-1]
    gain = (pair_v[:, 1] - pair_v[:, 0]) / (nudge_v[0, 1] - nudge_v[0, 0])
    balanced_v = np.repeat(trip_v, trials, axis=1)
    last_v = separation(circuit, balanced_v, times_s, noise=noise)[-1]
    return np.asarray(last_v.std(axis=1, ddof=1) / gain)
