"""How the fit speaks of conditions and values in its notices."""

from __future__ import annotations

from behavgen.model import Condition

__all__ = ["condition_words"]

_ZERO_CELSIUS_K = 273.15


def condition_words(condition: Condition) -> str:
    """Return e.g. ``"tt, 1.8 V, 27 C, vcm 0.95 V"``; what the table does not say is left out."""
    parts = [condition.process] if condition.process else []
    if condition.vdd_v is not None:
        parts.append(f"{condition.vdd_v:.4g} V")
    if condition.temperature_k is not None:
        parts.append(f"{condition.temperature_k - _ZERO_CELSIUS_K:.4g} C")
    if condition.vcm_v is not None:
        parts.append(f"vcm {condition.vcm_v:.4g} V")
    return ", ".join(parts) or "all conditions"
