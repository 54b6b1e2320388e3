"""How far a model's numbers have moved, and whether noise can have moved them.

A difference is held against the joint interval of both values, at a confidence
that takes the number of comparisons into account: over all of them together,
tables drawn anew from the same truth are called moved with no more than the
probability `false_alarms` (C. E. Bonferroni's inequality). Delays tabulated at the same
conditions have their lack of fit in common; where the fits chose different surfaces,
what each misses its own table by stands in for it. The joint interval adds the
two distances in squares, each on its own side (G. Y. Zou, A. Donner, Statistics in
Medicine 27, 2008, 1693-1702), so that skew intervals keep their skew.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence

import numpy as np
from scipy.special import ndtri

from behavgen.limits import DRIFTING, DriftLimit
from behavgen.model import ComparatorModel, Condition, Estimate
from behavgen.regress.comparison import FALSE_ALARMS, SIGNED, Drift, Place, QuantityDrift
from behavgen.regress.places import effect_surface, shared_places
from behavgen.regress.readings import readings, without_lack_of_fit

__all__ = [
    "drifts",
    "fed_by",
    "moved_quantities",
]

_SHOWN_LEVEL = 0.95
_SAME = 1e-6
"""Relative difference that rounding may make: model files hold ten digits, points eight."""

_FED_BY = {
    "offset": ("noise", "delay", "offset"),
    "mismatch": ("offset",),
    "noise": ("noise",),
    "tau": ("delay", "window"),
    "delay": ("delay", "window"),
    "reset_delay": ("reset",),
    "memory": ("memory",),
    "aperture": ("aperture",),
    "energy": ("energy", "delay", "window", "noise", "offset"),
    "kickback": ("kickback",),
}


def drifts(
    old: ComparatorModel,
    new: ComparatorModel,
    limits: Mapping[str, DriftLimit],
    *,
    false_alarms: float = FALSE_ALARMS,
) -> tuple[QuantityDrift, ...]:
    """Compare two models number by number.

    Parameters
    ----------
    old, new : ComparatorModel
    limits : mapping
        Quantity to how far it may move.
    false_alarms : float
        Probability, over all numbers together, with which noise is called a drift.
    """
    places = shared_places(old, new)
    level = 1.0 - false_alarms / max(len(places), 1)
    same_grid, same_form = _same_grid(old, new), _delay_form(old) == _delay_form(new)
    compared = [without_lack_of_fit(model) if same_grid else model for model in (old, new)]
    missed = same_grid and not same_form
    at_level = [readings(model, places, level, with_misfit=missed) for model in compared]
    shown = [readings(model, places, _SHOWN_LEVEL, with_misfit=missed) for model in compared]
    same = {of: fed_by(old, of) == fed_by(new, of) for of in DRIFTING}
    found: dict[str, list[Drift]] = {}
    for place, ours, theirs, *values in zip(places, *at_level, *shown, strict=True):
        drift = _drift(place, (ours, theirs), (values[0], values[1]), same[place.of], limits)
        found.setdefault(place.of, []).append(drift)
    return tuple(
        QuantityDrift(
            of=of,
            drifts=tuple(found.get(of, ())),
            compared=len(found.get(of, ())),
            limit=limits.get(of),
            same_tables=same[of],
            presence=presence,
        )
        for of in DRIFTING
        if (presence := _presence(old, new, of))
    )


def fed_by(model: ComparatorModel, of: str) -> tuple[tuple[str, str], ...]:
    """Return quantity and hash of the tables that a number rests on, sorted."""
    return tuple(sorted((s.quantity, s.sha256) for s in model.sources if s.quantity in _FED_BY[of]))


def _presence(old: ComparatorModel, new: ComparatorModel, of: str) -> str:
    ours, theirs = (effect_surface(model, of) is not None for model in (old, new))
    if ours and theirs:
        return "both"
    return "lost" if ours else "gained" if theirs else ""


def _drift(
    place: Place,
    at_level: tuple[Estimate, Estimate],
    shown: tuple[Estimate, Estimate],
    same_tables: bool,
    limits: Mapping[str, DriftLimit],
) -> Drift:
    old, new = at_level
    half = _joint_half(old, new, plain=place.of in SIGNED)
    moved = _moved(old.value, new.value, plain=place.of in SIGNED)
    level = float(ndtri(0.5 + 0.5 * old.level))
    noise = 0.0 if same_tables or half is None else half
    limit = limits.get(place.of)
    if abs(new.value - old.value) <= _SAME * max(abs(old.value), abs(new.value), _width(old)):
        state = "same"
    elif abs(moved) <= noise:
        state = "within noise"
    elif limit is not None and limit.allows(old.value, new.value):
        state = "within limit"
    else:
        state = "beyond"
    return Drift(
        place=place,
        unit=DRIFTING[place.of],
        old=shown[0],
        new=shown[1],
        errors=moved / (half / level) if half else None,
        detectable=_detectable(old.value, half, plain=place.of in SIGNED),
        state=state,
    )


def _moved(old: float, new: float, *, plain: bool) -> float:
    """Return the difference, or that of the logarithms where both are above zero."""
    return new - old if plain or min(old, new) <= 0.0 else float(np.log(new / old))


def _joint_half(old: Estimate, new: Estimate, *, plain: bool) -> float | None:
    """Return how far noise alone moves the difference at the estimates' confidence."""
    ends = (old.low, old.high, new.low, new.high)
    if any(end is None for end in ends):
        return None
    low, high, new_low, new_high = (float(end) for end in ends if end is not None)
    risen = new.value >= old.value
    up = _moved(old.value, high, plain=plain) if risen else _moved(low, old.value, plain=plain)
    down = (
        _moved(new_low, new.value, plain=plain)
        if risen
        else _moved(new.value, new_high, plain=plain)
    )
    return float(np.hypot(up, down))


def _detectable(old: float, half: float | None, *, plain: bool) -> float | None:
    if half is None:
        return None
    return half if plain else float(old * np.expm1(half))


def _width(estimate: Estimate) -> float:
    if estimate.low is None or estimate.high is None:
        return 0.0
    return estimate.high - estimate.low


def _same_grid(old: ComparatorModel, new: ComparatorModel) -> bool:
    """Tell whether delays were tabulated at the same conditions in both."""
    return _delay_conditions(old) == _delay_conditions(new)


def _delay_form(model: ComparatorModel) -> tuple[object, ...]:
    """Return what of the delay's surfaces was chosen: models that chose alike err alike."""
    if model.delay is None:
        return ()
    tau = model.delay.tau
    shapes = tuple((axis.condition, axis.shape) for axis in tau.axes)
    return model.delay.law, len(model.delay.nodes), shapes, tau.exponents


def _delay_conditions(model: ComparatorModel) -> frozenset[Condition]:
    return frozenset(p.condition for p in model.points if p.quantity == "delay")


def moved_quantities(found: Iterable[QuantityDrift]) -> Sequence[QuantityDrift]:
    """Return those that noise does not explain."""
    return [q for q in found if q.state in ("within limit", "beyond")]
