"""What is wanted, and what is taken where no table tells."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["Goals", "Guess"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Goals:
    """Wanted half widths of intervals; None: not asked for.

    Parameters
    ----------
    sigma : float or None
        Of the noise sigma at every condition, relative.
    offset_v : float or None
        Of the trip point at every condition, V.
    mismatch : float or None
        Of the offset's spread between instances, relative.
    mean_v : float or None
        Of the offset's mean over instances, V.
    tau : float or None
        Of tau at every condition, relative.
    delay : float or None
        Of the delay anywhere between the least and the largest overdrive, relative.
    level : float
        Confidence of the intervals promised, 0..1; a model's own are at 95 %.
    """

    sigma: float | None = None
    offset_v: float | None = None
    mismatch: float | None = None
    mean_v: float | None = None
    tau: float | None = None
    delay: float | None = None
    level: float = 0.95


@dataclass(frozen=True, slots=True, kw_only=True)
class Guess:
    """Rough values for what the tables do not tell.

    Parameters
    ----------
    sigma_v, offset_v : float
        Noise sigma, V, None where there is no guess, and trip point, V.
    sigma_error : float
        Standard error of the logarithm of that sigma.
    spread_v : float or None
        Standard deviation of the offset between instances, V; also how far the
        trip point may be from `offset_v`.
    tau_s : float or None
    delay_s : float or None
        At the largest overdrive.
    scatter : float
        Relative standard deviation of a delay from its law.
    lowest_v, highest_v : float or None
        Range of overdrives that can be measured, V.
    """

    sigma_v: float | None = None
    offset_v: float = 0.0
    sigma_error: float = 0.3
    spread_v: float | None = None
    tau_s: float | None = None
    delay_s: float | None = None
    scatter: float = 0.005
    lowest_v: float | None = None
    highest_v: float | None = None
