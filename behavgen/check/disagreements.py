"""Say in words where an emitted module and the reference part."""

from __future__ import annotations

import shlex
from collections.abc import Iterable

import numpy as np
import numpy.typing as npt

from behavgen.check.agreement import FAULTS
from behavgen.check.likely_term import likely_term
from behavgen.check.runs import Settings
from behavgen.check.slices import PlayedRun
from behavgen.check.verdict import Disagreement
from behavgen.check.waveform import ANY, CAUSE, Record
from behavgen.model import ComparatorModel
from behavgen.units import ZERO_CELSIUS_K, format_celsius, format_si

__all__ = [
    "FIRST_ONES",
    "condition_words",
    "describe",
    "describe_disagreements",
    "reproduce_options",
    "state_words",
]

FIRST_ONES = 5
"""Disagreements of one run that are described; all are counted."""

State = npt.NDArray[np.int8]


def describe_disagreements(
    model: ComparatorModel, played: PlayedRun, record: Record
) -> tuple[Disagreement, ...]:
    """Return the first disagreements of a run.

    Parameters
    ----------
    model : ComparatorModel
    played : PlayedRun
    record : Record
        What the run showed.
    """
    wrong = np.flatnonzero(played.agreement.fault)[:FIRST_ONES]
    return tuple(describe(model, played, record, int(n)) for n in wrong)


def describe(model: ComparatorModel, played: PlayedRun, record: Record, n: int) -> Disagreement:
    """Tell of a wrong decision what was expected, what was seen and where it may come from."""
    stimulus = played.stimulus
    what = FAULTS[played.agreement.fault[n]]
    expected, got = _WORDS[what](_Case(model, played, record, n))
    return Disagreement(
        run=played.run.name,
        decision=n,
        time_s=float(stimulus.edge[n]) / model.cell.ticks_per_second,
        conditions=condition_words(
            played.run.meant, float(stimulus.vdd_v[n]), float(stimulus.vcm_v[n])
        ),
        vdiff_v=float(stimulus.sampled_v[n]),
        overdrive_v=float(stimulus.trace.overdrive_v[n]),
        what=what,
        expected=expected,
        got=got,
        inputs=_inputs(played, n),
        term=likely_term(model, played.run, stimulus, record, n),
        reproduce=reproduce_options(played.run.name, n),
    )


def reproduce_options(run: str, decision: int) -> str:
    """Return the options by which a check simulates just one decision and those before."""
    return f"--run {shlex.quote(run)} --decision {decision}"


def _inputs(played: PlayedRun, n: int) -> str:
    stimulus = played.stimulus
    inp, inn = (format_si(float(v[n]), "V", 9) for v in (stimulus.inp_v, stimulus.inn_v))
    at_edge = float(stimulus.inp_v[n] - stimulus.inn_v[n])
    sampled = float(stimulus.sampled_v[n])
    moved = f", {format_si(sampled, 'V', 9)} apart when sampled" if sampled != at_edge else ""
    return f"{inp} and {inn}{moved}"


def condition_words(meant: Settings, vdd_v: float, vcm_v: float) -> str:
    """Return operating conditions in words with units."""
    return (
        f"process {meant.process}, supply {format_si(vdd_v, 'V', 6)}, "
        f"{format_celsius(meant.temperature_c + ZERO_CELSIUS_K)}, "
        f"common mode {format_si(vcm_v, 'V', 6)}"
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
        self.energy_j = float(expected.energy_j[n])
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


def state_words(state: Iterable[int]) -> str:
    """Return a state in words; what is not stated or not there is left out."""
    letters = {0: "0", 1: "1", 2: "X", 3: "Z"}
    *levels, cause = map(int, state)
    names = ("outp", "outn", "unresolved")
    words = [f"{n}={letters[v]}" for n, v in zip(names, levels, strict=True) if v != ANY]
    return " ".join([*words, *([f"x_cause={cause}"] if cause != ANY else [])])


def _levels(state: State) -> str:
    """Return the pins of a state in words."""
    return state_words([*state[:CAUSE], ANY])


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


def _energy(case: _Case) -> tuple[str, str]:
    reached = min(case.ready + case.slack, case.end) if case.resolved else case.end
    total = case.record.energy_at(np.array([case.edge, reached]))
    grown = format_si(float(total[1] - total[0]), "J", 12)
    return format_si(case.energy_j, "J", 12), grown


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
    "energy": _energy,
    "stray change": _stray,
}
