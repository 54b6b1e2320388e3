"""Min / typ / max of the data sheet: the emitted model over its whole characterised range."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.special import ndtri

from behavgen.bands import Band, Bands
from behavgen.evidence import evidence
from behavgen.model import ComparatorModel, Condition, MismatchEffect, Range
from behavgen.operating_point import evaluate, operating_point
from behavgen.report.conditions import condition_words, middle_condition, reference_keywords
from behavgen.report.numbers import ABSENT, PREFIX, si_text, typographic

__all__ = ["Number", "ParameterRow", "places", "typical_rows"]

Floats = npt.NDArray[np.float64]

_PLACES = 7
"""Along each condition, ends included."""
_DECADES_V = (1e-7, 1e-6, 1e-5, 1e-4, 1e-3, 1e-2, 1e-1)
_MOST_DECADES = 6
_DIGITS = 4


@dataclass(frozen=True, slots=True, kw_only=True)
class Number:
    """A value, its interval and where in the range it is found; empty where there is none."""

    value: str
    interval: str = ""
    where: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class ParameterRow:
    """One parameter in one unit; `low` and `high` are dashes where nothing moves it."""

    name: str
    detail: str
    low: Number
    typical: Number
    high: Number
    unit: str


@dataclass(frozen=True, slots=True, kw_only=True)
class _Quantity:
    """A parameter's name, SI unit and band at conditions given by keyword."""

    name: str
    unit: str
    band: Callable[..., Band]
    detail: str = ""


def places(model: ComparatorModel) -> tuple[Condition, ...]:
    """Return the conditions over which extremes are sought, the middle first."""
    box = model.box
    names = [process.name for process in model.processes] if len(model.processes) > 1 else [""]
    grid = [
        Condition(process=name, vdd_v=vdd, temperature_k=temperature, vcm_v=vcm)
        for name in names
        for vdd in _along(box.vdd_v)
        for temperature in _along(box.temperature_k)
        for vcm in _along(box.vcm_v)
    ]
    return (middle_condition(model), *grid)


def _along(span: Range | None) -> list[float | None]:
    if span is None:
        return [None]
    return list(np.linspace(span.low, span.high, _PLACES if span.high > span.low else 1).tolist())


def typical_rows(model: ComparatorModel, bands: Bands) -> tuple[ParameterRow, ...]:
    """Return a row for each number of the emitted model that has one unit over the range."""
    where = places(model)
    single = [reference_keywords(condition) for condition in where]
    keywords = {name: np.array([one[name] for one in single]) for name in single[0]}
    return tuple(_row(one, one.band(**keywords), where) for one in _quantities(model, bands))


def _quantities(model: ComparatorModel, bands: Bands) -> Iterator[_Quantity]:
    yield from _voltages(model, bands)
    yield from _times(model, bands)
    yield from _charges(model, bands)


def _voltages(model: ComparatorModel, bands: Bands) -> Iterator[_Quantity]:
    if model.offset:
        yield _Quantity(name="Trip point", unit="V", band=bands.offset, detail="nominal instance")
    if model.mismatch:
        yield _Quantity(name="Mismatch", unit="V", band=_spread(model, model.mismatch, bands.level),
                        detail="sigma between instances")  # fmt: skip
    if model.noise:
        yield _Quantity(name="Noise", unit="V", band=bands.noise_sigma,
                        detail="sigma of one decision")  # fmt: skip
    if model.memory:
        shortest = min((x for p in model.points if p.quantity == "memory" for x in p.x),
                       default=0.0)  # fmt: skip
        yield _Quantity(
            name="Memory", unit="V", detail=f"shift after a reset of {si_text(shortest, 's')}",
            band=lambda **at: _exact(bands.reference.memory_shift(shortest, **at)),
        )  # fmt: skip


def _times(model: ComparatorModel, bands: Bands) -> Iterator[_Quantity]:
    if model.delay:
        yield _Quantity(name="Regeneration", unit="s", band=bands.tau, detail="time constant")
        for overdrive_v in _decades(model):
            yield _Quantity(name="Delay", unit="s", band=_delay(bands, overdrive_v),
                            detail=f"at {si_text(overdrive_v, 'V')} overdrive")  # fmt: skip
    if model.reset:
        surface = model.reset.surface
        yield _Quantity(name="Reset delay", unit="s", detail="to the reset state",
                        band=lambda **at: bands.surface(surface, **at))  # fmt: skip
    if model.aperture:
        centre = model.aperture.centre
        yield _Quantity(name="Aperture", unit="s", detail="sampling after the edge",
                        band=lambda **at: bands.surface(centre, **at))  # fmt: skip


def _charges(model: ComparatorModel, bands: Bands) -> Iterator[_Quantity]:
    if model.energy:
        overdrive_v = _decades(model)[-1] if model.delay else 1e-1
        yield _Quantity(
            name="Energy", unit="J", detail=f"of a decision at {si_text(overdrive_v, 'V')}",
            band=lambda **at: _exact(bands.reference.energy(overdrive_v, **at)),
        )  # fmt: skip
    if model.kickback:
        common = model.kickback.common
        yield _Quantity(name="Kickback", unit="C", detail="charge out of either input",
                        band=lambda **at: bands.surface(common, **at))  # fmt: skip


def _delay(bands: Bands, overdrive_v: float) -> Callable[..., Band]:
    return lambda **at: bands.delay(overdrive_v, **at)


def _exact(value: Floats) -> Band:
    return Band(value=value, low=value, high=value)


def _spread(model: ComparatorModel, effect: MismatchEffect, level: float) -> Callable[..., Band]:
    """Return the sigma between instances; its relative standard error is 1 / sqrt(2 (n - 1))."""
    error = float(ndtri(0.5 + 0.5 * level)) / math.sqrt(2.0 * max(effect.instances - 1, 1))

    def band(**at: npt.ArrayLike) -> Band:
        point = operating_point(model, (), at)
        parts = [evaluate(component, point) for component in effect.components]
        sigma = np.sqrt(np.sum(np.square(parts), axis=0)).reshape(point.shape)
        return Band(value=sigma, low=sigma * np.exp(-error), high=sigma * np.exp(error))

    return band


def _decades(model: ComparatorModel) -> tuple[float, ...]:
    span = model.box.overdrive_v or evidence(model).overdrive_v
    if span is None:
        return (1e-3,)
    inside = [v for v in _DECADES_V if span.low * 0.999 <= v <= span.high * 1.001]
    return tuple(inside[-_MOST_DECADES:]) or (span.high,)


def _row(quantity: _Quantity, band: Band, where: tuple[Condition, ...]) -> ParameterRow:
    """Return the middle and the extremes of a band over the places, in one prefix."""
    values = np.broadcast_to(band.value, (len(where),))
    lowest, highest = int(np.argmin(values)), int(np.argmax(values))
    power = _power(float(np.abs(values[[0, lowest, highest]]).max()))
    decimals = _decimals(float(np.abs(values).max()) / 10.0**power)

    def number(index: int, words: str) -> Number:
        value, low, high = (
            float(np.broadcast_to(v, values.shape)[index]) / 10.0**power
            for v in (band.value, band.low, band.high)
        )
        ends = f"{_fixed(low, decimals)} … {_fixed(high, decimals)}" if high > low else ""
        return Number(value=_fixed(value, decimals), interval=ends, where=words)

    moves = values[highest] > values[lowest]
    none = Number(value=ABSENT)
    return ParameterRow(
        name=quantity.name,
        detail=quantity.detail,
        low=number(lowest, condition_words(where[lowest])) if moves else none,
        typical=number(0, ""),
        high=number(highest, condition_words(where[highest])) if moves else none,
        unit=PREFIX[power] + quantity.unit,
    )


def _power(largest: float) -> int:
    if largest == 0.0:
        return 0
    return min(max(3 * math.floor(math.log10(largest) / 3), min(PREFIX)), max(PREFIX))


def _decimals(largest: float) -> int:
    """Return the decimals that give the row's largest number its digits."""
    whole = max(math.floor(math.log10(largest)) + 1, 1) if largest > 0.0 else 1
    return max(_DIGITS - whole, 0)


def _fixed(value: float, decimals: int) -> str:
    return typographic(f"{value:.{decimals}f}")
