"""Where two models of one cell can be compared: what both have measured.

A number is compared where both tables stand; where none tells its conditions, at the
middle and the corners of the range that both models vouch for.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from itertools import product
from math import ceil, floor, log10

from behavgen.limits import DRIFTING
from behavgen.model import (
    ApertureEffect,
    Box,
    ComparatorModel,
    Condition,
    ConditionFit,
    EnergyEffect,
    KickbackEffect,
    NoiseEffect,
    OffsetEffect,
    Range,
    ResetEffect,
    Surface,
)
from behavgen.regress.comparison import Place

__all__ = [
    "CONDITIONS",
    "common_range",
    "effect_surface",
    "holds",
    "s_curve_value",
    "shared_places",
]

Effect = OffsetEffect | NoiseEffect | ResetEffect | ApertureEffect | EnergyEffect | KickbackEffect

CONDITIONS = ("vdd_v", "temperature_k", "vcm_v")

_TABLES = {
    "offset": ("noise", "offset"),
    "mismatch": ("offset",),
    "noise": ("noise",),
    "tau": ("delay",),
    "delay": ("delay",),
    "reset_delay": ("reset",),
    "memory": ("memory",),
    "aperture": ("aperture",),
    "energy": ("energy",),
    "kickback": ("kickback_common",),
}
"""In the points of which quantity the conditions of a number stand, the first that there is."""

_S_CURVES = {"offset": "offset_v", "noise": "noise_sigma_v"}
"""Numbers that every S-curve tells by itself, and the parameter that holds them."""
_ROUNDING = 1e-6


def shared_places(old: ComparatorModel, new: ComparatorModel) -> tuple[Place, ...]:
    """Return everything that can be compared, quantity by quantity."""
    return tuple(place for of in DRIFTING for place in _places(of, old, new))


def effect_surface(model: ComparatorModel, of: str) -> Surface | None:
    """Return the surface whose range is that of a number; None when not characterised."""
    if of in ("tau", "delay"):
        return model.delay.tau if model.delay else None
    if of == "mismatch":
        return model.mismatch.components[0] if model.mismatch else None
    if of == "memory":
        return _memory_surface(model)
    effects: Mapping[str, tuple[Effect | None, str]] = {
        "offset": (model.offset, "surface"),
        "noise": (model.noise, "surface"),
        "reset_delay": (model.reset, "surface"),
        "aperture": (model.aperture, "centre"),
        "energy": (model.energy, "fixed"),
        "kickback": (model.kickback, "common"),
    }
    effect, field = effects[of]
    surface: Surface | None = getattr(effect, field) if effect is not None else None
    return surface


def s_curve_value(fit: ConditionFit, of: str) -> str:
    """Return the name of the parameter of an S-curve that tells a number; "" for none."""
    names = [parameter.name for parameter in fit.parameters]
    wanted = _S_CURVES.get(of, "")
    return wanted if fit.quantity == "noise" and wanted in names else ""


def _memory_surface(model: ComparatorModel) -> Surface | None:
    if model.memory is None:
        return None
    return model.memory.terms[0].tau if model.memory.terms else model.memory.floor


def _places(of: str, old: ComparatorModel, new: ComparatorModel) -> Iterator[Place]:
    ours, theirs = effect_surface(old, of), effect_surface(new, of)
    if ours is None or theirs is None:
        return
    curves = [*_s_curve_places(of, old, new)]
    if curves:
        yield from curves
        conditions: Iterable[Condition] = _shared_range(old, ours, theirs)[:1]
    else:
        conditions = _tabulated(of, old, new, ours, theirs) or _shared_range(old, ours, theirs)
    for condition in conditions:
        for at in _abscissae(of, old, new):
            yield Place(of=of, condition=condition, at=at)


def _s_curve_places(of: str, old: ComparatorModel, new: ComparatorModel) -> Iterator[Place]:
    def counted(model: ComparatorModel) -> list[tuple[Condition, int]]:
        seen: dict[Condition, int] = {}
        found = []
        for fit in model.fits:
            if s_curve_value(fit, of):
                seen[fit.condition] = seen.get(fit.condition, -1) + 1
                found.append((fit.condition, seen[fit.condition]))
        return found

    known = set(counted(new))
    for condition, number in counted(old):
        if (condition, number) in known:
            yield Place(of=of, condition=condition, s_curve=number)


def _tabulated(
    of: str, old: ComparatorModel, new: ComparatorModel, ours: Surface, theirs: Surface
) -> list[Condition]:
    """Return the conditions in either model's table that both models vouch for."""
    for quantity in _TABLES[of]:
        listed = [
            points.condition
            for model in (old, new)
            for points in model.points
            if points.quantity == quantity
        ]
        found = [
            condition
            for condition in dict.fromkeys(listed)
            if _vouches(ours, old, condition) and _vouches(theirs, new, condition)
        ]
        if found:
            return found
    return []


def _vouches(surface: Surface, model: ComparatorModel, condition: Condition) -> bool:
    process = condition.process or model.processes[0].name
    boxes = [variant.box for variant in surface.variants if variant.process == process]
    return bool(boxes) and all(
        holds(getattr(boxes[0], name), getattr(condition, name)) for name in CONDITIONS
    )


def _shared_range(old: ComparatorModel, ours: Surface, theirs: Surface) -> list[Condition]:
    """Return the middle, then the corners, of what both vouch for, process by process."""
    middles, corners = [], []
    for process in (process.name for process in old.processes):
        pair = [v.box for s in (ours, theirs) for v in s.variants if v.process == process]
        spans = common_range(pair) if len(pair) == 2 else None
        if spans is None:
            continue
        middle = [None if span is None else span.middle for span in spans]
        middles.append(_condition(process, middle))
        ends = ((None,) if s is None else tuple(dict.fromkeys((s.low, s.high))) for s in spans)
        corners += [_condition(process, values) for values in product(*ends)]
    return list(dict.fromkeys([*middles, *corners]))


def common_range(boxes: Sequence[Box]) -> tuple[Range | None, ...] | None:
    """Return the range of each of `CONDITIONS` that lies inside all boxes; None when none does."""
    spans: list[Range | None] = []
    for name in CONDITIONS:
        ranges = [span for box in boxes if (span := getattr(box, name)) is not None]
        if not ranges:
            spans.append(None)
            continue
        low, high = max(r.low for r in ranges), min(r.high for r in ranges)
        if low > high:
            return None
        spans.append(Range(low=low, high=high))
    return tuple(spans)


def holds(span: Range | None, value: float | None) -> bool:
    """Tell whether a value lies in a range, but for rounding; what is open does."""
    if span is None or value is None:
        return True
    slack = _ROUNDING * max(abs(span.low), abs(span.high))
    return span.low - slack <= value <= span.high + slack


def _condition(process: str, values: Iterable[float | None]) -> Condition:
    vdd_v, temperature_k, vcm_v = values
    return Condition(process=process, vdd_v=vdd_v, temperature_k=temperature_k, vcm_v=vcm_v)


def _abscissae(of: str, old: ComparatorModel, new: ComparatorModel) -> tuple[float | None, ...]:
    """Return the overdrives or reset times at which a curve is compared."""
    if of == "delay":
        return _decades(old.box.overdrive_v, new.box.overdrive_v)
    if of == "energy":
        return _decades(*(_tabulated_range(model, "energy") for model in (old, new)))
    if of == "memory":
        return _decades(*(_tabulated_range(model, "memory") for model in (old, new)))
    return (None,)


def _decades(one: Range | None, other: Range | None) -> tuple[float, ...]:
    """Return the powers of ten inside both ranges, the geometric middle where there is none."""
    spans = [span for span in (one, other) if span is not None]
    if not spans:
        return (1e-3,)
    low, high = max(s.low for s in spans), min(s.high for s in spans)
    first, last = ceil(log10(low) - _ROUNDING), floor(log10(high) + _ROUNDING)
    decades = tuple(10.0**k for k in range(first, last + 1))
    return decades or ((low * high) ** 0.5,)


def _tabulated_range(model: ComparatorModel, quantity: str) -> Range | None:
    values = [
        x for points in model.points if points.quantity == quantity for x in points.x if x > 0
    ]
    return Range(low=min(values), high=max(values)) if values else None
