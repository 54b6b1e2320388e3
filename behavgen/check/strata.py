"""Strata: which slices of the stimulus must be exercised, and how often they were.

A check that passes because it never looked is worth nothing. Every slice
names how many decisions it must have; a short one fails the check.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator

import numpy as np
import numpy.typing as npt

from behavgen.check.aims import BALANCED, LEAST_SWEPT_V, NOISY
from behavgen.check.effect_slices import aperture_slices, energy_slices, memory_slices
from behavgen.check.phases import LEAST_CUT_TICKS
from behavgen.check.runs import FEWEST_DECISIONS, MODES
from behavgen.check.slices import PlayedRun, Slice
from behavgen.check.verdict import Stratum
from behavgen.model import ComparatorModel, Range
from behavgen.operating_point import VOLTAGE_STEPS_PER_V
from behavgen.reference import Reference
from behavgen.units import ZERO_CELSIUS_K, format_si

__all__ = ["count_strata"]

Floats = npt.NDArray[np.float64]
Mask = npt.NDArray[np.bool_]

ALL_DECISIONS = 20_000
_SMALL_V = 1e-5
_BALANCED_V = 1e-6
_CLOSE_TICKS = 60
_OF_ONE_RUN = 3 * FEWEST_DECISIONS // 4
"""Where a single run has to do, however many there are: a few hang on a tick and are left out."""
_OF_ONE_MODE = 200
"""Unresolved decisions: a cell of one process has one run that holds, a quarter unresolved."""


def count_strata(model: ComparatorModel, played: Iterable[PlayedRun]) -> tuple[Stratum, ...]:
    """Count compared decisions and disagreements in every stratum.

    Parameters
    ----------
    model : ComparatorModel
    played : iterable of PlayedRun
    """
    runs = tuple(played)
    return tuple(_counted(one, runs) for one in _slices(model))


def _counted(one: Slice, runs: tuple[PlayedRun, ...]) -> Stratum:
    decisions = disagreements = 0
    for played in runs:
        mask = played.agreement.compared & one.select(played)
        decisions += int(np.count_nonzero(mask))
        if played.agreement.fault.any():
            disagreements += int(np.count_nonzero(mask & (played.agreement.fault != 0)))
    return Stratum(
        group=one.group, name=one.name, required=one.required,
        decisions=decisions, disagreements=disagreements,
    )  # fmt: skip


def _slices(model: ComparatorModel) -> Iterator[Slice]:
    yield Slice("all", "decisions", ALL_DECISIONS, lambda _: True)
    for process in model.processes:
        share = 8000 // len(model.processes)
        yield Slice("process", process.name, share, _in_process(process.name))
    yield from _overdrive_slices(model)
    yield from _noise_slices(model)
    yield from _condition_slices(model)
    yield from _phase_slices(model)
    yield from aperture_slices(model)
    yield from memory_slices(model)
    yield from energy_slices(model)
    yield from _switch_slices(model)


def _overdrive_slices(model: ComparatorModel) -> Iterator[Slice]:
    def between(low: float, high: float) -> Callable[[PlayedRun], Mask]:
        return lambda p: p.agreement.timed & (_magnitude(p) >= low) & (_magnitude(p) < high)

    largest = 0.5 if model.box.overdrive_v is None else model.box.overdrive_v.high
    low = max(LEAST_SWEPT_V, 0.0 if model.delay is None else model.delay.floor_v)
    while low < largest:
        high = 10.0 * low if 30.0 * low <= largest else largest
        name = f"{format_si(low, 'V')} to {format_si(high, 'V')}"
        yield Slice("overdrive with visible delay", name, 100, between(low, high))
        low = high
    yield Slice("overdrive with visible delay", f"above {format_si(largest, 'V')}", 20,
                 between(largest, np.inf))  # fmt: skip
    yield Slice("overdrive", "exactly zero", 100, lambda p: _magnitude(p) == 0.0)
    yield Slice("overdrive", f"below {format_si(_SMALL_V, 'V')}, noise off", 4000,
                 lambda p: _noiseless(model, p) & (_magnitude(p) < _SMALL_V))  # fmt: skip


def _noise_slices(model: ComparatorModel) -> Iterator[Slice]:
    if model.noise is None:
        return
    yield Slice("noise on", "within 10 sigma", 3000,
                 lambda p: np.isin(p.stimulus.aim, (NOISY, BALANCED)))  # fmt: skip
    yield Slice("noise on", f"taken back to below {format_si(_BALANCED_V, 'V')}", 1500, _balanced)
    yield Slice("noise on", "draws beyond 6.7 sigma", 4, lambda p: _first(p) & p.run.balanced)


def _condition_slices(model: ComparatorModel) -> Iterator[Slice]:
    box, off = model.box, model.cell.supply_off_v
    if box.temperature_k is not None:
        yield from _range_slices("temperature", box.temperature_k, 1e-3, _OF_ONE_RUN, _temperature)
    if box.vdd_v is not None and model.cell.pins.vdd is not None:
        for one in _range_slices("supply", box.vdd_v, 0.0, 100, lambda p: p.stimulus.vdd_v):
            if one.name != "below" or off is None or off < box.vdd_v.low:
                yield one
    if box.vcm_v is not None:
        step = 1.0 / VOLTAGE_STEPS_PER_V
        yield from _range_slices("common mode", box.vcm_v, step, 100, lambda p: p.stimulus.vcm_v)


def _range_slices(
    group: str, span: Range, step: float, required: int, value: Callable[[PlayedRun], Floats]
) -> Iterator[Slice]:
    """Return slices of one condition; within `step` of an end it is at the end."""
    low, high = span.low, span.high
    yield Slice(group, "below", required, lambda p: value(p) < low - step)
    yield Slice(group, "at its low end", required, lambda p: np.abs(value(p) - low) <= step)
    if low < high:
        yield Slice(group, "between", required,
                     lambda p: (value(p) > low + step) & (value(p) < high - step))  # fmt: skip
        yield Slice(group, "at its high end", required, lambda p: np.abs(value(p) - high) <= step)
    yield Slice(group, "above", required, lambda p: value(p) > high + step)


def _phase_slices(model: ComparatorModel) -> Iterator[Slice]:
    yield Slice("decision phase", "resolved", 10_000, lambda p: p.expected.resolved)
    if model.delay is not None:
        yield Slice("decision phase", "too short", 2000, _too_short)
        yield Slice("decision phase", "ends close to the ready", 200, _close)
        for mode, name in enumerate(MODES):
            yield Slice("unresolved", name, _OF_ONE_MODE, _unresolved_in(mode))
    yield Slice("unresolved", "forced", _OF_ONE_MODE, _forced)
    yield Slice("reset", "returns", 10_000, lambda p: p.expected.returns)
    reset_ticks = Reference(model).trace(0.0, 0).reset_ticks
    if reset_ticks.min() >= 2 * LEAST_CUT_TICKS:
        yield Slice("reset", "cut off by the next edge", 500, lambda p: ~p.expected.returns)
    yield Slice("reset", "power-up", 10, _first)


def _switch_slices(model: ComparatorModel) -> Iterator[Slice]:
    switches: tuple[tuple[str, Callable[[PlayedRun], bool]], ...] = (
        ("NOISE_ON = 0", lambda p: not p.run.meant.noise_on),
        ("MISMATCH_ON = 1", lambda p: p.run.meant.mismatch_on),
        ("DELAY_ON = 0", lambda p: not p.run.meant.delay_on),
        ("OFFSET_SHIFT_V", lambda p: p.run.meant.offset_shift_v != 0.0),
        ("FORCE_UNRESOLVED_EVERY", lambda p: p.run.meant.force_unresolved_every > 0),
        ("SEED = 0", lambda p: p.run.meant.seed == 0),
        ("plusargs", lambda p: p.run.meant != p.run.given),
    )
    if model.memory is not None:
        switches += (("MEMORY_ON = 0", lambda p: not p.run.meant.memory_on),)
    for name, select in switches:
        yield Slice("switch", name, _OF_ONE_RUN, select)


def _in_process(name: str) -> Callable[[PlayedRun], bool]:
    return lambda p: p.run.meant.process == name


def _balanced(played: PlayedRun) -> Mask:
    taken_back: Mask = played.stimulus.aim == BALANCED
    return taken_back & (_magnitude(played) < _BALANCED_V)


def _magnitude(played: PlayedRun) -> Floats:
    magnitude: Floats = np.abs(played.stimulus.trace.overdrive_v)
    return magnitude


def _temperature(played: PlayedRun) -> Floats:
    kelvin = played.run.meant.temperature_c + ZERO_CELSIUS_K
    return np.full(len(played.stimulus.edge), kelvin)


def _noiseless(model: ComparatorModel, played: PlayedRun) -> bool:
    return model.noise is None or not played.run.meant.noise_on


def _first(played: PlayedRun) -> Mask:
    first: Mask = np.arange(len(played.stimulus.edge)) == 0
    return first


def _phase(played: PlayedRun) -> npt.NDArray[np.int64]:
    return played.stimulus.end - played.stimulus.edge


def _too_short(played: PlayedRun) -> Mask:
    short: Mask = _phase(played) < played.stimulus.trace.delay_ticks
    return short & played.run.meant.delay_on


def _close(played: PlayedRun) -> Mask:
    close: Mask = np.abs(_phase(played) - played.stimulus.trace.delay_ticks) <= _CLOSE_TICKS
    return close & played.run.meant.delay_on


def _unresolved_in(mode: int) -> Callable[[PlayedRun], Mask]:
    return lambda p: ~p.expected.resolved & (p.run.meant.unresolved_mode == mode)


def _forced(played: PlayedRun) -> Mask:
    return ~played.expected.resolved & (played.run.meant.force_unresolved_every > 0)
