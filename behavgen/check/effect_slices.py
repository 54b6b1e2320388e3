"""Which slices a memory, an aperture and an energy must be exercised in."""

from __future__ import annotations

from collections.abc import Callable, Iterator

import numpy as np
import numpy.typing as npt

from behavgen.check.phases import memory_taus_s
from behavgen.check.runs import reference_of
from behavgen.check.slices import PlayedRun, Slice
from behavgen.formulas.memory import LONGEST_RESET_TAUS
from behavgen.model import ComparatorModel
from behavgen.reference import Reference

__all__ = ["aperture_slices", "energy_slices", "memory_slices"]

Mask = npt.NDArray[np.bool_]
Integers = npt.NDArray[np.int64]

_FEW_TICKS = 4


def memory_slices(model: ComparatorModel) -> Iterator[Slice]:
    """Return what was there to remember, for how long, and whether it decided a bit."""
    if model.memory is None:
        return
    group = "memory"
    yield Slice(group, "of a one", 2000, _after(1))
    yield Slice(group, "of a zero", 2000, _after(-1))
    yield Slice(group, "after an unresolved decision", 1000, _after(0))
    yield Slice(group, "decides the bit", 1000, _memory_decides)
    yield Slice(group, f"reset of at most {_FEW_TICKS} ticks", 300, _few_ticks)
    if model.memory.terms:
        yield Slice(group, "reset shorter than every time constant", 1000, _younger(model))
        yield Slice(group, "reset of one to ten time constants", 1000, _aged(model, 1.0, 10.0))
        yield Slice(group, "some of it too old to count", 300,
                    _aged(model, LONGEST_RESET_TAUS, np.inf))  # fmt: skip
    if _reaches_cap(model):
        yield Slice(group, "at its cap", 300, _capped(model.memory.cap_v))


def aperture_slices(model: ComparatorModel) -> Iterator[Slice]:
    """Return how inputs moved around the instant at which they are sampled."""
    group = "input"
    yield Slice(group, "moves after it was sampled", 1500, _disturbed)
    if model.aperture is None:
        return
    yield Slice(group, "moves between edge and sampling", 1500, _late)
    yield Slice(group, "of the edge would decide otherwise", 500, _late_decides)
    yield Slice("decision phase", "ends before the sampling", 100, lambda p: _ends(p) < 0)
    yield Slice("decision phase", "ends at the sampling", 60, lambda p: _ends(p) == 0)
    yield Slice("decision phase", "ends a tick after the sampling", 60, lambda p: _ends(p) == 1)


def energy_slices(model: ComparatorModel) -> Iterator[Slice]:
    """Return of which decisions the energy was compared."""
    if model.energy is None:
        return
    yield Slice("energy", "of resolved decisions", 8000, lambda p: p.expected.resolved)
    yield Slice("energy", "of unresolved decisions", 1000, lambda p: ~p.expected.resolved)


def _after(sign: int) -> Callable[[PlayedRun], Mask]:
    def select(played: PlayedRun) -> Mask:
        trace, resolved = played.stimulus.trace, played.expected.resolved
        signs = np.where(resolved, 2 * trace.leaning - 1, 0)
        found: Mask = np.append(False, signs[:-1] == sign)
        return found & played.run.meant.memory_on

    return select


def _memory_decides(played: PlayedRun) -> Mask:
    trace = played.stimulus.trace
    e = trace.overdrive_v
    changed: Mask = (e > 0.0) != (e + trace.memory_v > 0.0)
    return changed & played.expected.resolved


def _few_ticks(played: PlayedRun) -> Mask:
    reset = played.stimulus.reset
    few: Mask = (reset >= 0) & (reset <= _FEW_TICKS)
    return few & (played.stimulus.trace.memory_v != 0.0)


def _ages(model: ComparatorModel, played: PlayedRun) -> npt.NDArray[np.float64]:
    """Return the reset before each decision in time constants, (K, N); -1: nothing to recall."""
    stimulus, meant = played.stimulus, played.run.meant
    taus = memory_taus_s(
        model, reference_of(model, played.run), vdd=stimulus.vdd_v, vcm=stimulus.vcm_v,
        temp_c=meant.temperature_c, process=meant.process,
    )  # fmt: skip
    ages = np.maximum(stimulus.reset, 0) / model.cell.ticks_per_second / taus
    ages[:, ~(_after(1)(played) | _after(-1)(played))] = -1.0
    return ages


def _younger(model: ComparatorModel) -> Callable[[PlayedRun], Mask]:
    def select(played: PlayedRun) -> Mask:
        ages = _ages(model, played)
        return np.asarray(((ages >= 0.0) & (ages < 1.0)).all(axis=0))

    return select


def _aged(model: ComparatorModel, low: float, high: float) -> Callable[[PlayedRun], Mask]:
    def select(played: PlayedRun) -> Mask:
        ages = _ages(model, played)
        return np.asarray(((ages > low) & (ages < high)).any(axis=0))

    return select


def _capped(cap_v: float) -> Callable[[PlayedRun], Mask]:
    return lambda p: np.abs(p.stimulus.trace.memory_v) == cap_v


def _reaches_cap(model: ComparatorModel) -> bool:
    """Return whether no reset at all would leave more than the cap in the middle of the range."""
    memory = model.memory
    return memory is not None and bool(Reference(model).memory_shift(0.0) == memory.cap_v)


def _disturbed(played: PlayedRun) -> Mask:
    return _moved(played, played.stimulus.edge + _sampling(played), _next_edge(played))


def _late(played: PlayedRun) -> Mask:
    return _moved(played, played.stimulus.edge, played.stimulus.edge + _sampling(played))


def _moved(played: PlayedRun, after: Integers, before: Integers) -> Mask:
    """Return where levels were applied strictly between two moments, beside those of an edge."""
    moments = played.stimulus.levels.moment
    count = np.searchsorted(moments, before, side="left")
    count -= np.searchsorted(moments, after, side="right")
    spare = (before == _next_edge(played)).astype(np.int64)
    moved: Mask = count > spare
    return moved


def _next_edge(played: PlayedRun) -> Integers:
    return np.append(played.stimulus.edge[1:], played.stimulus.finish)


def _sampling(played: PlayedRun) -> Integers:
    return played.stimulus.trace.aperture_ticks


def _late_decides(played: PlayedRun) -> Mask:
    stimulus = played.stimulus
    e = stimulus.trace.overdrive_v
    at_edge = e + ((stimulus.inp_v - stimulus.inn_v) - stimulus.sampled_v)
    changed: Mask = (e > 0.0) != (at_edge > 0.0)
    return changed & played.expected.resolved


def _ends(played: PlayedRun) -> Integers:
    """Return by how many ticks the phase outlasts the sampling; plenty where none waits for it."""
    after = played.stimulus.end - played.stimulus.edge - _sampling(played)
    return np.where(_sampling(played) > 0, after, np.iinfo(np.int64).max)
