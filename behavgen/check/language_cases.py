"""The decisions on which all emitted languages are compared: few, and spread over the range.

Each case is one instance with noise off and sources of its own, which decides
once or twice; the last of its decisions is compared.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

import numpy as np

from behavgen.formulas.polynomial import quantise
from behavgen.model import ComparatorModel, Range
from behavgen.operating_point import TEMPERATURE_STEPS_PER_K, VOLTAGE_STEPS_PER_V
from behavgen.reference import Reference
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["LanguageCase", "Phase", "language_cases"]

_UNKNOWN = {
    "vdd_v": Range(low=1.0, high=1.0),
    "temperature_k": Range(low=300.15, high=300.15),
    "vcm_v": Range(low=0.5, high=0.5),
    "overdrive_v": Range(low=1e-6, high=0.1),
}
"""Conditions that were not characterised have no influence, and need some value."""
_FIRST_RESET_S = 1e-9
_LEAST_PHASE_S = 1e-9
_STEP_S = 1e-12
"""Phases are multiples of it, so that every language has the same edges."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Phase:
    """One decision: the reset before it, its own length, both in s, and its input in V."""

    reset_s: float
    length_s: float
    vdiff_v: float


@dataclass(frozen=True, slots=True, kw_only=True)
class LanguageCase:
    """One instance at one operating condition.

    Parameters
    ----------
    words : str
        What it is for.
    process : str
    vdd_v, temp_c, vcm_v : float
        On the grid to which the event-driven models round.
    phases : tuple of Phase
        One or two decisions.
    """

    words: str
    process: str
    vdd_v: float
    temp_c: float
    vcm_v: float
    phases: tuple[Phase, ...]

    @property
    def condition(self) -> dict[str, Any]:
        """The condition as `Reference` takes it."""
        return {"vdd": self.vdd_v, "temp_c": self.temp_c, "vcm": self.vcm_v,
                "process": self.process}  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class _Spot:
    process: str
    vdd_v: float
    temp_c: float
    vcm_v: float


def language_cases(model: ComparatorModel) -> tuple[LanguageCase, ...]:
    """Return about a dozen cases, the same for the same model."""
    return tuple(_cases(model, Reference(model, noise=False)))


def _cases(model: ComparatorModel, reference: Reference) -> Iterator[LanguageCase]:
    span = _span(model, "overdrive_v")
    decades = np.geomspace(span.low, span.high, 7).tolist()
    middle = _spot(model, 0.5, 0.5, 0.5)
    for number, overdrive in enumerate(decades):
        yield _single(reference, middle, (-1) ** number * overdrive, "overdrive")
    corners = ((0.0, 0.0, 1.0), (0.0, 1.0, 0.0), (1.0, 1.0, 1.0), (1.0, 0.0, 0.0))
    for number, corner in enumerate(corners):
        spot = _spot(model, *corner)
        yield _single(reference, spot, (-1) ** number * decades[2 + number % 2], "condition")
    for process in model.processes[1:]:
        spot = _spot(model, 0.5, 0.5, 0.5, process.name)
        yield _single(reference, spot, decades[3], "process")
    if model.delay is not None:  # else every decision resolves
        yield _unresolved(reference, middle)
    if model.memory is not None:
        for sign in (1, -1):
            yield _remembering(reference, middle, sign, span.high)


def _spot(model: ComparatorModel, vdd: float, temp: float, vcm: float, process: str = "") -> _Spot:
    """Return the condition at these shares of each range."""
    kelvin = quantise(_at(_span(model, "temperature_k"), temp), TEMPERATURE_STEPS_PER_K)
    return _Spot(
        process=process or model.processes[0].name,
        vdd_v=float(quantise(_at(_span(model, "vdd_v"), vdd), VOLTAGE_STEPS_PER_V)),
        temp_c=float(kelvin) - ZERO_CELSIUS_K,
        vcm_v=float(quantise(_at(_span(model, "vcm_v"), vcm), VOLTAGE_STEPS_PER_V)),
    )


def _span(model: ComparatorModel, condition: str) -> Range:
    span: Range | None = getattr(model.box, condition)
    return span or _UNKNOWN[condition]


def _at(span: Range, share: float) -> float:
    return span.low + share * (span.high - span.low)


def _case(spot: _Spot, words: str, *phases: Phase) -> LanguageCase:
    return LanguageCase(
        words=words, process=spot.process, vdd_v=spot.vdd_v, temp_c=spot.temp_c,
        vcm_v=spot.vcm_v, phases=phases,
    )  # fmt: skip


def _condition(spot: _Spot) -> dict[str, Any]:
    return _case(spot, "").condition


def _single(reference: Reference, spot: _Spot, overdrive_v: float, words: str) -> LanguageCase:
    condition = _condition(spot)
    vdiff = float(reference.offset(**condition)) + overdrive_v
    length_s = _long_enough(reference, overdrive_v, condition)
    phase = Phase(reset_s=_FIRST_RESET_S, length_s=length_s, vdiff_v=vdiff)
    return _case(spot, words, phase)


def _unresolved(reference: Reference, spot: _Spot) -> LanguageCase:
    """Return a balanced decision in half the time that it would need."""
    condition = _condition(spot)
    longest_s = float(np.nan_to_num(reference.delay(0.0, **condition)))
    phase = Phase(
        reset_s=_FIRST_RESET_S, length_s=_rounded(max(0.5 * longest_s, 2 * _STEP_S)),
        vdiff_v=float(reference.offset(**condition)),
    )  # fmt: skip
    return _case(spot, "balanced input", phase)


def _remembering(reference: Reference, spot: _Spot, sign: int, large_v: float) -> LanguageCase:
    """Return a clear decision and after a short reset a weak one against it."""
    condition = _condition(spot)
    offset, reset_s = float(reference.offset(**condition)), _short_reset_s(reference, condition)
    shift = float(reference.memory_shift(reset_s, **condition))
    first = Phase(
        reset_s=_FIRST_RESET_S, length_s=_long_enough(reference, large_v, condition),
        vdiff_v=offset + sign * large_v,
    )  # fmt: skip
    second = Phase(
        reset_s=reset_s, length_s=_long_enough(reference, 2.0 * shift, condition),
        vdiff_v=offset - sign * 3.0 * shift,
    )  # fmt: skip
    return _case(spot, f"memory of a {'one' if sign > 0 else 'zero'}", first, second)


def _short_reset_s(reference: Reference, condition: dict[str, Any]) -> float:
    """Return a reset after which the memory is half of what its shortest tabulated one leaves."""
    points = [p for p in reference.model.points if p.quantity == "memory" and p.x]
    shortest_s = min((min(point.x) for point in points), default=0.0)
    reset_s = max(shortest_s, 1.5 * float(reference.reset_delay(**condition)), 20 * _STEP_S)
    return _rounded(reset_s)


def _long_enough(reference: Reference, overdrive_v: float, condition: dict[str, Any]) -> float:
    delay_s = float(np.nan_to_num(reference.delay(abs(overdrive_v), **condition)))
    return _rounded(max(2.0 * delay_s, _LEAST_PHASE_S))


def _rounded(time_s: float) -> float:
    return round(time_s / _STEP_S) * _STEP_S
