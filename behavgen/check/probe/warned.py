"""Instances that warn: every message that they must print, to the letter, and every count.

A sequence goes to the last step of the common mode and the supply that is still
inside, to the first outside and beyond, then through inputs that are no numbers
and an unknown clock, each more than once: only the first is told, all are counted.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import count

import numpy as np

from behavgen.check.directed import middle_c
from behavgen.check.runs import Run, Settings, reference_of
from behavgen.check.script import HIGH, LOW, Change, Script, X, script_of
from behavgen.model import ComparatorModel, Range
from behavgen.operating_point import TEMPERATURE_STEPS_PER_K, VOLTAGE_STEPS_PER_V
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["COUNTERS", "Warned", "prepare_warned", "warned_runs"]

COUNTERS = ("temperature", "supply", "common_mode", "input", "clock")
"""Causes, as the module's counters are named."""

_SIDES = ("low", "high")
_INPUT_V = 0.1
_SETTLE_TICKS = 20
_SHARES = (
    (0.0, True), (0.4975, False), (0.5, True), (0.4975, True), (-0.4975, False), (-0.5, False),
    (-0.5025, True),
)  # fmt: skip
"""Of a step, and whether that is another step than the one before."""
_ANOTHER_V = 1e-4
"""Between two common modes; inside the range unless that is a single value."""
_INFINITE = float("inf")
_JUST_UNDER_HALF = 0.4975
"""Of a step: levels that far from its middle are still rounded to it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Warned:
    """What is played to an instance, what it must print and what it must have counted.

    Parameters
    ----------
    run : Run
    script : Script
    messages : tuple of str
    counted : mapping
        By cause.
    decisions : int
    """

    run: Run
    script: Script
    messages: tuple[str, ...]
    counted: dict[str, int]
    decisions: int


def warned_runs(model: ComparatorModel, *, first_index: int) -> tuple[Run, ...]:
    """Return one instance for each process and each end of the range, inside and outside."""
    number = count(first_index)
    runs = []
    for process in model.processes:
        for side in _SIDES:
            for where in ("inside", "outside"):
                settings = Settings(
                    process=process.name, noise_on=False, memory_on=False, warnings=1,
                    temperature_c=_temperature_c(model, process.name, side, where == "outside"),
                )  # fmt: skip
                name = f"warns, {process.name}, {side} end, {where}"
                runs.append(Run(index=next(number), name=name, given=settings, meant=settings,
                                scripted=True))  # fmt: skip
    return tuple(runs)


def prepare_warned(model: ComparatorModel, run: Run) -> Warned:
    """Return the sequence of an instance and what must come of it."""
    _, process, side, where = run.name.split(", ")
    tape = _Tape(model=model, run=run, side=side.split()[0])
    if where == "outside" and model.box.temperature_k is not None:
        tape.warn_of_temperature(_range(model, process, "temperature_k"))
    tape.play()
    script = script_of(tape.changes, after_last=_SETTLE_TICKS)
    return Warned(
        run=run, script=script, messages=tuple(tape.messages), counted=tape.counted,
        decisions=tape.number + 1,
    )  # fmt: skip


def _range(model: ComparatorModel, process: str, condition: str) -> Range | None:
    """Return what is warned of: the range of the delay, else that of the cell."""
    cell: Range | None = getattr(model.box, condition)
    if cell is None or model.delay is None:
        return cell
    own: Range | None = getattr(model.delay.tau.variant(process).box, condition)
    return own or cell


def _steps(span: Range, steps_per_unit: float, side: str) -> tuple[float, float]:
    """Return the last step that is not warned of and the first that is, in the unit."""
    end, away = (span.low, -1.0) if side == "low" else (span.high, 1.0)
    limit = end + away / steps_per_unit
    step = np.floor(end * steps_per_unit)
    inside = [s / steps_per_unit for s in step + np.arange(-3, 4)
              if (s / steps_per_unit - limit) * away <= 0.0]  # fmt: skip
    last = max(inside) if side == "high" else min(inside)
    return float(last), float(last + away / steps_per_unit)


def _temperature_c(model: ComparatorModel, process: str, side: str, outside: bool) -> float:
    span = _range(model, process, "temperature_k")
    if span is None:
        return middle_c(model)
    last, first = _steps(span, TEMPERATURE_STEPS_PER_K, side)
    at = first if outside else last + _JUST_UNDER_HALF * (first - last)
    return at - ZERO_CELSIUS_K


@dataclass(slots=True, kw_only=True)
class _Tape:
    """The sequence as it grows."""

    model: ComparatorModel
    run: Run
    side: str
    now: int = 0
    number: int = -1
    changes: list[Change] = field(default_factory=list)
    messages: list[str] = field(default_factory=list)
    counted: dict[str, int] = field(default_factory=lambda: dict.fromkeys(COUNTERS, 0))

    def warn(self, cause: str, what: str, *, at: int) -> None:
        """Count a cause; the first time it is told."""
        self.counted[cause] += 1
        if self.counted[cause] == 1:
            time_ns = at * self.model.cell.time_unit_s * 1e9
            where = f"{self.run.path} t={time_ns:.6f} ns decision {max(self.number, 0)}"
            self.messages.append(f"[behavgen] {where}: {what}")

    def warn_of_temperature(self, span: Range | None) -> None:
        """Tell of the temperature, before anything happens."""
        if span is not None:
            low, high = span.low - ZERO_CELSIUS_K, span.high - ZERO_CELSIUS_K
            here = self.run.meant.temperature_c
            told = f"temperature {here:g} degC is outside {low:g} degC to {high:g} degC and clamped"
            self.warn("temperature", told, at=0)

    def play(self) -> None:
        """Go through everything that is warned of."""
        vdd_v, vcm_v = self._middle("vdd_v"), self._middle("vcm_v")
        self._apply("vdd", vdd_v)
        self._clock(self._rest)
        self._clock(X)  # no decision before: it is not told
        self._clock(self._rest)
        self._decide(vcm_v)
        for beyond in self._away("vcm_v"):
            self._decide(beyond, "common_mode", self._outside("common mode", "vcm_v", beyond))
            self._decide(beyond)
        for share in self._shares_of_a_step():
            told = self._outside("common mode", "vcm_v", share[0])
            self._decide_on((share[0], share[0]), "common_mode", told if share[1] else "")
        for beyond in self._supplies():
            self._apply("vdd", beyond)
            self._decide(vcm_v, "supply", self._outside("supply", "vdd_v", beyond))
            another = vcm_v - _ANOTHER_V
            self._decide(another, "common_mode", self._outside("common mode", "vcm_v", another)
                         if self._is_outside("vcm_v", another) else "")  # fmt: skip
        self._apply("vdd", vdd_v)
        self._decide(vcm_v)
        self._lose_inputs(vcm_v)
        for _ in range(2):
            self._clock(X)
            self.warn("clock", "the clock is unknown", at=self._started(self.changes[-1].time))
            self._clock(self._rest)
        self._decide(vcm_v)

    @property
    def _rest(self) -> int:
        return LOW if self.model.cell.decides_on == "rising" else HIGH

    @staticmethod
    def _started(time: int) -> int:
        """Return a time as the simulator counts it: a sequence starts at its first tick."""
        return time + 1

    def _middle(self, condition: str) -> float:
        span = _range(self.model, self.run.meant.process, condition)
        return (1.0 if condition == "vdd_v" else 0.5) if span is None else span.middle

    def _away(self, condition: str) -> tuple[float, ...]:
        """Return the last level inside, the first outside and one further out."""
        span = _range(self.model, self.run.meant.process, condition)
        if span is None:
            return ()
        inside, outside = _steps(span, VOLTAGE_STEPS_PER_V, self.side)
        return inside + _JUST_UNDER_HALF * (outside - inside), outside, 2.0 * outside - inside

    def _shares_of_a_step(self) -> Iterator[tuple[float, bool]]:
        """Return common modes outside, and whether each lies in another step than the one before.

        A step reaches from half a step below its middle, which belongs to it, to half above.
        """
        span = _range(self.model, self.run.meant.process, "vcm_v")
        if span is None:
            return
        _, outside = _steps(span, VOLTAGE_STEPS_PER_V, self.side)
        away = -1.0 if self.side == "low" else 1.0
        first = outside + 20.0 * away / VOLTAGE_STEPS_PER_V
        for share, another in _SHARES:
            yield first + share / VOLTAGE_STEPS_PER_V, another

    def _supplies(self) -> tuple[float, ...]:
        if self.model.cell.pins.vdd is None:
            return ()
        least = self.model.cell.supply_off_v or 0.0
        return tuple(level for level in self._away("vdd_v") if level >= least)

    def _outside(self, what: str, condition: str, level: float) -> str:
        """Return what is told of a level; "" inside the range."""
        span = _range(self.model, self.run.meant.process, condition)
        if span is None or level == self._away(condition)[0]:
            return ""
        return f"{what} {level:g} V is outside {span.low:g} V to {span.high:g} V and clamped"

    def _is_outside(self, condition: str, level: float) -> bool:
        span = _range(self.model, self.run.meant.process, condition)
        step = 1.0 / VOLTAGE_STEPS_PER_V
        return span is not None and not span.low - step <= level <= span.high + step

    def _apply(self, pin: str, level: float | tuple[float, float]) -> None:
        self.changes.append(Change(time=self.now, pin=pin, level=level))
        self.now += _SETTLE_TICKS

    def _clock(self, level: int) -> None:
        self.changes.append(Change(time=self.now, pin="clk", level=level))
        self.now += _SETTLE_TICKS

    def _decide(self, vcm_v: float, cause: str = "", told: str = "") -> None:
        self._decide_on((vcm_v + _INPUT_V, vcm_v - _INPUT_V), cause, told)

    def _decide_on(self, levels: tuple[float, float], cause: str = "", told: str = "") -> None:
        self._apply("inputs", levels)
        self._edge()
        if told:
            self.warn(cause, told, at=self._started(self.changes[-1].time))
        self._release()

    def _edge(self) -> None:
        self._clock(1 - self._rest)
        self.number += 1

    def _release(self) -> None:
        self.now += self._phase_ticks()
        self._clock(self._rest)
        self.now += self._phase_ticks()

    def _phase_ticks(self) -> int:
        reference = reference_of(self.model, self.run)
        slowest = 0.0 if self.model.delay is None else float(np.max(reference.delay(_INPUT_V)))
        return max(1000, int(4.0 * slowest * self.model.cell.ticks_per_second))

    def _lose_inputs(self, vcm_v: float) -> None:
        """Apply what is not a number: at the edge on either pin, then when it is sampled."""
        for levels in self._lost(vcm_v):
            self._decide_on(levels, "input", _not_a_number(levels))
        if self.model.aperture is None:
            return
        self._apply("inputs", (vcm_v + _INPUT_V, vcm_v - _INPUT_V))
        self._edge()
        edge = self.changes[-1].time
        self.changes.append(
            Change(time=edge + 1, pin="inputs", level=(vcm_v + _INPUT_V, _INFINITE))
        )
        self.warn("input", "", at=0)
        self._release()

    def _lost(self, vcm_v: float) -> Iterator[tuple[float, float]]:
        yield (vcm_v, -_INFINITE) if self.side == "low" else (_INFINITE, vcm_v)
        yield (-_INFINITE, vcm_v)
        yield (_INFINITE, _INFINITE)


def _not_a_number(levels: tuple[float, float]) -> str:
    return f"the input is not a number: {levels[0]:g} V and {levels[1]:g} V"
