"""Waveforms of one instance's outputs: what is expected, and what the harness recorded."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.check.runs import Run
from behavgen.check.stimulus import Stimulus
from behavgen.model import ComparatorModel

__all__ = [
    "ANY",
    "CAUSE",
    "FLAG",
    "OUTN",
    "OUTP",
    "UNKNOWN",
    "Expectation",
    "Record",
    "expect",
    "read_record",
    "seen_in_two_states",
]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
States = npt.NDArray[np.int8]

OUTP, OUTN, FLAG, CAUSE = range(4)
"""Columns of a state: the two outputs, the unresolved flag, x_cause."""
UNKNOWN, HIGH_IMPEDANCE = 2, 3
"""Values of a logic state beside 0 and 1."""
KEEP, ANY = -1, -2
"""Expected: as before; not stated, so anything will do."""

_STATE_END = 24
"""Where a line of a record says how the outputs stand; the energy may follow."""
_ENERGY_DIGITS = 16
_LONGEST_LINE = _STATE_END + _ENERGY_DIGITS + 1


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Expectation:
    """What must happen at the ready, the end and the reset of each decision.

    Times are ticks from the start of the block, shape (N,); states have shape (N, 4).

    Parameters
    ----------
    edge, ready, end, reset : ndarray of int
        `ready` is the end where the decision stays unresolved; `reset` is the
        next edge where that cancels the reset.
    resolved, returns : ndarray of bool
        Whether there is a ready, and whether the reset state returns.
    before, shown, after, rest : ndarray
        States before the ready, from it, from the end, and from the reset on.
    delay_tolerance, reset_tolerance : int
        Ticks by which ready and reset may differ; 0 where they are exact.
    excluded : ndarray of bool
        Decisions so close to a boundary that the tolerance decides them.
    energy_j : ndarray
        Of each decision; not a number where it is not characterised.
    delay_ticks : ndarray of int
        For how long each decision decides, should it resolve.
    """

    edge: Integers
    ready: Integers
    end: Integers
    reset: Integers
    resolved: npt.NDArray[np.bool_]
    returns: npt.NDArray[np.bool_]
    before: States
    shown: States
    after: States
    rest: States
    delay_tolerance: int
    reset_tolerance: int
    excluded: npt.NDArray[np.bool_]
    energy_j: Floats
    delay_ticks: Integers


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Record:
    """Settled states of the outputs at every instant at which one changed.

    Parameters
    ----------
    time : ndarray of int, shape (M,)
        In ticks, rising.
    state : ndarray, shape (M, 4)
    energy_j : ndarray, shape (M,)
        Running total; not a number where it cannot be read.
    """

    time: Integers
    state: States
    energy_j: Floats

    def at(self, time: Integers) -> States:
        """Return the states at some times, shape (N, 4)."""
        return self.state[self._place(time)]

    def energy_at(self, time: Integers) -> Floats:
        """Return the running totals of the energy at some times in J, shape (N,)."""
        return self.energy_j[self._place(time)]

    def _place(self, time: Integers) -> Integers:
        place: Integers = np.searchsorted(self.time, time, side="right") - 1
        return np.maximum(place, 0)

    def changes(self, after: Integers, until: Integers) -> Integers:
        """Return how many instants of change lie in ``after < time <= until``, shape (N,)."""
        last = np.searchsorted(self.time, until, side="right")
        count: Integers = last - np.searchsorted(self.time, after, side="right")
        return np.maximum(count, 0)

    def first_change(self, after: Integers) -> Integers:
        """Return the time of the first change later than `after`; -1 where there is none."""
        place = np.searchsorted(self.time, after, side="right")
        time: Integers = np.append(self.time, -1)
        return time[np.minimum(place, len(self.time))]


def expect(model: ComparatorModel, run: Run, stimulus: Stimulus) -> Expectation:
    """Return what a run must show.

    Parameters
    ----------
    model : ComparatorModel
    run : Run
    stimulus : Stimulus
        With the reference's trace.
    """
    trace, phase = stimulus.trace, stimulus.end - stimulus.edge
    resolved = ~trace.unresolved
    wait = np.where(resolved, trace.reset_ticks, np.maximum(trace.reset_ticks, 1))
    gap = stimulus.gap
    returns = wait < gap
    delay_tolerance = int(run.meant.delay_on and model.delay is not None)
    reset_tolerance = delay_tolerance if model.reset is not None else 0
    excluded = np.abs(wait - gap) <= reset_tolerance
    if delay_tolerance:
        excluded |= np.abs(phase - trace.delay_ticks) <= delay_tolerance
    excluded[1:] |= excluded[:-1].copy()
    states = _states(model, run, stimulus, resolved, returns)
    return Expectation(
        edge=stimulus.edge,
        ready=np.where(resolved, stimulus.edge + trace.delay_ticks, stimulus.end),
        end=stimulus.end,
        reset=np.where(returns, stimulus.end + wait, stimulus.end + gap),
        resolved=resolved, returns=returns,
        before=states[:, 0], shown=states[:, 1], after=states[:, 2], rest=states[:, 3],
        delay_tolerance=delay_tolerance, reset_tolerance=reset_tolerance, excluded=excluded,
        energy_j=np.full(len(phase), np.nan) if model.energy is None else trace.energy_j,
        delay_ticks=trace.delay_ticks,
    )  # fmt: skip


def seen_in_two_states(expected: Expectation) -> Expectation:
    """Return what must be seen where X shows as anything: the flag tells it instead."""
    return replace(
        expected, before=_without_x(expected.before), shown=_without_x(expected.shown),
        after=_without_x(expected.after), rest=_without_x(expected.rest),
    )  # fmt: skip


def _without_x(states: States) -> States:
    return np.where(states == UNKNOWN, ANY, states).astype(np.int8)


def _states(
    model: ComparatorModel,
    run: Run,
    stimulus: Stimulus,
    resolved: npt.NDArray[np.bool_],
    returns: npt.NDArray[np.bool_],
) -> States:
    """Return states before, shown, after and at rest, shape (N, 4, 4): what is kept filled in."""
    count = len(resolved)
    states = np.full((count, 4, 4), KEEP, dtype=np.int8)
    bit = stimulus.trace.leaning.astype(np.int8)
    states[resolved, 1, :2] = np.stack([bit, 1 - bit], axis=-1)[resolved]
    states[resolved, 1, 2:] = 0
    states[~resolved, 2, :2] = _unresolved_outputs(run, stimulus)[~resolved]
    states[~resolved, 2, 2:] = 1
    level = {"high": 1, "low": 0, "mid": UNKNOWN, "hold": KEEP}[model.cell.in_reset]
    states[returns, 3, :2] = level
    states[returns, 3, CAUSE] = 0
    if level == KEEP:
        states[returns & ~resolved, 3, CAUSE] = ANY
    first = [UNKNOWN, UNKNOWN, ANY, ANY] if level == KEEP else [level, level, ANY, 0]
    states[0, 0] = first
    states = _filled(states.reshape(4 * count, 4)).reshape(count, 4, 4)
    for column, pin in ((OUTN, model.cell.pins.outn), (FLAG, model.cell.pins.unresolved)):
        if pin is None:
            states[:, :, column] = ANY
    return states


def _unresolved_outputs(run: Run, stimulus: Stimulus) -> States:
    count = len(stimulus.edge)
    if run.meant.unresolved_mode == 0:
        return np.full((count, 2), UNKNOWN, dtype=np.int8)
    if run.meant.unresolved_mode == 2:
        return np.full((count, 2), KEEP, dtype=np.int8)
    coin = stimulus.trace.bits.astype(np.int8)
    return np.stack([coin, 1 - coin], axis=-1)


def _filled(states: States) -> States:
    """Replace what is kept by what was there before; the first row keeps nothing."""
    rows = np.arange(len(states))[:, None]
    source = np.maximum.accumulate(np.where(states == KEEP, 0, rows), axis=0)
    return np.take_along_axis(states, source, axis=0)


def read_record(path: Path) -> Record:
    """Read the record that the harness wrote, times counted from its first line.

    Raises
    ------
    ValueError
        When the file is not a whole record.
    """
    raw = np.frombuffer(path.read_bytes(), dtype=np.uint8)
    width = 1 + int(np.argmax(raw[:_LONGEST_LINE] == ord("\n"))) if len(raw) else 0
    if width <= _STATE_END or len(raw) % width:
        raise ValueError(f"{path.name} is not a whole record")
    lines = raw.reshape(-1, width)
    time = _times(lines[:, 1:20])
    levels, causes = np.full((2, 256), ANY, dtype=np.int8)
    causes[ord("0") : ord("6")] = levels[ord("0") : ord("6")] = range(6)
    levels[[ord("x"), ord("z")]] = UNKNOWN, HIGH_IMPEDANCE
    state = levels[lines[:, 20:24]]
    state[:, CAUSE] = causes[lines[:, 20 + CAUSE]]
    energy = _energy(lines[:, _STATE_END:-1])
    shown = state.view(np.uint32)[:, 0]  # a whole state as one number
    total = energy.view(np.uint64)  # its bits: even what is no number is the same as before
    moved = np.append(True, (total[1:] != total[:-1]) | (shown[1:] != shown[:-1]))
    return Record(time=(time - time[0])[moved], state=state[moved], energy_j=energy[moved])


def _times(characters: npt.NDArray[np.uint8]) -> Integers:
    """Return what nineteen decimal digits with leading blanks mean, shape (M,)."""
    digits = (characters & 15).astype(float)  # a blank is a zero, too
    high = digits[:, :4] @ 10.0 ** np.arange(3, -1, -1)
    low = digits[:, 4:] @ 10.0 ** np.arange(14, -1, -1)  # below 2^53, so that it is exact
    return high.astype(np.int64) * 10**15 + low.astype(np.int64)


def _energy(digits: npt.NDArray[np.uint8]) -> Floats:
    """Return what the sixteen hexadecimal digits of each line mean; none: not a number."""
    if digits.shape[1] != _ENERGY_DIGITS:
        return np.full(len(digits), np.nan)
    words = bytes.fromhex(digits.tobytes().decode("ascii", errors="replace"))
    return np.frombuffer(words, dtype=">f8").astype(float)
