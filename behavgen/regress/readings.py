"""What a model says at the places of a comparison, with its interval at any confidence."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace
from itertools import product
from typing import Any

import numpy as np
import numpy.typing as npt
from scipy.special import chdtri, ndtri

from behavgen.bands import Band, Bands
from behavgen.model import ComparatorModel, Condition, Estimate, Surface
from behavgen.operating_point import OperatingPoint, evaluate, operating_point, surface_terms
from behavgen.reference import Reference
from behavgen.regress.comparison import SIGNED, Place
from behavgen.regress.places import CONDITIONS, effect_surface, s_curve_value
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["at_conditions", "estimate_of", "readings", "without_lack_of_fit"]

Floats = npt.NDArray[np.float64]


def readings(
    model: ComparatorModel, places: Sequence[Place], level: float, *, with_misfit: bool = False
) -> tuple[Estimate, ...]:
    """Return an estimate for each place; without ends where the error is not known.

    Parameters
    ----------
    model : ComparatorModel
    places : sequence of Place
    level : float
        Confidence of the intervals, 0..1.
    with_misfit : bool
        Count by how much the delays of the emitted model miss their own tables.
    """
    found: dict[int, Estimate] = {}
    groups: dict[str, list[int]] = {}
    for index, place in enumerate(places):
        if place.s_curve is None:
            groups.setdefault(place.of, []).append(index)
        else:
            found[index] = _from_s_curve(model, place, level)
    bands = Bands(model, level)
    for of, members in groups.items():
        own = [places[k] for k in members]
        band = _band(bands, of, own)
        if with_misfit and of in ("delay", "tau"):
            band = _with_misfit(band, _misfits(model, of, own, band.value), level)
        for k, value, low, high in zip(members, band.value, band.low, band.high, strict=True):
            found[k] = estimate_of(float(value), float(low), float(high), level)
    return tuple(found[k] for k in range(len(places)))


def without_lack_of_fit(model: ComparatorModel) -> ComparatorModel:
    """Return the model with sampling errors alone.

    Between models over the same conditions lack of fit is no difference: both have it alike.
    """
    if model.delay is None or not model.delay.scatter:
        return model
    return replace(model, delay=replace(model.delay, lack_of_fit=()))


def at_conditions(
    model: ComparatorModel, conditions: Iterable[Condition]
) -> Mapping[str, npt.NDArray[Any]]:
    """Return conditions as keywords of `Reference`; what is open is the middle of the box."""
    listed = list(conditions)
    columns: dict[str, npt.NDArray[Any]] = {}
    for name, key in zip(CONDITIONS, ("vdd", "temp_c", "vcm"), strict=True):
        span = getattr(model.box, name)
        otherwise = 0.0 if span is None else span.middle
        values = [getattr(c, name) for c in listed]
        column = np.array([otherwise if v is None else v for v in values], dtype=float)
        if name != "temperature_k":
            columns[key] = column
        elif span is not None or any(v is not None for v in values):
            columns[key] = column - ZERO_CELSIUS_K
    first = model.processes[0].name
    return {**columns, "process": np.array([c.process or first for c in listed], dtype=np.str_)}


def estimate_of(value: float, low: float, high: float, level: float) -> Estimate:
    """Return an estimate whose ends are None where they are not numbers."""
    if not (np.isfinite(low) and np.isfinite(high)):
        return Estimate(value=value, level=level)
    return Estimate(value=value, low=low, high=high, level=level)


def _from_s_curve(model: ComparatorModel, place: Place, level: float) -> Estimate:
    """Return what an S-curve tells by itself, its interval stretched from its own confidence.

    Ratios of noise sigmas and differences of trip points are taken as normal.
    """
    name = {"offset": "offset_v", "noise": "noise_sigma_v"}[place.of]
    curves = [
        fit
        for fit in model.fits
        if fit.condition == place.condition and s_curve_value(fit, place.of)
    ]
    parameters = curves[place.s_curve or 0].parameters
    own = next(parameter.estimate for parameter in parameters if parameter.name == name)
    if own.low is None or own.high is None:
        return Estimate(value=own.value, level=level)
    stretch = float(ndtri(0.5 + 0.5 * level) / ndtri(0.5 + 0.5 * own.level))
    value, low, high = own.value, own.low, own.high
    if place.of in SIGNED:
        return Estimate(
            value=value,
            low=value - stretch * (value - low),
            high=value + stretch * (high - value),
            level=level,
        )
    if low <= 0.0:
        return Estimate(value=value, level=level)
    return Estimate(
        value=value,
        low=value * (low / value) ** stretch,
        high=value * (high / value) ** stretch,
        level=level,
    )


def _band(bands: Bands, of: str, places: Sequence[Place]) -> Band:
    condition = dict(at_conditions(bands.model, [place.condition for place in places]))
    at = np.array([np.nan if place.at is None else place.at for place in places])
    if of == "delay":
        return _widened(bands.delay(at, **condition), bands, condition)
    if of == "tau":
        return _widened(bands.tau(**condition), bands, condition)
    if of == "mismatch":
        return _mismatch(bands, condition)
    return _of_other(bands, of, places, at, condition)


def _of_other(
    bands: Bands, of: str, places: Sequence[Place], at: Floats, condition: dict[str, Any]
) -> Band:
    reference = Reference(bands.model)
    surface = effect_surface(bands.model, of)
    assert surface is not None
    if of == "memory":
        return _missed(bands, of, places, reference.memory_shift(at, **condition))
    if of == "energy":
        return _missed(bands, of, places, reference.energy(at, **condition))
    return _of_surface(bands, surface, condition)


def _missed(bands: Bands, of: str, places: Sequence[Place], value: Floats) -> Band:
    """Return values that are known as well as the model meets its own table."""
    misfit = _misfits(bands.model, of, places, value)
    half = float(ndtri(0.5 + 0.5 * bands.level)) * np.where(misfit > 0.0, misfit, np.nan)
    return Band(value=value, low=value * np.exp(-half), high=value * np.exp(half))


def _leverage(bands: Bands, point: OperatingPoint) -> Floats:
    effect = bands.model.delay
    assert effect is not None
    terms = surface_terms(effect.tau, point)
    return np.einsum("nt,tu,nu->n", terms, np.array(effect.leverage), terms)


def _widened(band: Band, bands: Bands, condition: dict[str, Any]) -> Band:
    """Add the error of a process's own shift, which the covariance does not carry.

    A process measured at few conditions is the reference process's shape moved to
    meet them: its variance is that of the shape and, at most, that of one condition.
    """
    effect = bands.model.delay
    assert effect is not None
    if not (effect.scatter or effect.lack_of_fit):
        return _without_ends(band.value)
    scaled = {v.process for v in effect.tau.variants if v.scaled_from}
    if not effect.leverage or not scaled:
        return band
    point = operating_point(bands.model, (), condition)
    leverage = np.maximum(_leverage(bands, point), 1e-9).reshape(point.shape)
    moved = np.isin(point.process, sorted(scaled)).reshape(point.shape)
    widening = np.where(moved, np.sqrt((1.0 + leverage) / leverage), 1.0)
    half = widening * np.log(band.high / band.value)
    return Band(value=band.value, low=band.value * np.exp(-half), high=band.value * np.exp(half))


def _with_misfit(band: Band, misfit: Floats, level: float) -> Band:
    """Widen an interval in squares by relative misfits, taken as standard errors."""
    extra = float(ndtri(0.5 + 0.5 * level)) * misfit
    low = np.hypot(np.log(band.value / band.low), extra)
    high = np.hypot(np.log(band.high / band.value), extra)
    return Band(value=band.value, low=band.value * np.exp(-low), high=band.value * np.exp(high))


def _misfits(model: ComparatorModel, of: str, places: Sequence[Place], value: Floats) -> Floats:
    """Return by how much the model misses its table at each place, relative; 0 when unknown.

    The rms error of the condition's rows; of tau the distance to the one that these rows
    give by themselves.
    """
    quantity = "delay" if of == "tau" else of
    fits = {fit.condition: fit for fit in model.fits if fit.quantity == quantity}
    found = np.zeros(len(places))
    for k, place in enumerate(places):
        fit = fits.get(place.condition)
        if fit is None:
            continue
        if of != "tau":
            found[k] = fit.rms_relative or 0.0
            continue
        own = [p.estimate.value for p in fit.parameters if p.name == "tau_s"]
        found[k] = abs(np.log(value[k] / own[0])) if own else 0.0
    return found


def _mismatch(bands: Bands, condition: dict[str, Any]) -> Band:
    """Return the spread between instances with the chi-square interval of a normal sample.

    ``(n - 1) s^2 / sigma^2`` is chi-square with n - 1 degrees of freedom.
    """
    effect = bands.model.mismatch
    assert effect is not None
    point = operating_point(bands.model, (), condition)
    components = [evaluate(component, point) for component in effect.components]
    value = np.sqrt(np.sum(np.square(components), axis=0)).reshape(point.shape)
    freedom = effect.instances - 1
    if freedom < 1:
        return _without_ends(value)
    tail = 0.5 * (1.0 - bands.level)
    low, high = (np.sqrt(freedom / chdtri(freedom, p)) for p in (tail, 1.0 - tail))
    return Band(value=value, low=value * low, high=value * high)


def _of_surface(bands: Bands, surface: Surface, condition: dict[str, Any]) -> Band:
    """Return a surface's values; without ends where it carries no covariance.

    As with delays, a process that is a shape moved has the error of its own shift
    besides: at most that of one condition, for which the reference process's least
    certain corner stands.
    """
    band = bands.surface(surface, **condition)
    if not surface.covariance:
        return _without_ends(band.value)
    scaled = sorted(v.process for v in surface.variants if v.scaled_from)
    if not scaled:
        return band
    log = surface.transform == "log"
    corners = _half(bands.surface(surface, **_corners(bands.model, surface)), log=log)
    moved = np.isin(condition["process"], scaled)
    half = np.hypot(_half(band, log=log), np.where(moved, np.max(corners), 0.0))
    if log:
        return Band(
            value=band.value, low=band.value * np.exp(-half), high=band.value * np.exp(half)
        )
    return Band(value=band.value, low=band.value - half, high=band.value + half)


def _half(band: Band, *, log: bool) -> Floats:
    half: Floats = np.log(band.high / band.value) if log else band.high - band.value
    return half


def _corners(model: ComparatorModel, surface: Surface) -> dict[str, Any]:
    """Return the corners of where the reference process was measured."""
    first = surface.variants[0]
    spans = [getattr(first.box, name) for name in CONDITIONS]
    ends = [(None,) if span is None else (span.low, span.high) for span in spans]
    corners = [
        Condition(process=first.process, vdd_v=vdd, temperature_k=temperature, vcm_v=vcm)
        for vdd, temperature, vcm in product(*ends)
    ]
    return dict(at_conditions(model, corners))


def _without_ends(value: Floats) -> Band:
    nothing = np.full_like(np.asarray(value, dtype=float), np.nan)
    return Band(value=np.asarray(value, dtype=float), low=nothing, high=nothing)
