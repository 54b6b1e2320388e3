"""How the results of a comparison are written; ASCII."""

from __future__ import annotations

import math

from behavgen.condition_words import condition_words
from behavgen.limits import quantity_words, value_words
from behavgen.model import Estimate
from behavgen.regress.comparison import Drift
from behavgen.units import format_si

__all__ = [
    "drift_words",
    "estimate_words",
    "number_words",
    "place_words",
    "share_words",
]


def number_words(value: float, unit: str) -> str:
    """Write a number; ``log10`` and ``log10 s`` are decimal logarithms of what is written.

    >>> number_words(-1.5, "log10"), number_words(-653.48, "log10"), number_words(9.5, "log10 s")
    ('0.0316', '3.3e-654', '100.2 years')
    """
    if not unit.startswith("log10"):
        return value_words(value, unit)
    own = unit.removeprefix("log10").strip()
    if own and -3.0 < value < 15.0:
        return value_words(10.0**value, own)
    if not math.isfinite(value):
        return "0" if value < 0.0 else "for ever"
    if -4.0 < value <= 0.0:
        return f"{10.0**value:.3g}"
    power = math.floor(value)
    text = f"{10.0 ** (value - power):.2g}e{power}"
    return f"{text} {own}".rstrip()


def estimate_words(estimate: Estimate, unit: str) -> str:
    """Write an estimate with its interval: ``158 ps (157 ps..159 ps)``."""
    text = number_words(estimate.value, unit)
    if estimate.low is None or estimate.high is None:
        return text
    low, high = (number_words(end, unit) for end in (estimate.low, estimate.high))
    return f"{text} ({low}..{high})"


def share_words(share: float) -> str:
    """Write a relative difference: ``+3 %``."""
    return f"{float(f'{100.0 * share:.1e}'):+g} %"


def place_words(drift: Drift) -> str:
    """Write where a number is compared: ``delay at 1 mV in ss, 1.62 V``."""
    place = drift.place
    words = quantity_words(place.of)
    if place.at is not None:
        what = "of reset" if place.of == "memory" else "overdrive"
        words += f" {'after' if place.of == 'memory' else 'at'} "
        words += f"{format_si(place.at, 's' if place.of == 'memory' else 'V')} {what}"
    where = condition_words(place.condition)
    return f"{words} in {where}" if where else words


def drift_words(drift: Drift) -> str:
    """Write how far one number has moved, in units and in joint standard errors."""
    share = drift.share
    moved = share_words(share) if share is not None else _signed(drift.difference, drift.unit)
    errors = "error not known" if drift.errors is None else f"{drift.errors:+.1f} joint errors"
    old, new = (estimate_words(estimate, drift.unit) for estimate in (drift.old, drift.new))
    return f"{place_words(drift)}: {moved} ({errors}), {old} -> {new}"


def _signed(value: float, unit: str) -> str:
    return f"{'+' if value >= 0.0 else ''}{format_si(value, unit)}"
