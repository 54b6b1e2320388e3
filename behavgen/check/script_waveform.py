"""What an instance must show while a script is played: the words of DEVELOPERS.md."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from behavgen.check.runs import Run
from behavgen.check.script import HIGH, LOW, Script
from behavgen.check.script_decisions import ScriptDecisions, is_on
from behavgen.check.waveform import ANY, UNKNOWN
from behavgen.model import ComparatorModel

__all__ = ["Moment", "Waveform", "waveform_of"]

_NEVER = np.iinfo(np.int64).max


@dataclass(frozen=True, slots=True, kw_only=True)
class Moment:
    """An instant at which the outputs change.

    Parameters
    ----------
    time : int
    slack : int
        Ticks by which it may differ.
    state : tuple of int
        outp, outn, unresolved, x_cause from then on.
    decision : int
        Number of the last decision edge before; -1 before the first.
    energy_j, energy_slack_j : float
        Running total, and by how much ticks of delay may change it.
    """

    time: int
    slack: int
    state: tuple[int, int, int, int]
    decision: int
    energy_j: float
    energy_slack_j: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Waveform:
    """What an instance must show.

    Parameters
    ----------
    moments : tuple of Moment
        Every instant at which the outputs change, the first at time 0.
    due : tuple of int
        When something is due within a tick, whether or not it then happens.
    """

    moments: tuple[Moment, ...]
    due: tuple[int, ...]


def waveform_of(
    model: ComparatorModel, run: Run, script: Script, decisions: ScriptDecisions
) -> Waveform:
    """Play a script to the words of DEVELOPERS.md.

    Parameters
    ----------
    model : ComparatorModel
    run : Run
    script : Script
    decisions : ScriptDecisions
        Of this script.
    """
    machine = _Machine(model=model, run=run, decisions=decisions)
    on = is_on(model.cell, script).tolist()
    clock = script.clk.tolist()
    for row, time in enumerate(script.time.tolist()):
        machine.advance(time)
        machine.now = time
        machine.switch(on[row])
        machine.step(clock[row])
        machine.settle(time)
    machine.advance(script.finish)
    return Waveform(moments=tuple(machine.moments), due=tuple(machine.due))


@dataclass(slots=True, kw_only=True)
class _Machine:
    """The comparator between two events. Pending events are times; `_NEVER`: none."""

    model: ComparatorModel
    run: Run
    decisions: ScriptDecisions
    now: int = 0
    on: bool = False
    clock: int = UNKNOWN
    number: int = -1
    state: list[int] = field(default_factory=lambda: [UNKNOWN, UNKNOWN, ANY, 5])
    deciding: bool = False
    decided: bool = False
    ready: int = _NEVER
    lost_at: int = _NEVER
    rests: int = _NEVER
    rest_slack: int = 0
    energy_j: float = 0.0
    energy_slack_j: float = 0.0
    moments: list[Moment] = field(default_factory=list)
    due: list[int] = field(default_factory=list)

    @property
    def resting_level(self) -> int:
        """Clock level of the reset."""
        return LOW if self.model.cell.decides_on == "rising" else HIGH

    @property
    def holds(self) -> bool:
        """Whether the outputs keep their decision in reset."""
        return self.model.cell.in_reset == "hold"

    @property
    def slack(self) -> int:
        """Ticks by which delays may differ."""
        return int(self.run.meant.delay_on and self.model.delay is not None)

    def advance(self, until: int) -> None:
        """Let everything happen that is due before a moment."""
        while (due := min(self.ready, self.lost_at, self.rests)) < until:
            self.now = due
            self.happen(due)

    def settle(self, time: int) -> None:
        """Let everything happen that is due now, and note what has changed."""
        while min(self.ready, self.lost_at, self.rests) <= time:
            self.happen(time)
        self.note(0)

    def happen(self, due: int) -> None:
        """Let one pending event happen."""
        if self.ready <= due:
            self.show()
            self.note(self.slack)
        elif self.lost_at <= due:
            self.lose(3)
            self.note(0)
        else:
            self.rest()
            self.note(self.rest_slack)

    def switch(self, on: bool) -> None:
        """Lose the supply or the enable, or get it back."""
        if on == self.on:
            return
        self.on = on
        if not on and self.moments:
            self.lose(2)
        elif on and self.clock == self.resting_level:
            self.rest_in(1, 0)

    def step(self, level: int) -> None:
        """Take a step of the clock."""
        before, self.clock = self.clock, level
        if level == before:
            return
        if before == self.resting_level and level == 1 - before:
            self.number += 1
            if self.on:
                self.decide()
        elif not self.on:
            return
        elif before == 1 - self.resting_level and level == self.resting_level:
            self.end()
        elif level not in (LOW, HIGH):
            self.lose(4)
        elif level == self.resting_level:
            self.rest_in(1, 0)

    def decide(self) -> None:
        """Begin a decision."""
        n, trace = self.number, self.decisions.trace
        if self.rests == self.now:
            self.rest()
        self.rests = _NEVER
        self.decided = self.deciding = False
        if not self.decisions.number_at_edge[n]:
            self.lose(3)
            return
        self.deciding = True
        if self.decisions.number_sampled[n]:
            self.ready = self.now + int(trace.delay_ticks[n])
            self.due += [self.ready] * self.slack
        else:
            self.lost_at = self.now + int(trace.aperture_ticks[n])

    def show(self) -> None:
        """Show the bit."""
        bit = int(self.decisions.trace.leaning[self.number])
        self.state = [bit, 1 - bit, 0, 0]
        self.ready, self.deciding, self.decided = _NEVER, False, True
        self.spend(self.slack)

    def end(self) -> None:
        """End the decision phase."""
        reset = int(self.decisions.trace.reset_ticks[self.number]) if self.number >= 0 else 0
        slack = self.slack if self.model.reset is not None else 0
        if self.ready == self.now:
            self.show()
        if self.decided:
            self.rest_in(reset, slack)
        elif self.deciding:
            self.leave_unresolved()
            self.rest_in(max(reset, 1), slack)
        else:
            self.rest_in(1, 0)
        self.deciding = self.decided = False
        self.ready = self.lost_at = _NEVER

    def leave_unresolved(self) -> None:
        """Show that nothing was decided."""
        self.state[2:] = [1, 1]
        coin = int(self.decisions.trace.bits[self.number])
        if self.run.meant.unresolved_mode == 0:
            self.state[:2] = [UNKNOWN, UNKNOWN]
        elif self.run.meant.unresolved_mode == 1:
            self.state[:2] = [coin, 1 - coin]
        self.spend(0)

    def rest_in(self, ticks: int, slack: int) -> None:
        """Let the reset state come, where there is one."""
        if not self.holds:
            self.rests, self.rest_slack = self.now + ticks, slack
            self.due += [self.rests] * slack

    def rest(self) -> None:
        """Take the reset state."""
        level = {"high": 1, "low": 0, "mid": UNKNOWN}[self.model.cell.in_reset]
        self.state[:2], self.state[3] = [level, level], 0
        self.rests = _NEVER

    def lose(self, cause: int) -> None:
        """Lose the outputs; nothing that was on its way comes."""
        self.state[:2], self.state[3] = [UNKNOWN, UNKNOWN], cause
        self.deciding = self.decided = False
        self.ready = self.lost_at = self.rests = _NEVER

    def spend(self, slack: int) -> None:
        """Add a decision's energy to the total."""
        trace, n = self.decisions.trace, self.number
        self.energy_j += float(trace.energy_j[n])
        self.energy_slack_j += slack * float(trace.energy_j[n]) / int(trace.delay_ticks[n])

    def note(self, slack: int) -> None:
        """Note the outputs, if they have changed."""
        state, pins = list(self.state), self.model.cell.pins
        state[1] = ANY if pins.outn is None else state[1]
        state[2] = ANY if pins.unresolved is None else state[2]
        last = self.moments[-1] if self.moments else None
        same = last is not None and last.state == tuple(state)
        if same and last is not None and last.energy_j == self.energy_j:
            return
        moment = Moment(
            time=self.now, slack=slack, state=(state[0], state[1], state[2], state[3]),
            decision=self.number, energy_j=self.energy_j, energy_slack_j=self.energy_slack_j,
        )  # fmt: skip
        if last is not None and last.time == self.now:
            self.moments.pop()
        self.moments.append(moment)
