"""Say in words where an emitted module and the reference part."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.check.agreement import FAULTS
from behavgen.check.strata import PlayedRun
from behavgen.check.verdict import Disagreement
from behavgen.check.waveform import ANY, CAUSE, FLAG, OUTN, OUTP, Record, read_record
from behavgen.model import ComparatorModel
from behavgen.units import ZERO_CELSIUS_K, format_celsius, format_si

__all__ = ["FIRST_ONES", "describe_disagreements"]

FIRST_ONES = 5
"""Disagreements of one run that are described; all are counted."""

State = npt.NDArray[np.int8]


def describe_disagreements(
    model: ComparatorModel, played: PlayedRun, folder: Path
) -> tuple[Disagreement, ...]:
    """Return the first disagreements of a run.

    Parameters
    ----------
    model : ComparatorModel
    played : PlayedRun
    folder : Path
        Where the run's record is.
    """
    wrong = np.flatnonzero(played.agreement.fault)[:FIRST_ONES]
    if len(wrong) == 0:
        return ()
    record = read_record(folder / f"{played.run.index}.events")
    return tuple(_describe(model, played, record, int(n)) for n in wrong)


def _describe(model: ComparatorModel, played: PlayedRun, record: Record, n: int) -> Disagreement:
    stimulus = played.stimulus
    what = FAULTS[played.agreement.fault[n]]
    expected, got = _WORDS[what](_Case(model, played, record, n))
    return Disagreement(
        run=played.run.name,
        decision=n,
        time_s=float(stimulus.edge[n]) / model.cell.ticks_per_second,
        conditions=_conditions(played, n),
        vdiff_v=float(stimulus.vdiff_v[n]),
        overdrive_v=float(stimulus.trace.overdrive_v[n]),
        what=what,
        expected=expected,
        got=got,
    )


def _conditions(played: PlayedRun, n: int) -> str:
    meant, stimulus = played.run.meant, played.stimulus
    return (
        f"process {meant.process}, supply {format_si(float(stimulus.vdd_v[n]), 'V', 6)}, "
        f"{format_celsius(meant.temperature_c + ZERO_CELSIUS_K)}, "
        f"common mode {format_si(float(stimulus.vcm_v[n]), 'V', 6)}"
    )


class _Case:
    """One decision that went wrong, with what was expected and seen of it."""

    def __init__(self, model: ComparatorModel, played: PlayedRun, record: Record, n: int) -> None:
        expected = played.expected
        self.ticks_per_second = model.cell.ticks_per_second
        self.resolved = bool(expected.resolved[n])
        self.returns = bool(expected.returns[n])
        self.edge, self.end = int(expected.edge[n]), int(expected.end[n])
        self.ready, self.reset = int(expected.ready[n]), int(expected.reset[n])
        self.shown, self.after = expected.shown[n], expected.after[n]
        self.rest = expected.rest[n]
        self.slack = expected.delay_tolerance
        self.reset_slack = expected.reset_tolerance
        self.record = record

    def at(self, time: int) -> State:
        """Return what was seen at a time."""
        state: State = self.record.at(np.array([time]))[0]
        return state

    def first_change(self, after: int, until: int) -> int | None:
        """Return when the outputs first changed in a span; None when they did not."""
        time = int(self.record.first_change(np.array([after]))[0])
        return time if after < time <= until else None

    def span(self, ticks: int) -> str:
        """Return a time in words."""
        return f"{format_si(ticks / self.ticks_per_second, 's', 7)} ({ticks} ticks)"


def _levels(state: State) -> str:
    """Return the pins of a state in words; what is not stated or not there is left out."""
    letters = {0: "0", 1: "1", 2: "X", 3: "Z"}
    names = ((OUTP, "outp"), (OUTN, "outn"), (FLAG, "unresolved"))
    return " ".join(
        f"{name}={letters[int(state[column])]}" for column, name in names if state[column] != ANY
    )


def _bit(case: _Case) -> tuple[str, str]:
    return _levels(case.shown), _levels(case.at(case.end - 1))


def _unresolved(case: _Case) -> tuple[str, str]:
    if case.resolved:
        expected = f"resolved after {case.span(case.ready - case.edge)}"
        return expected, f"unresolved, {_levels(case.at(case.end))}"
    seen = case.first_change(case.edge, case.end - 1)
    got = _levels(case.at(case.end))
    if seen is not None:
        got = f"{_levels(case.at(seen))} after {case.span(seen - case.edge)}"
    return f"unresolved, {_levels(case.after)} at the end of the phase", got


def _delay(case: _Case) -> tuple[str, str]:
    seen = case.first_change(case.edge, case.end)
    got = "no change" if seen is None else case.span(seen - case.edge)
    return case.span(case.ready - case.edge), got


def _reset(case: _Case) -> tuple[str, str]:
    if not case.returns:
        return f"{_levels(case.after)} until the next edge", _levels(case.at(case.reset - 1))
    seen = case.first_change(case.end, case.reset + case.reset_slack + 10**9)
    got = _levels(case.at(case.reset + case.reset_slack))
    when = "no change" if seen is None else f"first change after {case.span(seen - case.end)}"
    return f"{_levels(case.rest)} after {case.span(case.reset - case.end)}", f"{got}, {when}"


def _cause(case: _Case) -> tuple[str, str]:
    moments = (
        (case.ready + case.slack, case.shown) if case.resolved else (case.end, case.after),
        (case.reset + case.reset_slack, case.rest),
    )
    for time, state in moments:
        if state[CAUSE] not in (ANY, seen := case.at(time)[CAUSE]):
            return f"x_cause {state[CAUSE]}", f"x_cause {seen}"
    return "", ""


def _stray(case: _Case) -> tuple[str, str]:
    changes = case.record.changes(np.array([case.edge]), np.array([case.reset]))[0]
    expected = 1 + int(case.returns)
    return f"{expected} moments of change at most", f"{changes} before the reset was over"


_WORDS = {
    "bit": _bit,
    "unresolved": _unresolved,
    "delay": _delay,
    "reset": _reset,
    "x_cause": _cause,
    "stray change": _stray,
}
