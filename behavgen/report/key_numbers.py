"""The numbers an engineer asks for first."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from behavgen.bands import Band, Bands
from behavgen.model import ComparatorModel, Condition, Estimate, Parameter
from behavgen.operating_point import evaluate, operating_point
from behavgen.report.numbers import estimate_text, interval_text, percent_text, si_text
from behavgen.report.offset_figures import mismatch_sigma

__all__ = ["KeyNumber", "key_numbers", "middle_numbers"]

_DECADES_V = (1e-7, 1e-6, 1e-5, 1e-4, 1e-3, 1e-2, 1e-1)


@dataclass(frozen=True, slots=True, kw_only=True)
class KeyNumber:
    """One number, what it is and how well it is known; texts that do not apply are empty."""

    name: str
    value: str
    interval: str = ""
    meaning: str = ""


def key_numbers(parameters: Sequence[Parameter]) -> tuple[KeyNumber, ...]:
    """Return the model's own headline; a name given many times is a curve, not a number."""
    names = [p.name for p in parameters]
    return tuple(
        KeyNumber(
            name=p.name,
            value=estimate_text(p.estimate, p.unit),
            interval=_interval_words(p.estimate, p.unit) or "no interval",
            meaning=p.description,
        )
        for p in parameters
        if names.count(p.name) == 1
    )


def middle_numbers(
    model: ComparatorModel, bands: Bands, middle: Condition
) -> tuple[KeyNumber, ...]:
    """Return what the emitted model gives at the middle of the range."""
    return (*_delays(model, bands), *_voltages(model, bands, middle), *_resets(model))


def _delays(model: ComparatorModel, bands: Bands) -> list[KeyNumber]:
    if model.delay is None:
        return []
    tau_s = float(evaluate(model.delay.tau, operating_point(model, (), {}))[0])
    tau = KeyNumber(name="regeneration time constant", value=si_text(tau_s, "s"))
    return [tau] + [
        _banded(f"delay at {si_text(v, 'V')}", bands.delay(v), "s", bands.level)
        for v in _decades_inside(model)
    ]


def _voltages(model: ComparatorModel, bands: Bands, middle: Condition) -> list[KeyNumber]:
    found = []
    if model.offset is not None:
        found.append(_banded("nominal offset", bands.offset(), "V", bands.level))
    spread = mismatch_sigma(model, middle)
    if spread is not None:
        found.append(KeyNumber(name="mismatch sigma", value=si_text(spread, "V")))
    if model.noise is not None:
        found.append(_banded("noise sigma", bands.noise_sigma(), "V", bands.level))
    return found


def _resets(model: ComparatorModel) -> list[KeyNumber]:
    if model.reset is None:
        return []
    value = float(evaluate(model.reset.surface, operating_point(model, (), {}))[0])
    return [KeyNumber(name="reset delay", value=si_text(value, "s"))]


def _banded(name: str, band: Band, unit: str, level: float) -> KeyNumber:
    estimate = Estimate(
        value=float(band.value), low=float(band.low), high=float(band.high), level=level
    )
    return KeyNumber(
        name=name, value=estimate_text(estimate, unit), interval=_interval_words(estimate, unit)
    )


def _interval_words(estimate: Estimate, unit: str) -> str:
    """Write confidence and interval; empty where there is none."""
    if estimate.low is None or estimate.high is None or estimate.low == estimate.high:
        return ""
    return f"{percent_text(estimate.level)}: {interval_text(estimate, unit)}"


def _decades_inside(model: ComparatorModel) -> tuple[float, ...]:
    """Return whole decades of overdrive that the table covers, the largest five of them."""
    span = model.box.overdrive_v
    if span is None:
        return (1e-3,)
    inside = [v for v in _DECADES_V if span.low * 0.999 <= v <= span.high * 1.001]
    return tuple(inside[-5:])
