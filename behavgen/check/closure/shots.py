"""Single measurements of simulated instances, many at once.

A shot is one decision under chosen conditions, after a decision of a chosen
sign if it wants one before it. What it shows is read from the record alone:
nothing here asks the reference what to expect.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
import numpy.typing as npt

from behavgen.check.harness import harness_macros, top_text, write_block
from behavgen.check.levels import Levels
from behavgen.check.runs import Run, Settings
from behavgen.check.simulation import Simulation, play
from behavgen.check.waveform import ANY, CAUSE, FLAG, OUTP, UNKNOWN, Record, read_record
from behavgen.errors import Fault, ToolError
from behavgen.model import ComparatorModel

__all__ = ["Bench", "Seen", "Shots", "joined", "shots"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

PRELUDE_V = 0.4
"""Input of the decision before a shot: larger than any memory."""
_START_TICKS = 40
_CLEAR_TICKS = 4


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Shots:
    """What is applied, shape (N,) each.

    Parameters
    ----------
    instance : ndarray of int
        Which of the bench's instances.
    vdd_v, vcm_v, vdiff_v : ndarray
    before : ndarray of int
        Sign of the decision before; 0: none is made.
    reset_ticks : ndarray of int
        Between that decision and the shot.
    phase_ticks : ndarray of int
    step_ticks : ndarray of int
        When the input steps, after the edge; negative: it does not.
    step_v : ndarray
        Differential input from then on.
    """

    instance: Integers
    vdd_v: Floats
    vcm_v: Floats
    vdiff_v: Floats
    before: Integers
    reset_ticks: Integers
    phase_ticks: Integers
    step_ticks: Integers
    step_v: Floats

    def pick(self, rows: npt.NDArray[np.bool_] | Integers) -> Shots:
        """Return some of the shots."""
        return Shots(**{f.name: getattr(self, f.name)[rows] for f in fields(self)})


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Seen:
    """What shots showed, shape (N,) each.

    Parameters
    ----------
    bit : ndarray of int
        1 or 0; -1 where it did not resolve.
    delay_ticks, reset_ticks : ndarray of int
        From the edge to the first change, from the end of the phase to the next; -1: none.
    after : ndarray of int
        The first output at the end of the phase, as it is shown.
    energy_j : ndarray
        By how much the running total grew; not a number where it cannot be read.
    """

    bit: Integers
    after: Integers
    delay_ticks: Integers
    reset_ticks: Integers
    energy_j: Floats


def shots(
    instance: npt.ArrayLike, *, vdd_v: npt.ArrayLike, vcm_v: npt.ArrayLike,
    vdiff_v: npt.ArrayLike, phase_ticks: npt.ArrayLike, before: npt.ArrayLike = 0,
    reset_ticks: npt.ArrayLike = 0, step_ticks: npt.ArrayLike = -1, step_v: npt.ArrayLike = 0.0,
) -> Shots:  # fmt: skip
    """Broadcast what is given to shots."""
    given = np.broadcast_arrays(
        instance, vdd_v, vcm_v, vdiff_v, before, reset_ticks, phase_ticks, step_ticks, step_v
    )
    kinds = (int, float, float, float, int, int, int, int, float)
    arrays: list[Any] = [a.astype(k).ravel() for a, k in zip(given, kinds, strict=True)]
    return Shots(**dict(zip((f.name for f in fields(Shots)), arrays, strict=True)))


def joined(parts: Sequence[Shots]) -> Shots:
    """Return all shots of several sets, in their order."""
    return Shots(
        **{f.name: np.concatenate([getattr(p, f.name) for p in parts]) for f in fields(Shots)}
    )


class Bench:
    """A compiled harness with instances to be measured.

    Parameters
    ----------
    simulation : Simulation
    model : ComparatorModel
    text : str
        The module under check.
    instances : sequence of Settings
    *plusargs : str
        For every simulation.
    """

    def __init__(
        self,
        simulation: Simulation,
        model: ComparatorModel,
        text: str,
        instances: Sequence[Settings],
        *plusargs: str,
    ) -> None:
        self._simulation = simulation
        self._plusargs = plusargs
        self._model = model
        self._runs = [
            Run(index=n, name=f"instance {n}", given=one, meant=one, decisions=1)
            for n, one in enumerate(instances)
        ]
        top = top_text(model, self._runs)
        compiled = simulation.compile(model.cell.name, text, top, harness_macros(model, text))
        if compiled.code != 0:
            raise ToolError(Fault(what=f"the bench does not compile: {compiled.tail(3)}"))

    def measure(self, wanted: Shots) -> Seen:
        """Play all shots, those of an instance one after the other."""
        found = Seen(
            bit=np.full(len(wanted.instance), -1), after=np.full(len(wanted.instance), UNKNOWN),
            delay_ticks=np.full(len(wanted.instance), -1),
            reset_ticks=np.full(len(wanted.instance), -1),
            energy_j=np.full(len(wanted.instance), np.nan),
        )  # fmt: skip
        rows = {run.index: np.flatnonzero(wanted.instance == run.index) for run in self._runs}
        timings = {run.index: self._write(run, wanted.pick(rows[run.index])) for run in self._runs}
        self._simulation.simulate("bench", *play(0, len(self._runs) - 1), *self._plusargs)
        for index, (edge, end, after) in timings.items():
            if len(edge):
                record = read_record(self._simulation.work / f"{index}.events")
                seen = _read(record, edge, end, after)
                for field in fields(Seen):
                    getattr(found, field.name)[rows[index]] = getattr(seen, field.name)
        return found

    def _write(self, run: Run, wanted: Shots) -> tuple[Integers, Integers, Integers]:
        """Write an instance's block; return edges, ends and the edges after each shot."""
        count = len(wanted.instance)
        made = np.stack([wanted.before != 0, np.full(count, True)], axis=1)
        phase = np.stack([np.full(count, _longest(wanted)), wanted.phase_ticks], axis=1)
        rest = self._rest_ticks()
        gap = np.stack([wanted.reset_ticks, np.full(count, rest)], axis=1)
        length = np.where(made, phase + gap, 0).ravel()
        start = _START_TICKS + (np.cumsum(length) - length).reshape(count, 2)
        level = _levels(wanted, start, start + phase, made, rest)
        edge, end = start[made], (start + phase)[made]
        finish = int(end[-1] + rest) if count else _START_TICKS
        write_block(self._simulation.work, run, edge=edge, end=end, levels=level, finish=finish)
        own = start[:, 1]
        return own, own + wanted.phase_ticks, own + wanted.phase_ticks + rest

    def _rest_ticks(self) -> int:
        """Return a reset that is longer than any that was characterised, and forgets."""
        ticks = [20_000.0]
        for quantity in ("reset", "memory"):
            times = [p.y if quantity == "reset" else p.x for p in self._model.points
                     if p.quantity == quantity]  # fmt: skip
            ticks += [20.0 * max(t) * self._model.cell.ticks_per_second for t in times]
        return int(max(ticks))


def _longest(wanted: Shots) -> int:
    return int(wanted.phase_ticks.max(initial=_CLEAR_TICKS))


def _levels(
    wanted: Shots, start: Integers, end: Integers, made: npt.NDArray[np.bool_], rest: int
) -> Levels:
    """Return the levels of preludes, shots and steps; each is there well before its edge."""
    steps = wanted.step_ticks >= 0
    lead = np.minimum(rest // 2, _START_TICKS)
    before = np.maximum(start[:, 0] - lead, 0)
    own = np.where(made[:, 0], end[:, 0] + np.maximum(wanted.reset_ticks // 2, 1), before)
    time = np.stack([before, own, start[:, 1] + wanted.step_ticks], axis=1)
    used = np.stack([made[:, 0], np.full(len(steps), True), steps], axis=1)
    vdiff = np.stack([PRELUDE_V * wanted.before, wanted.vdiff_v, wanted.step_v], axis=1)
    vcm, vdd = (np.repeat(a[:, None], 3, axis=1) for a in (wanted.vcm_v, wanted.vdd_v))
    return Levels(
        moment=time[used], inp_v=(vcm + 0.5 * vdiff)[used], inn_v=(vcm - 0.5 * vdiff)[used],
        vdd_v=vdd[used],
    )  # fmt: skip


def _read(record: Record, edge: Integers, end: Integers, after: Integers) -> Seen:
    at_end, shown = record.at(end), record.at(end - 1)
    unknown = at_end[:, OUTP] == UNKNOWN
    unresolved = np.where(
        at_end[:, FLAG] != ANY, at_end[:, FLAG] == 1,
        np.where(at_end[:, CAUSE] != ANY, at_end[:, CAUSE] == 1, unknown),
    )  # fmt: skip
    ready, rested = record.first_change(edge), record.first_change(end)
    return Seen(
        bit=np.where(unresolved, -1, shown[:, OUTP]),
        after=at_end[:, OUTP].astype(np.int64),
        delay_ticks=np.where((ready > 0) & (ready <= end), ready - edge, -1),
        reset_ticks=np.where((rested > 0) & (rested < after), rested - end, -1),
        energy_j=record.energy_at(end) - record.energy_at(edge),
    )
