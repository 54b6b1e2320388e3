"""Compare what an instance showed during a script with what it should have shown."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.check.agreement import ENERGY_TOLERANCE
from behavgen.check.script_waveform import Moment
from behavgen.check.waveform import ANY, UNKNOWN, Record

__all__ = ["Divergence", "first_divergence"]

Mask = npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True)
class Divergence:
    """Where a record first parts from what it should be.

    Parameters
    ----------
    decision : int
        Number of the last decision edge before.
    time : int
        In ticks.
    what : str
        ``"outputs"``, ``"stray change"`` or ``"energy"``.
    expected, got : tuple of int
        outp, outn, unresolved, x_cause.
    """

    decision: int
    time: int
    what: str
    expected: tuple[int, ...]
    got: tuple[int, ...]


def first_divergence(
    moments: Sequence[Moment], record: Record, finish: int, *, two_states: bool
) -> Divergence | None:
    """Return where a record first parts from the moments; None where it never does.

    Parameters
    ----------
    moments : sequence of Moment
    record : Record
    finish : int
        Nothing is compared after it.
    two_states : bool
        What is unknown may show as anything.
    """
    time = np.array([moment.time for moment in moments])
    slack = np.array([moment.slack for moment in moments])
    state = np.array([moment.state for moment in moments], dtype=np.int8)
    if two_states:
        state = np.where(state == UNKNOWN, ANY, state)
    until = np.append(time[1:] - slack[1:], finish) - 1
    late, last = record.at(np.maximum(time + slack, 0)), record.at(until)
    wrong = {
        "outputs": _differ(late, state) | _differ(last, state),
        "stray change": record.changes(time + slack, until) > 0,
        "energy": _energy_off(moments, record.energy_at(until)),
    }
    if two_states:
        wrong.pop("stray change")
    bad = np.flatnonzero(np.any(list(wrong.values()), axis=0))
    if not len(bad):
        return None
    n = int(bad[0])
    what = next(name for name, mask in wrong.items() if mask[n])
    seen = late[n] if _differ(late[n : n + 1], state[n : n + 1])[0] else last[n]
    if what == "stray change":
        seen = record.at(record.first_change(time[n : n + 1] + slack[n : n + 1]))[0]
    return Divergence(
        decision=moments[n].decision, time=moments[n].time, what=what,
        expected=tuple(map(int, state[n])), got=tuple(map(int, seen)),
    )  # fmt: skip


def _differ(observed: npt.NDArray[np.int8], expected: npt.NDArray[np.int8]) -> Mask:
    wrong: Mask = ((observed != expected) & (observed != ANY) & (expected != ANY)).any(axis=1)
    return wrong


def _energy_off(moments: Sequence[Moment], seen: npt.NDArray[np.float64]) -> Mask:
    """Return where a running total is off by more than ticks of delay and rounding explain."""
    total = np.array([moment.energy_j for moment in moments])
    slack = np.array([moment.energy_slack_j for moment in moments])
    return np.asarray(np.abs(seen - total) > ENERGY_TOLERANCE * total + slack)
