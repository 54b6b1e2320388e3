"""Intervals of the numbers that a model carries."""

from __future__ import annotations

from math import inf

from behavgen.model import ConditionFit, Estimate

__all__ = ["estimate_of", "half_of"]


def estimate_of(fit: ConditionFit, name: str) -> Estimate | None:
    """Return one of the numbers fitted at a condition; None where it is not there."""
    return next((p.estimate for p in fit.parameters if p.name == name), None)


def half_of(estimate: Estimate | None) -> float:
    """Return half the width of an interval; infinite where it is missing or has no end."""
    if estimate is None or estimate.low is None or estimate.high is None:
        return inf
    return 0.5 * (estimate.high - estimate.low)
