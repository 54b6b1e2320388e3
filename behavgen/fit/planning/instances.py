"""How many instances for a wanted interval of the offset's mean and spread.

The spread has a chi-square interval, the mean a t interval (`fit.intervals`). Both
grow and shrink with the sample's own standard deviation; promised is their mean.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, inf, log2, sqrt

from behavgen.fit.intervals import sigma_interval, student_quantile
from behavgen.fit.planning.fewest import MOST, fewest
from behavgen.fit.planning.sample_deviation import mean_deviation

__all__ = ["BRACKET", "PlannedInstances", "mean_half", "plan_instances", "sigma_half"]

BRACKET = 0.2
"""Width of each offset's bracket in spreads: its error adds 1/600 to the spread."""

_SEARCHED = 8.0
"""Width of the interval halved for each offset, in spreads: 6 in 100 000 lie outside."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PlannedInstances:
    """Instances to measure, and the intervals this promises.

    Parameters
    ----------
    instances, measured : int
        In all, and of these measured already.
    sigma_half, mean_half : float
        Mean half widths of the intervals of spread and mean with all instances,
        in true spreads.
    halvings : int
        Decisions that bracket one offset to a fifth of the spread.
    level : float
        Confidence, 0..1.
    """

    instances: int
    measured: int
    sigma_half: float
    mean_half: float
    halvings: int
    level: float

    @property
    def more(self) -> int:
        """Instances still to measure."""
        return self.instances - self.measured

    @property
    def decisions(self) -> int:
        """In total, by halving."""
        return self.more * self.halvings


def plan_instances(
    *,
    sigma_within: float = inf,
    mean_within: float = inf,
    measured: int = 0,
    level: float = 0.95,
) -> PlannedInstances | None:
    """Return how many instances reach the wanted intervals.

    Parameters
    ----------
    sigma_within : float
        Wanted half width of the spread's interval, relative.
    mean_within : float
        Wanted half width of the mean's interval, in spreads.
    measured : int
        Instances there are already.
    level : float
        Confidence, 0..1.

    Returns
    -------
    PlannedInstances or None
        None when those measured are enough.
    """

    def enough(instances: int) -> bool:
        return (
            sigma_half(instances, level) <= sigma_within
            and mean_half(instances, level) <= mean_within
        )

    found = fewest(enough, start=2)
    instances = MOST if found is None else found
    if instances <= measured:
        return None
    return PlannedInstances(
        instances=instances,
        measured=measured,
        sigma_half=sigma_half(instances, level),
        mean_half=mean_half(instances, level),
        halvings=ceil(log2(_SEARCHED / BRACKET)),
        level=level,
    )


def sigma_half(instances: int, level: float = 0.95) -> float:
    """Return the mean half width of the chi-square interval of the spread, in true spreads."""
    low, high = sigma_interval(mean_deviation(instances - 1), instances, level)
    return 0.5 * float(high - low)


def mean_half(instances: int, level: float = 0.95) -> float:
    """Return the mean half width of the t interval of the mean, in true spreads."""
    quantile = float(student_quantile(level, instances - 1))
    return quantile * mean_deviation(instances - 1) / sqrt(instances)
