"""The smallest errors that a check would have caught, in words."""

from __future__ import annotations

from behavgen.check.verdict import CheckReport, PowerResult
from behavgen.units import format_si

__all__ = ["power_words"]


def power_words(report: CheckReport) -> list[str]:
    """Return one sentence for each way in which errors are caught; none where nothing is known."""
    sentences = []
    for how in dict.fromkeys(one.how for one in report.power):
        errors = [f"{one.quantity} {_error(one)}" for one in report.power if one.how == how]
        sentences.append(f"{how}, caught with 99 %: {', '.join(errors)}")
    return sentences


def _error(one: PowerResult) -> str:
    """Return an error in its unit; shares in percent."""
    if one.unit == "V":
        return format_si(one.error, "V", 2)
    return f"{one.error:.2g} sigma" if one.unit == "sigma" else f"{100.0 * one.error:.2g} %"
