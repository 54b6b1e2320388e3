"""What a drift does: error rates, delays, windows and waits of the old model and the new."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from math import isnan
from typing import Any

import numpy as np

from behavgen.applied_inputs import Levels, Uniform
from behavgen.bands import Band, Bands
from behavgen.evidence import evidence
from behavgen.model import ComparatorModel, Condition, Estimate
from behavgen.prediction import Prediction, predict
from behavgen.regress.comparison import Consequence
from behavgen.regress.readings import at_conditions, estimate_of
from behavgen.units import format_si

__all__ = ["consequences", "differs"]

_LEVEL = 0.95
_TELLING = 1e-3
"""Relative difference from which on a number is told again."""
_LOG10_E = 0.4343
_OVERDRIVES_V = (1e-4, 1e-3, 1e-2)
"""At which errors and delays are told, as far as they lie inside the tables."""


def consequences(
    old: ComparatorModel, new: ComparatorModel, conditions: Iterable[Condition]
) -> tuple[Consequence, ...]:
    """Return what users decide with at some conditions, as both models have it.

    The resolve time is the longest that the old model's tables know, the clock has it as
    half its period, the span is twice the largest tabulated overdrive.
    """
    found: list[Consequence] = []
    for condition in conditions:
        ours = dict(_numbers(old, old, condition))
        theirs = dict(_numbers(new, old, condition))
        found += [
            Consequence(what=what, unit=unit, condition=condition, old=was, new=theirs[what, unit])
            for (what, unit), was in ours.items()
            if (what, unit) in theirs and differs(was, theirs[what, unit], unit)
        ]
    return tuple(found)


def differs(old: Estimate, new: Estimate, unit: str) -> bool:
    """Tell whether a reader would see a difference."""
    difference = abs(new.value - old.value)
    if unit.startswith("log10"):
        return difference > _TELLING * _LOG10_E
    return difference > _TELLING * abs(old.value)


_Number = tuple[tuple[str, str], Estimate]


def _numbers(
    model: ComparatorModel, setting: ComparatorModel, condition: Condition
) -> Iterator[_Number]:
    """Yield what a model says, at settings that another one's tables give."""
    at = {name: column[0] for name, column in at_conditions(setting, [condition]).items()}
    known = evidence(setting)
    span = known.overdrive_v
    overdrives = [v for v in _OVERDRIVES_V if span is None or span.low <= v <= span.high]
    bands = Bands(model, _LEVEL)
    for overdrive in overdrives:
        words = format_si(overdrive, "V")
        if model.noise is not None:
            found = predict(model, Levels.of(overdrive, from_trip_point=True), **at)
            yield from _estimate(f"error by noise at {words} overdrive", "log10",
                                 found.log10_noise_error)  # fmt: skip
        if model.delay is not None:
            yield from _estimate(f"delay at {words} overdrive", "s", bands.delay(overdrive, **at))
    if model.delay is None or known.resolve_time_s is None:
        return
    resolve_s = known.resolve_time_s
    words = f"after {format_si(resolve_s, 's')}"
    yield from _estimate(f"unresolved window {words}", "V", bands.window(resolve_s, **at))
    yield from _waits(model, 2.0 * (span.high if span else 1e-3), resolve_s, words, at)


def _waits(
    model: ComparatorModel, span_v: float, resolve_s: float, words: str, at: dict[str, Any]
) -> Iterator[_Number]:
    clock_hz = 0.5 / resolve_s
    over = f"over a span of {format_si(span_v, 'V')}"
    found: Prediction = predict(
        model, Uniform(span_v=np.asarray(span_v)), resolve_time_s=resolve_s, clock_hz=clock_hz, **at
    )
    yield from _estimate(f"unresolved {words} {over}", "log10", found.log10_unresolved)
    rate = format_si(clock_hz, "Hz")
    yield from _estimate(f"time between failures {over} with a {rate} clock", "log10 s",
                         found.log10_time_between_failures_s)  # fmt: skip


def _estimate(what: str, unit: str, band: Band | None) -> Iterator[_Number]:
    if band is None:
        return
    value, low, high = (float(a.ravel()[0]) for a in (band.value, band.low, band.high))
    if not isnan(value):
        yield (what, unit), estimate_of(value, low, high, _LEVEL)
