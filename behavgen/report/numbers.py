"""Numbers for readers: engineering prefixes, typographic signs, sensible digits."""

from __future__ import annotations

import math

from behavgen.model import Estimate, Range
from behavgen.units import format_celsius, format_si

__all__ = [
    "count_text",
    "estimate_text",
    "interval_text",
    "percent_text",
    "probability_text",
    "range_text",
    "si_text",
    "temperature_text",
    "typographic",
]

_SMALLEST_SHOWN = 1e-24
"""Below the smallest SI prefix in use a number is a zero that was computed."""


def typographic(text: str) -> str:
    """Turn the ASCII of `behavgen.units` into print: minus, micro, degree, no break before units."""
    number, _, unit = text.partition(" ")
    unit = unit.replace("degC", "°C").replace("ohm", "Ω")
    if unit.startswith("u"):
        unit = "µ" + unit[1:]
    return number.replace("-", "\N{MINUS SIGN}") + ("\N{NO-BREAK SPACE}" + unit if unit else "")


def si_text(value: float, unit: str, digits: int = 3) -> str:
    """Write a number with an engineering prefix; `unit` "1" is a pure number.

    >>> si_text(1.51e-9, "s"), si_text(-2e-5, "V"), si_text(0.25, "1")
    ('1.51\\xa0ns', '−20\\xa0µV', '0.25')
    """
    if unit == "K":
        return temperature_text(value)
    if unit == "1" or not unit:
        return typographic(f"{value:.{digits}g}")
    if abs(value) < _SMALLEST_SHOWN:
        value = 0.0
    return typographic(format_si(value, unit, digits))


def temperature_text(temperature_k: float) -> str:
    """Write a temperature in degrees Celsius."""
    return typographic(format_celsius(temperature_k))


def percent_text(ratio: float, digits: int = 2) -> str:
    """Write a ratio in per cent.

    >>> percent_text(0.00912), percent_text(0.123), percent_text(-0.00004)
    ('0.91\\xa0%', '12\\xa0%', '−0.004\\xa0%')
    """
    if not math.isfinite(ratio):
        return "not finite"
    percent = float(f"{100.0 * ratio:.{digits - 1}e}")
    return f"{percent:g}".replace("-", "\N{MINUS SIGN}") + "\N{NO-BREAK SPACE}%"


def probability_text(probability: float) -> str:
    """Write a p-value: two digits, and a bound where the digits mean nothing."""
    return "<\N{NO-BREAK SPACE}0.001" if probability < 0.001 else f"{probability:.2g}"


def count_text(number: int) -> str:
    """Write a count with thin spaces between thousands."""
    return f"{number:,}".replace(",", "\N{NARROW NO-BREAK SPACE}")


def estimate_text(estimate: Estimate, unit: str) -> str:
    """Write an estimate with as many digits as its interval supports."""
    return si_text(estimate.value, unit, _supported_digits(estimate.value, estimate))


def interval_text(estimate: Estimate, unit: str) -> str:
    """Write the interval of an estimate; says so where there is none."""
    if estimate.low is None or estimate.high is None:
        return "no interval"
    ends = (
        si_text(end, unit, _supported_digits(end, estimate))
        for end in (estimate.low, estimate.high)
    )
    return _joined(*ends)


def range_text(span: Range | None, unit: str) -> str:
    """Write a range, the unit once where both ends share it.

    >>> range_text(Range(low=1.62, high=1.98), "V"), range_text(Range(low=1e-6, high=0.3), "V")
    ('1.62 … 1.98\\xa0V', '1\\xa0µV … 300\\xa0mV')
    """
    if span is None:
        return "not characterised"
    if span.low == span.high:
        return si_text(span.low, unit, 4)
    return _joined(si_text(span.low, unit, 4), si_text(span.high, unit, 4))


def _joined(low: str, high: str) -> str:
    number, space, unit = low.partition("\N{NO-BREAK SPACE}")
    shared = space and high.endswith(space + unit)
    return f"{number if shared else low} … {high}"


def _supported_digits(value: float, estimate: Estimate) -> int:
    """Return how many digits of `value` two digits of the interval's half width reach."""
    if estimate.low is None or estimate.high is None:
        return 4
    half = 0.5 * (estimate.high - estimate.low)
    if not (half > 0.0 and math.isfinite(half)) or value == 0.0:
        return 4
    digits = math.floor(math.log10(abs(value))) - math.floor(math.log10(half)) + 2
    return min(max(digits, 2), 6)
