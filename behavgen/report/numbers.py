"""Numbers for readers: engineering prefixes, typographic signs, sensible digits."""

from __future__ import annotations

import math

from behavgen.model import Estimate, Range
from behavgen.units import SI_PREFIXES, format_celsius, format_si

__all__ = [
    "ABSENT",
    "PREFIX",
    "SIGMA",
    "count_text",
    "estimate_text",
    "interval_text",
    "percent_text",
    "probability_text",
    "range_text",
    "si_text",
    "temperature_text",
    "typographic",
    "volts_range_text",
    "volts_text",
]

ABSENT = "\N{EN DASH}"
"""Stands where a table has nothing to say."""
SIGMA = "\N{GREEK SMALL LETTER SIGMA}"
PREFIX = {power: text for text, power in SI_PREFIXES.items() if text.isascii()} | {0: "", -6: "µ"}
"""Power of ten to the prefix in print."""

_SMALLEST_SHOWN = 1e-24
"""Below the smallest SI prefix in use a number is a zero that was computed."""


def typographic(text: str) -> str:
    """Turn the ASCII of `behavgen.units` into print: minus, micro, degree, unbroken units."""
    number, _, unit = text.partition(" ")
    unit = unit.replace("degC", "°C").replace("ohm", "Ω")
    if unit.startswith("u"):
        unit = "µ" + unit[1:]
    return number.replace("-", "\N{MINUS SIGN}") + ("\N{NO-BREAK SPACE}" + unit if unit else "")


def si_text(value: float, unit: str, digits: int = 3) -> str:
    r"""Write a number with an engineering prefix; `unit` "1" is a pure number.

    >>> si_text(1.51e-9, "s"), si_text(-2e-5, "V"), si_text(0.25, "1")
    ('1.51\xa0ns', '−20\xa0µV', '0.25')
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


def volts_text(volts: float) -> str:
    r"""Write a supply or common mode: in V as people say them, unless they are tiny.

    >>> volts_text(0.95), volts_text(1.8), volts_text(0.02)
    ('0.95\xa0V', '1.8\xa0V', '20\xa0mV')
    """
    if abs(volts) < 0.1:
        return si_text(volts, "V", 4)
    return typographic(f"{volts:.4g} V")


def percent_text(ratio: float, digits: int = 2) -> str:
    r"""Write a ratio in per cent with significant digits.

    >>> percent_text(0.00912), percent_text(0.123), percent_text(-0.00004)
    ('0.91\xa0%', '12\xa0%', '−0.0040\xa0%')
    """
    if not math.isfinite(ratio):
        return "not finite"
    percent = 100.0 * ratio
    return typographic(f"{percent:.{_decimals(percent, digits)}f} %")


def probability_text(probability: float) -> str:
    """Write a p-value: two digits, and a bound where the digits mean nothing."""
    return "<\N{NO-BREAK SPACE}0.001" if probability < 0.001 else f"{probability:.2g}"


def count_text(number: int) -> str:
    """Write a count with thin spaces between thousands."""
    return f"{number:,}".replace(",", "\N{NARROW NO-BREAK SPACE}")


def estimate_text(estimate: Estimate, unit: str) -> str:
    """Write an estimate with as many digits as its interval supports."""
    if not _has_interval(estimate):
        return si_text(estimate.value, unit)
    return _fixed(estimate.value, unit, estimate)


def interval_text(estimate: Estimate, unit: str) -> str:
    r"""Write the interval of an estimate; says so where there is none.

    >>> interval_text(Estimate(value=20e-12, low=19.8e-12, high=20.3e-12), "s")
    '19.80 … 20.30\xa0ps'
    """
    if estimate.low is None or estimate.high is None:
        return "no interval"
    if not _has_interval(estimate):
        return _joined(si_text(estimate.low, unit), si_text(estimate.high, unit))
    return _joined(*(_fixed(end, unit, estimate) for end in (estimate.low, estimate.high)))


def range_text(span: Range | None, unit: str) -> str:
    r"""Write a range, the unit once where both ends share it.

    >>> range_text(Range(low=1.62, high=1.98), "V"), range_text(Range(low=1e-6, high=0.3), "V")
    ('1.62 … 1.98\xa0V', '1\xa0µV … 300\xa0mV')
    """
    if span is None:
        return "not characterised"
    if span.low == span.high:
        return si_text(span.low, unit)
    return _joined(si_text(span.low, unit), si_text(span.high, unit))


def volts_range_text(span: Range) -> str:
    """Write a range of supplies or common modes."""
    if span.low == span.high:
        return volts_text(span.low)
    return _joined(volts_text(span.low), volts_text(span.high))


def _joined(low: str, high: str) -> str:
    number, space, unit = low.partition("\N{NO-BREAK SPACE}")
    shared = space and high.endswith(space + unit)
    return f"{number if shared else low} … {high}"


def _has_interval(estimate: Estimate) -> bool:
    if estimate.low is None or estimate.high is None:
        return False
    return estimate.high > estimate.low and math.isfinite(estimate.high - estimate.low)


def _fixed(value: float, unit: str, estimate: Estimate) -> str:
    """Write a value in the estimate's prefix with two digits of the interval's half width."""
    half = 0.5 * ((estimate.high or 0.0) - (estimate.low or 0.0))
    power = 0
    if unit not in ("1", "K", ""):
        largest = max(abs(estimate.value), half)
        power = min(max(3 * math.floor(math.log10(largest) / 3), min(PREFIX)), max(PREFIX))
    decimals = min(_decimals(half / 10.0**power, 2), 4)
    symbol = "" if unit == "1" else PREFIX[power] + unit
    return typographic(f"{value / 10.0**power:.{decimals}f} {symbol}".strip())


def _decimals(value: float, digits: int) -> int:
    """Return the decimals that show `digits` significant digits of a value."""
    if value == 0.0:
        return 0
    exponent = int(f"{value:.{digits - 1}e}".partition("e")[2])
    return max(0, digits - 1 - exponent)
