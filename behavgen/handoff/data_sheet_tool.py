"""The data sheet's calculator: the controls it offers and the model that its script computes with.

The script (`templates/handoff/data_sheet_*.js`) is written from the same formulas as
`behavgen.prediction`; a test holds one against the other in a browser.
"""

from __future__ import annotations

import json
import math
from dataclasses import dataclass
from typing import Any

from scipy.special import ndtri, stdtrit

from behavgen.evidence import Evidence, evidence
from behavgen.model import Box, ComparatorModel, DelayEffect, Range, Surface, significant
from behavgen.reference import Reference
from behavgen.report.numbers import range_text, si_text, volts_range_text
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["LEVEL", "Control", "Tool", "calculator"]

LEVEL = 0.95
"""Confidence of every interval of the data sheet."""
_UNKNOWN_OVERDRIVES = Range(low=1e-6, high=1.0)
"""In V; offered where a model says nothing of its overdrives."""
_STARTING_SIGMAS = 6.0
"""Of noise: the overdrive that the calculator starts with."""
_STARTING_DELAYS = 2.0
"""Of those at a microvolt: the time given to resolve that it starts with."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Control:
    """A number that the reader chooses, in the unit that its label shows.

    Parameters
    ----------
    name, label, unit : str
    scale : float
        SI units in one of `unit`.
    low, high, value, step : float
        Ends, start and step of the number.
    logarithmic : bool
        The slider moves along decades.
    words : str
        What of the range was characterised.
    """

    name: str
    label: str
    unit: str
    scale: float
    low: float
    high: float
    value: float
    step: float
    logarithmic: bool
    words: str

    @property
    def fixed(self) -> bool:
        """Whether there is nothing to choose: one place was characterised."""
        return self.low == self.high

    @property
    def slider(self) -> Range:
        """Ends of the slider: the numbers themselves, or their decimal logarithms."""
        if not self.logarithmic:
            return Range(low=self.low, high=self.high)
        return Range(low=math.log10(self.low), high=math.log10(self.high))

    @property
    def slider_value(self) -> float:
        """Where the slider starts."""
        return math.log10(self.value) if self.logarithmic else self.value


@dataclass(frozen=True, slots=True, kw_only=True)
class Tool:
    """What the template needs to draw the calculator.

    Parameters
    ----------
    conditions : tuple of Control
    overdrive, span : Control
        The two kinds of input.
    times : tuple of Control
        Time to resolve and clock rate; none without a delay.
    processes : tuple of str
    noise, delay : bool
        Whether the model has them.
    model : str
        The model for the script, JSON that can stand inside HTML.
    """

    conditions: tuple[Control, ...]
    overdrive: Control
    span: Control
    times: tuple[Control, ...]
    processes: tuple[str, ...]
    noise: bool
    delay: bool
    model: str

    @property
    def controls(self) -> tuple[Control, ...]:
        """All controls in the order of the page."""
        return (*self.conditions, self.overdrive, self.span, *self.times)


def calculator(model: ComparatorModel) -> Tool | None:
    """Return the calculator; None for a model with neither noise nor delay to ask about."""
    if model.noise is None and model.delay is None:
        return None
    known = evidence(model)
    overdrives_v = model.box.overdrive_v or known.overdrive_v
    return Tool(
        conditions=_condition_controls(model),
        overdrive=_overdrive_control(model, overdrives_v),
        span=_span_control(overdrives_v),
        times=_time_controls(model, known) if model.delay else (),
        processes=tuple(process.name for process in model.processes),
        noise=model.noise is not None,
        delay=model.delay is not None,
        model=_embedded(model, known),
    )


def _condition_controls(model: ComparatorModel) -> tuple[Control, ...]:
    box = model.box
    found = (
        _condition("vdd", "Supply", "V", box.vdd_v, 0.0),
        _condition("temp_c", "Temperature", "°C", box.temperature_k, ZERO_CELSIUS_K),
        _condition("vcm", "Common mode", "V", box.vcm_v, 0.0),
    )
    return tuple(control for control in found if control is not None)


def _condition(name: str, label: str, unit: str, span: Range | None, zero: float) -> Control | None:
    if span is None:
        return None
    words = range_text(span, "K") if unit == "°C" else volts_range_text(span)
    return Control(
        name=name, label=label, unit=unit, scale=1.0,
        low=round(span.low - zero, 6), high=round(span.high - zero, 6),
        value=round(span.middle - zero, 6), step=1.0 if unit == "°C" else 0.01,
        logarithmic=False, words=f"characterised {words}",
    )  # fmt: skip


def _overdrive_control(model: ComparatorModel, known: Range | None) -> Control:
    sigma_v = float(Reference(model).noise_sigma())
    start_v = _STARTING_SIGMAS * sigma_v if sigma_v > 0.0 else 1e-3
    span = known or _UNKNOWN_OVERDRIVES
    words = f"characterised {range_text(span, 'V')}" if known else "not characterised"
    return _decades("overdrive", "Overdrive", "mV", 1e-3, span, start_v, words)


def _span_control(known: Range | None) -> Control:
    span = known or _UNKNOWN_OVERDRIVES
    both_ways = Range(low=2.0 * span.low, high=2.0 * span.high)
    words = f"characterised to ±{si_text(span.high, 'V')}" if known else "not characterised"
    return _decades("span", "Span", "mV", 1e-3, both_ways, both_ways.high, words)


def _time_controls(model: ComparatorModel, known: Evidence) -> tuple[Control, ...]:
    delays_s = Reference(model).delay([_largest(model), 1e-6])
    fastest, usual = float(delays_s[0]), float(delays_s[1])
    longest = known.resolve_time_s or usual
    words = f"tables reach {si_text(longest, 's')}, beyond it exponential regeneration"
    span = Range(low=0.1 * fastest, high=100.0 * longest)
    start_s = _STARTING_DELAYS * usual
    resolve = _decades("resolve", "Time given to resolve", "ps", 1e-12, span, start_s, words)
    clock_hz = 0.5 / (resolve.value * resolve.scale)
    clock = _decades("clock", "Clock rate", "MHz", 1e6, Range(low=1e3, high=1e11), clock_hz,
                     "any; it only scales the mean time between failures")  # fmt: skip
    return resolve, clock


def _largest(model: ComparatorModel) -> float:
    assert model.delay is not None
    return model.delay.node_overdrive_v[-1]


def _decades(
    name: str, label: str, unit: str, scale: float, span: Range, start: float, words: str
) -> Control:
    """Return a control over decades; ends are rounded inwards by no more than a millionth."""
    low, high = significant(span.low / scale, 6), significant(span.high / scale, 6)
    value = min(max(_round_number(start / scale), low), high)
    return Control(name=name, label=label, unit=unit, scale=scale, low=low, high=high, value=value,
                   step=1.0, logarithmic=True, words=words)  # fmt: skip


def _round_number(value: float) -> float:
    """Return the largest of 1, 2 and 5 times a power of ten that is not above a value."""
    decade = 10.0 ** math.floor(math.log10(value))
    factor = max(f for f in (1.0, 2.0, 5.0) if f * decade <= value * (1.0 + 1e-9))
    return significant(factor * decade)


def _embedded(model: ComparatorModel, known: Evidence) -> str:
    """Return what the script computes with: surfaces and covariances, no table and no file."""
    smallest = known.overdrive_v or model.box.overdrive_v
    data = {
        "level": LEVEL,
        "quantiles": _quantiles(model.delay),
        "offset": _surface(model.offset.surface) if model.offset else None,
        "noise": _surface(model.noise.surface) if model.noise else None,
        "delay": _delay(model.delay) if model.delay else None,
        "evidence": {
            "sigmas": known.sigmas,
            "overdrive_v": smallest.low if smallest else None,
            "resolve_s": known.resolve_time_s,
        },
    }
    text = json.dumps(data, sort_keys=True, separators=(",", ":"), allow_nan=False)
    # Inside a script element only a tag could end the data.
    return text.replace("<", "\\u003c").replace(">", "\\u003e").replace("&", "\\u0026")


def _quantiles(delay: DelayEffect | None) -> dict[str, float]:
    """Return how many standard errors an interval reaches to either side."""
    freedom = max(delay.scatter_freedom, 1) if delay else 1
    upper = 0.5 + 0.5 * LEVEL
    return {"normal": float(ndtri(upper)), "student": float(stdtrit(freedom, upper))}


def _delay(effect: DelayEffect) -> dict[str, Any]:
    return {
        "tau": _surface(effect.tau),
        "nodes": [_surface(node) for node in effect.nodes],
        "node_overdrive_v": effect.node_overdrive_v,
        "floor_v": effect.floor_v,
        "scatter": effect.scatter,
        "lack_of_fit": effect.lack_of_fit,
        "leverage": effect.leverage,
    }


def _surface(surface: Surface) -> dict[str, Any]:
    return {
        "transform": surface.transform,
        "axes": [
            {"condition": axis.condition, "shape": axis.shape, "centre": axis.centre,
             "half_range": axis.half_range}
            for axis in surface.axes
        ],
        "exponents": surface.exponents,
        "covariance": surface.covariance,
        "variants": {
            variant.process: {
                "coefficients": variant.coefficients,
                "box": _box(variant.box),
            }
            for variant in surface.variants
        },
    }  # fmt: skip


def _box(box: Box) -> dict[str, tuple[float, float]]:
    spans = (("vdd_v", box.vdd_v), ("temperature_k", box.temperature_k), ("vcm_v", box.vcm_v))
    return {name: (span.low, span.high) for name, span in spans if span is not None}
