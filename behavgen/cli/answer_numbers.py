"""How probabilities and waiting times are written that may be too small or large for a double."""

from __future__ import annotations

import math
from collections.abc import Callable

from behavgen.cli.wording import estimate_text, interval_text
from behavgen.model import Estimate
from behavgen.units import format_si

__all__ = ["chance_texts", "delay_texts", "power_text", "volts_text", "wait_text", "wait_texts"]

_SECONDS = (("s", 1.0), ("hours", 3600.0), ("days", 86400.0), ("years", 365.25 * 86400.0))
"""A unit of time and its length; the year is the Julian one."""
_UNIVERSE_YEARS = 13.8e9
"""Age of the universe (Planck Collaboration, Astronomy & Astrophysics 641, A6, 2020)."""
_NO_INTERVAL = "interval not known"


def power_text(log10: float) -> str:
    """Write ten to a power.

    >>> power_text(-1.5), power_text(-653.4809), power_text(-4.0001), power_text(-math.inf)
    ('0.0316', '3.30e-654', '1.00e-4', '0')
    """
    if not math.isfinite(log10):
        return "0" if log10 < 0.0 else "infinite"
    if -3.0 <= log10 < 4.0:
        return f"{10.0**log10:.3g}"
    exponent = math.floor(log10)
    mantissa = f"{10.0 ** (log10 - exponent):.2f}"
    return f"1.00e{exponent + 1}" if mantissa == "10.00" else f"{mantissa}e{exponent}"


def wait_text(log10_s: float) -> str:
    """Write a time in the unit that people would use.

    >>> wait_text(-7.0), wait_text(4.0), wait_text(30.0)
    ('100 ns', '2.78 hours', '3.17e22 years')
    """
    unit, length = _SECONDS[0]
    for name, seconds in _SECONDS[1:]:
        if log10_s >= math.log10(2.0 * seconds):
            unit, length = name, seconds
    if unit == "s" and log10_s > -24.0:
        return format_si(10.0**log10_s, "s", 3)
    return f"{power_text(log10_s - math.log10(length))} {unit}"


def volts_text(log10_v: float) -> str:
    """Write a voltage; without a prefix where there is none so small.

    >>> volts_text(-11.92), volts_text(-653.8)
    ('1.2 pV', '1.58e-654 V')
    """
    return f"{power_text(log10_v)} V" if log10_v < -24.0 else format_si(10.0**log10_v, "V", 3)


def chance_texts(found: Estimate) -> tuple[str, str]:
    """Write a probability, given as a decimal logarithm, and its interval."""
    return power_text(found.value), _interval(found, power_text)


def wait_texts(found: Estimate) -> tuple[str, str]:
    """Write a mean time, given as a decimal logarithm in s, and its interval.

    Where it exceeds the age of the universe only a bound is written: the decade
    below the interval.
    """
    log10_year = math.log10(_SECONDS[-1][1])
    if math.isfinite(found.value) and found.value - log10_year > math.log10(_UNIVERSE_YEARS):
        low = found.value if found.low is None else found.low
        return f"> 1e{math.floor(low - log10_year)} years", _interval(found, wait_text)
    return wait_text(found.value), _interval(found, wait_text)


def delay_texts(found: Estimate) -> tuple[str, str]:
    """Write a delay in s and its interval."""
    return estimate_text(found, "s"), interval_text(found, "s") or _NO_INTERVAL


def _interval(found: Estimate, text: Callable[[float], str]) -> str:
    if found.low is None or found.high is None:
        return _NO_INTERVAL
    ends = f"{text(found.low)}..{text(found.high)}"
    decades = found.high - found.low
    width = f"{decades:.1g}" if decades >= 1e-3 else "< 0.001"
    return f"{ends} ({100.0 * found.level:g} %, {width} decades)"
