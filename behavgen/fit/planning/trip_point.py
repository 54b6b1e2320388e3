"""How to find a trip point that is known only roughly, before an S-curve is planned around it.

Halving an interval takes one decision a step and needs no more than the sign of the
overdrive; a short sweep around what it finds then tells offset and sigma well
enough to place levels.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import ceil, floor, log2, log10

import numpy as np

from behavgen.fit.intervals import normal_quantile
from behavgen.fit.planning.s_curve import KnownSCurve, expected_halves

__all__ = ["PlannedSearch", "find_trip_point"]

_WIDE_ENOUGH_Z = 4.0
"""Standard errors of the guess between which the search begins: it misses 6 in 100 000."""

_SWEEP_Z = np.linspace(-3.0, 3.0, 9)
"""Levels of the sweep, in guessed sigmas: they serve for a sigma from 0.4 to 2 times the guess."""

_SWEEP_TRIALS = 40

_ERROR_AFTER_HALVING_Z = 0.5
"""Standard error, in sigmas, of a trip point found by noisy decisions down to one sigma."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PlannedSearch:
    """Halve an interval, then sweep around what was found.

    Parameters
    ----------
    low_v, high_v : float
        Ends of the interval to halve, V.
    halvings : int
        Decisions that this takes; 0 where the guess is near enough to sweep around.
    sweep_v : tuple of float
        Levels of the sweep from the trip point found, V.
    trials : int
        Decisions at each level of the sweep.
    found : KnownSCurve
        What is known afterwards; the offset is still the guess.
    """

    low_v: float
    high_v: float
    halvings: int
    sweep_v: tuple[float, ...]
    trials: int
    found: KnownSCurve

    @property
    def decisions(self) -> int:
        """In total."""
        return self.halvings + self.trials * len(self.sweep_v)


def find_trip_point(known: KnownSCurve) -> PlannedSearch:
    """Plan the search for a trip point.

    Parameters
    ----------
    known : KnownSCurve
        A guess, however rough in the offset.
    """
    half_v = _WIDE_ENOUGH_Z * known.offset_error_v
    far = half_v > _WIDE_ENOUGH_Z * _ERROR_AFTER_HALVING_Z * known.sigma_v
    step_v = round(known.sigma_v, -floor(log10(known.sigma_v)) + 1)
    sweep_v = tuple(float(z) * step_v for z in _SWEEP_Z)
    near = known
    if far:
        near = replace(known, offset_error_v=_ERROR_AFTER_HALVING_Z * known.sigma_v)
    offset_half_v, sigma_half = expected_halves(
        near, known.offset_v + np.array(sweep_v), _SWEEP_TRIALS
    )
    errors = normal_quantile(0.95)
    return PlannedSearch(
        low_v=known.offset_v - half_v,
        high_v=known.offset_v + half_v,
        halvings=ceil(log2(2.0 * half_v / known.sigma_v)) if far else 0,
        sweep_v=sweep_v,
        trials=_SWEEP_TRIALS,
        found=replace(
            known,
            offset_error_v=offset_half_v / errors,
            sigma_error=sigma_half / errors,
            measured=True,
        ),
    )
