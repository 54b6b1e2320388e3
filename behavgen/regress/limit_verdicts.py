"""Limits that a user sets, judged by a model's numbers and their intervals.

A limit that leaves a condition open holds wherever everything that it rests on was
characterised: it is judged at a grid of five values of each open condition, ends
included, in every process.
It is met where the whole interval lies inside, not met where the whole interval lies
outside at some place, and else not decided by the data. Where the error of a number is
not known, the number itself decides.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from itertools import product
from typing import Any

import numpy as np
import numpy.typing as npt

from behavgen.applied_inputs import Levels, Uniform
from behavgen.bands import Band, Bands
from behavgen.limits import Limit, quantity_words
from behavgen.model import Box, ComparatorModel, Condition, Estimate, Range
from behavgen.prediction import predict
from behavgen.regress.comparison import Place
from behavgen.regress.places import CONDITIONS, common_range, effect_surface, holds
from behavgen.regress.readings import at_conditions, estimate_of, readings
from behavgen.regress.verdict import MET, NOT_MET, UNCHARACTERISED, UNDECIDED, LimitVerdict

__all__ = ["limit_verdicts"]

Floats = npt.NDArray[np.float64]

_LEVEL = 0.95
_GRID = 5
"""Values of each open condition."""
_LN_10 = np.log(10.0)


def limit_verdicts(model: ComparatorModel, limits: Iterable[Limit]) -> tuple[LimitVerdict, ...]:
    """Judge a model by limits, in their order."""
    return tuple(_verdict(model, limit) for limit in limits)


def _verdict(model: ComparatorModel, limit: Limit) -> LimitVerdict:
    used = _used(model, limit)
    if reason := _unknown(model, limit, used):
        return LimitVerdict(limit=limit, state=UNCHARACTERISED, reason=reason)
    conditions = _conditions(model, limit, used)
    if not conditions:
        reason = _outside(model, limit, used)
        return LimitVerdict(limit=limit, state=UNDECIDED, reason=reason)
    band = _band(model, limit, conditions)
    estimates = [
        estimate_of(float(v), float(low), float(high), _LEVEL)
        for v, low, high in zip(band.value, band.low, band.high, strict=True)
    ]
    states = [_state(estimate, limit) for estimate in estimates]
    state = next(s for s in (NOT_MET, UNDECIDED, MET) if s in states)
    deciding = [k for k, one in enumerate(states) if one == state]
    worst = max(deciding, key=lambda k: _excess(estimates[k], limit))
    return LimitVerdict(
        limit=limit, state=state, estimate=estimates[worst], condition=conditions[worst]
    )


def _used(model: ComparatorModel, limit: Limit) -> list[str]:
    """Return the characterised numbers that a limited one rests on, the first of all needed."""
    if limit.of == "offset":
        return ["offset", "mismatch"] if limit.sigmas else ["offset"]
    if limit.of == "window":
        return ["delay"]
    if limit.of not in ("error", "time_between_failures"):
        return [limit.of]
    timed = limit.resolve_time_s is not None or limit.clock_hz is not None
    first = "noise" if limit.of == "error" else "delay"
    others = ["noise", "delay"] if timed else ["noise"]
    others += ["offset"] if limit.input_v is not None else []
    return [first, *(o for o in others if o != first and effect_surface(model, o) is not None)]


def _unknown(model: ComparatorModel, limit: Limit, used: Sequence[str]) -> str:
    """Return why a model cannot tell a number; "" when it can."""
    for of in used:
        if effect_surface(model, of) is None:
            return f"no {quantity_words(of)}"
    if limit.process and limit.process not in {process.name for process in model.processes}:
        return f"no process {limit.process}"
    return ""


def _conditions(model: ComparatorModel, limit: Limit, used: Sequence[str]) -> list[Condition]:
    """Return all conditions at which a limit must hold: where all that is used was measured."""
    found = []
    for process in (process.name for process in model.processes):
        if limit.process not in ("", process):
            continue
        spans = common_range(_boxes(model, process, used))
        fixed = [getattr(limit, name) for name in CONDITIONS]
        if spans is None or not all(map(holds, spans, fixed)):
            continue
        axes = [_values(value, span) for value, span in zip(fixed, spans, strict=True)]
        found += [
            Condition(process=process, vdd_v=vdd, temperature_k=temperature, vcm_v=vcm)
            for vdd, temperature, vcm in product(*axes)
        ]
    return found


def _boxes(model: ComparatorModel, process: str, used: Sequence[str]) -> list[Box]:
    surfaces = [effect_surface(model, of) for of in used]
    return [surface.variant(process).box for surface in surfaces if surface is not None]


def _outside(model: ComparatorModel, limit: Limit, used: Sequence[str]) -> str:
    """Say why there is no condition at which a limit could be judged."""
    names = " and ".join(quantity_words(of) for of in used)
    process = limit.process or model.processes[0].name
    if common_range(_boxes(model, process, used)) is None:
        return f"{names} were nowhere measured together"
    return f"outside the range in which {names} is characterised, where numbers predict nothing"


def _values(fixed: float | None, span: Range | None) -> Sequence[float | None]:
    if fixed is not None:
        return (fixed,)
    if span is None:
        return (None,)
    return [float(v) for v in np.unique(np.linspace(span.low, span.high, _GRID))]


def _band(model: ComparatorModel, limit: Limit, conditions: list[Condition]) -> Band:
    at = dict(at_conditions(model, conditions))
    bands = Bands(model, _LEVEL)
    if limit.of == "offset":
        return _offset(model, bands.offset(**at), limit, conditions)
    if limit.of == "window":
        return bands.window(np.full(len(conditions), limit.resolve_time_s), **at)
    if limit.of in ("error", "time_between_failures"):
        return _predicted(model, limit, at, len(conditions))
    abscissa = limit.reset_time_s if limit.of == "memory" else limit.overdrive_v
    return _read(model, limit.of, conditions, abscissa)


def _read(
    model: ComparatorModel, of: str, conditions: list[Condition], at: float | None = None
) -> Band:
    places = [Place(of=of, condition=condition, at=at) for condition in conditions]
    found = readings(model, places, _LEVEL)
    ends = [(e.low, e.high) for e in found]
    return Band(
        value=np.array([estimate.value for estimate in found]),
        low=np.array([np.nan if low is None else low for low, _ in ends]),
        high=np.array([np.nan if high is None else high for _, high in ends]),
    )


def _offset(
    model: ComparatorModel, nominal: Band, limit: Limit, conditions: list[Condition]
) -> Band:
    """Return the largest distance from 0 V of instances within so many sigmas of mismatch.

    The errors of trip point and spread come from different tables and add in squares.
    """
    value = np.abs(nominal.value)
    half = np.abs(nominal.high - nominal.value)
    if not limit.sigmas:
        return Band(value=value, low=np.maximum(value - half, 0.0), high=value + half)
    spread = _read(model, "mismatch", conditions)
    k = limit.sigmas
    total = value + k * spread.value
    return Band(
        value=total,
        low=total - np.hypot(np.minimum(half, value), k * (spread.value - spread.low)),
        high=total + np.hypot(half, k * (spread.high - spread.value)),
    )


def _predicted(model: ComparatorModel, limit: Limit, at: dict[str, Any], count: int) -> Band:
    resolve_s = limit.resolve_time_s
    if resolve_s is None and limit.clock_hz is not None:
        resolve_s = 0.5 / limit.clock_hz
    found = predict(
        model, _inputs(limit, count), resolve_time_s=resolve_s, clock_hz=limit.clock_hz, **at
    )
    log10 = found.log10_error if limit.of == "error" else found.log10_time_between_failures_s
    if log10 is None:
        log10 = found.log10_noise_error
    assert log10 is not None
    with np.errstate(over="ignore"):
        return Band(
            value=np.exp(_LN_10 * log10.value),
            low=np.exp(_LN_10 * log10.low),
            high=np.exp(_LN_10 * log10.high),
        )


def _inputs(limit: Limit, count: int) -> Levels | Uniform:
    if limit.span_v is not None:
        return Uniform(span_v=np.full(count, limit.span_v))
    value = limit.input_v if limit.overdrive_v is None else limit.overdrive_v
    return Levels.of(
        np.full(count, 0.0 if value is None else value),
        right_bit=1 if value == 0.0 else None,
        from_trip_point=limit.overdrive_v is not None,
    )


def _state(estimate: Estimate, limit: Limit) -> str:
    value = estimate.value
    low = value if estimate.low is None else estimate.low
    high = value if estimate.high is None else estimate.high
    below = float("inf") if limit.below is None else limit.below
    above = -float("inf") if limit.above is None else limit.above
    if low > below or high < above:
        return NOT_MET
    return MET if high <= below and low >= above else UNDECIDED


def _excess(estimate: Estimate, limit: Limit) -> float:
    """Return how far an estimate is towards or beyond its bound, relative to it."""
    found = []
    if limit.below is not None:
        end = estimate.value if estimate.high is None else estimate.high
        found.append((end - limit.below) / (abs(limit.below) or 1.0))
    if limit.above is not None:
        end = estimate.value if estimate.low is None else estimate.low
        found.append((limit.above - end) / (abs(limit.above) or 1.0))
    return max(found)
