"""Sequences without a rhythm: disturbances of clock, supply, enable and inputs at random times.

Every decision is one of the kinds below, so that each can be counted; what
must come of it is worked out from the script alone.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from behavgen.check.conditions import spread_conditions
from behavgen.check.runs import Run, reference_of
from behavgen.check.script import HIGH, LOW, Change, X, Z
from behavgen.formulas.random_stream import path_seed
from behavgen.model import ComparatorModel

__all__ = ["Sequence", "kinds_of", "make_sequence"]

_START_TICKS = 60


@dataclass(frozen=True, slots=True, kw_only=True)
class Sequence:
    """What is done to an instance.

    Parameters
    ----------
    changes : tuple of Change
    kinds : tuple of str
        Of each decision in turn.
    """

    changes: tuple[Change, ...]
    kinds: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Cycle:
    """Plan of one decision: inputs, edge, about when it is ready, end, about when it rests, next.

    Times are ticks; `share` draws a time between two of them.
    """

    begin: int
    edge: int
    ready: int
    end: int
    next: int
    levels: tuple[float, float]
    vdd_v: float
    other_vdd_v: float
    off_v: float
    rest: int
    aperture: int
    rng: np.random.Generator

    def share(self, low: int, high: int) -> int:
        """Return a time well inside a span, as far as there is room."""
        return low + 1 + int(self.rng.uniform(0.05, 0.95) * max(high - low - 2, 0))


_Kind = Callable[[_Cycle], Iterator[Change]]


def kinds_of(model: ComparatorModel, *, two_states: bool) -> dict[str, _Kind]:
    """Return every kind of decision that the cell can meet.

    Parameters
    ----------
    model : ComparatorModel
    two_states : bool
        The simulator knows neither X nor Z.
    """
    kinds: dict[str, _Kind] = {**dict.fromkeys(_TIMINGS, _plain), "input moves": _moving}
    pins = model.cell.pins
    if pins.vdd is not None:
        kinds["supply steps"] = _stepping
        if model.cell.supply_off_v is not None:
            kinds |= {f"supply lost {name}": _lost("vdd", None, s) for name, s in _SPANS.items()}
    if pins.enable is not None:
        kinds |= {f"disabled {name}": _lost("enable", LOW, s) for name, s in _SPANS.items()}
    kinds |= {
        "input not a number at the edge": _no_number_at_edge,
        "input not a number in reset": _no_number_in_reset,
    }
    if model.aperture is not None:
        kinds["input not a number when sampled"] = _no_number_sampled
    return kinds if two_states else kinds | _unknown_kinds(model)


def _unknown_kinds(model: ComparatorModel) -> dict[str, _Kind]:
    """Return what needs X, or a supply that is no number.

    Verilator takes a real that is not a number for a change of itself, for ever.
    """
    kinds: dict[str, _Kind] = dict(_UNKNOWN_CLOCKS)
    if model.cell.pins.vdd is not None:
        kinds["supply not a number"] = _lost("vdd", float("nan"), _in_decision)
    if model.cell.pins.enable is not None:
        kinds["enable unknown"] = _lost("enable", X, _in_decision)
    return kinds


def make_sequence(
    model: ComparatorModel, run: Run, *, seed: int, two_states: bool = False
) -> Sequence:
    """Return a sequence; the same arguments give the same one.

    Parameters
    ----------
    model : ComparatorModel
    run : Run
    seed : int
    two_states : bool
        The simulator knows neither X nor Z.
    """
    rng = np.random.default_rng([seed, path_seed(run.name), 2])
    kinds = kinds_of(model, two_states=two_states)
    names = [list(kinds)[n % len(kinds)] for n in rng.permutation(run.decisions)]
    changes, time = list(_power_up(model)), _START_TICKS
    for cycle, name in zip(_cycles(model, run, names, rng, time), names, strict=True):
        changes.append(Change(time=cycle.begin, pin="inputs", level=cycle.levels))
        changes += kinds[name](cycle)
    return Sequence(changes=tuple(changes), kinds=tuple(names))


def _power_up(model: ComparatorModel) -> Iterator[Change]:
    """Begin without supply and with an unknown clock."""
    rest, vdd = _resting(model), 1.0 if model.box.vdd_v is None else model.box.vdd_v.middle
    middle = 0.5 if model.box.vcm_v is None else model.box.vcm_v.middle
    yield Change(time=0, pin="vdd", level=0.0 if model.cell.supply_off_v else vdd)
    yield Change(time=0, pin="inputs", level=(middle, middle))
    yield Change(time=20, pin="clk", level=rest)
    yield Change(time=40, pin="vdd", level=vdd)


def _resting(model: ComparatorModel) -> int:
    return LOW if model.cell.decides_on == "rising" else HIGH


def _cycles(
    model: ComparatorModel, run: Run, names: list[str], rng: np.random.Generator, time: int
) -> Iterator[_Cycle]:
    """Plan one decision after the other around the delays that they will have about."""
    count, reference = len(names), reference_of(model, run)
    vdd, vcm = spread_conditions(model, count, start=int(rng.integers(1 << 20)))
    fixed: dict[str, Any] = {"temp_c": run.meant.temperature_c, "process": run.meant.process}
    largest = 0.3 if model.box.overdrive_v is None else model.box.overdrive_v.high
    size = np.exp(rng.uniform(np.log(1e-5), np.log(largest), count))
    half = 0.5 * (reference.offset(vdd=vdd, vcm=vcm, **fixed) + rng.choice([-1, 1], count) * size)
    endless = np.full(count, np.iinfo(np.int64).max)
    plan = reference.trace(2.0 * half, endless, vdd=vdd, vcm=vcm, **fixed)
    for n, name in enumerate(names):
        delay, reset = int(plan.delay_ticks[n]), max(int(plan.reset_ticks[n]), 1)
        phase, gap = (rng.uniform(*span) for span in _TIMINGS.get(name, (_LONG, _LONG)))
        edge = time + (int(gap * reset) + 12 if gap > 0.0 else int(rng.integers(1, 4)))
        end = edge + (int(phase * delay) + 4 if phase > 0.0 else int(rng.integers(1, 4)))
        room = end + 3 * reset + 30
        yield _Cycle(
            begin=min(time + 1, edge - 1), edge=edge, ready=edge + delay, end=end, next=room,
            levels=(float(vcm[n] + half[n]), float(vcm[n] - half[n])),
            vdd_v=float(vdd[n]), other_vdd_v=float(vdd[(n + 1) % count]),
            off_v=0.9 * (model.cell.supply_off_v or 0.0), rest=_resting(model),
            aperture=int(plan.aperture_ticks[n]), rng=rng,
        )  # fmt: skip
        time = end if name in _TIMINGS else room


_LONG, _GLITCH, _SHORT, _STRETCHED, _STOPPED = (
    (1.2, 3.0), (0.0, 0.0), (0.05, 0.95), (10.0, 50.0), (1000.0, 2000.0),
)  # fmt: skip
_TIMINGS = {
    "regular": (_LONG, _LONG),
    "short decision": (_SHORT, _LONG),
    "glitch of the clock": (_GLITCH, _LONG),
    "stretched decision": (_STRETCHED, _LONG),
    "stopped in a decision": (_STOPPED, _LONG),
    "stretched reset": (_LONG, _STRETCHED),
    "stopped in reset": (_LONG, _STOPPED),
    "short reset before it": (_LONG, _SHORT),
    "glitch of a reset before it": (_LONG, _GLITCH),
}
"""Lengths of a decision phase and the reset before it, in delays and reset delays; none: of a
few ticks. After other kinds there is always time to rest."""


def _clock(cycle: _Cycle) -> Iterator[Change]:
    yield Change(time=cycle.edge, pin="clk", level=1 - cycle.rest)
    yield Change(time=cycle.end, pin="clk", level=cycle.rest)


def _plain(cycle: _Cycle) -> Iterator[Change]:
    yield Change(time=cycle.begin, pin="vdd", level=cycle.vdd_v)
    yield from _clock(cycle)


def _moving(cycle: _Cycle) -> Iterator[Change]:
    yield from _clock(cycle)
    inp, inn = cycle.levels
    for low, high in ((cycle.edge, cycle.edge + cycle.aperture), (cycle.edge, cycle.end)):
        step = float(cycle.rng.uniform(-0.05, 0.05))
        yield Change(time=cycle.share(low, high), pin="inputs", level=(inp + step, inn - step))


def _stepping(cycle: _Cycle) -> Iterator[Change]:
    yield from _clock(cycle)
    for low, high in ((cycle.begin, cycle.edge), (cycle.edge, cycle.end), (cycle.end, cycle.next)):
        level = cycle.other_vdd_v if cycle.rng.random() < 0.5 else cycle.vdd_v
        yield Change(time=cycle.share(low, high), pin="vdd", level=level)


def _no_number(cycle: _Cycle, low: int, high: int) -> Iterator[Change]:
    yield from _clock(cycle)
    level = float(cycle.rng.choice([np.nan, np.inf, -np.inf]))
    pair = (level, cycle.levels[1]) if cycle.rng.random() < 0.5 else (cycle.levels[0], level)
    yield Change(time=low, pin="inputs", level=pair)
    yield Change(time=high, pin="inputs", level=cycle.levels)


def _no_number_at_edge(cycle: _Cycle) -> Iterator[Change]:
    after = cycle.share(cycle.edge + cycle.aperture, cycle.next)
    yield from _no_number(cycle, cycle.share(cycle.begin, cycle.edge), after)


def _no_number_sampled(cycle: _Cycle) -> Iterator[Change]:
    sampled = cycle.edge + cycle.aperture
    yield from _no_number(cycle, cycle.share(cycle.edge, sampled), cycle.share(sampled, cycle.end))


def _no_number_in_reset(cycle: _Cycle) -> Iterator[Change]:
    middle = (cycle.end + cycle.next) // 2
    yield from _no_number(cycle, cycle.share(cycle.end, middle), cycle.share(middle, cycle.next))


def _unknown_in(span: str, level: int) -> _Kind:
    def changes(cycle: _Cycle) -> Iterator[Change]:
        yield Change(time=cycle.edge, pin="clk", level=1 - cycle.rest)
        low, high = _span(cycle, span)
        yield Change(time=cycle.share(low, high), pin="clk", level=level)
        if span == "in reset":
            yield Change(time=cycle.end, pin="clk", level=cycle.rest)
            yield Change(time=cycle.next - 3, pin="clk", level=cycle.rest)
        else:
            yield Change(time=cycle.end, pin="clk", level=cycle.rest)

    return changes


def _through_unknown(cycle: _Cycle) -> Iterator[Change]:
    """Come to the deciding level from X: that decides nothing."""
    yield Change(time=cycle.share(cycle.begin, cycle.edge), pin="clk", level=X)
    yield from _clock(cycle)


def _span(cycle: _Cycle, name: str) -> tuple[int, int]:
    if name == "in a decision":
        return cycle.edge, min(cycle.ready, cycle.end)
    if name == "after a decision":
        return min(cycle.ready, cycle.end - 4), cycle.end
    return cycle.end, (cycle.end + cycle.next) // 2


_UNKNOWN_CLOCKS: dict[str, _Kind] = {
    "clock X in a decision": _unknown_in("in a decision", X),
    "clock X after a decision": _unknown_in("after a decision", X),
    "clock X in reset": _unknown_in("in reset", X),
    "clock Z in a decision": _unknown_in("in a decision", Z),
    "clock from X to its deciding level": _through_unknown,
}

_Where = Callable[[_Cycle], tuple[tuple[int, int], tuple[int, int]]]


def _in_decision(cycle: _Cycle) -> tuple[tuple[int, int], tuple[int, int]]:
    first, last = _span(cycle, "in a decision")
    return (first, last), (last, cycle.next)


_SPANS: dict[str, _Where] = {
    "in a decision": _in_decision,
    "after a decision": lambda c: (_span(c, "after a decision"), (c.end, c.next)),
    "in reset": lambda c: (_span(c, "in reset"), ((c.end + c.next) // 2, c.next)),
    "over a decision": lambda c: ((c.begin, c.edge), (c.end, c.next)),
    "until within a decision": lambda c: ((c.begin, c.edge), (c.edge, c.end)),
}
"""When something is lost, and when it is back."""


def _lost(pin: str, level: float | None, where: _Where) -> _Kind:
    def changes(cycle: _Cycle) -> Iterator[Change]:
        yield from _clock(cycle)
        lost, back = where(cycle)
        again = cycle.vdd_v if pin == "vdd" else HIGH
        off = cycle.off_v if level is None else level
        yield Change(time=cycle.share(*lost), pin=pin, level=off)
        yield Change(time=cycle.share(*back), pin=pin, level=again)

    return changes
