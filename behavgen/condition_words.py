"""How people write an operating condition; shared by everything that tells of one."""

from __future__ import annotations

from behavgen.model import Condition
from behavgen.units import format_celsius, format_si

__all__ = ["condition_words"]


def condition_words(condition: Condition) -> str:
    """Write a condition: ``ss, 1.62 V, 125 degC, vcm 900 mV``; "" where nothing is said."""
    parts = [condition.process] if condition.process else []
    if condition.vdd_v is not None:
        parts.append(format_si(condition.vdd_v, "V", 4))
    if condition.temperature_k is not None:
        parts.append(format_celsius(condition.temperature_k))
    if condition.vcm_v is not None:
        parts.append(f"vcm {format_si(condition.vcm_v, 'V', 4)}")
    return ", ".join(parts)
