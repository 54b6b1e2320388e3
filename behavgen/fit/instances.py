"""How much offsets scatter between instances at one condition."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.special import log_ndtr, stdtrit

from behavgen.errors import FitError
from behavgen.fit.intervals import mean_interval, sigma_interval

__all__ = [
    "InstanceStatistics",
    "instance_statistics",
    "normality_p",
    "outliers",
]

Floats = npt.NDArray[np.float64]

OUTLIER_ALPHA = 0.01
"""Probability that a clean sample is said to hold outliers."""

FEWEST_FOR_NORMALITY = 8
"""The normality test's published approximation holds from this sample size on."""


@dataclass(frozen=True, slots=True, kw_only=True)
class InstanceStatistics:
    """Offsets of one condition's instances, as a normal sample.

    Parameters
    ----------
    instances : int
    mean_v, mean_low_v, mean_high_v : float
        Mean and its t interval, V.
    sigma_v, sigma_low_v, sigma_high_v : float
        Standard deviation between instances and its chi-square interval, V; the
        variance of the measurement is subtracted, down to zero.
    level : float
        Confidence of both intervals.
    normality_p : float
        Of the Anderson-Darling test; NaN below `FEWEST_FOR_NORMALITY` instances.
    outliers : tuple of int
        Positions of instances too far out for a normal sample, farthest first.
        They are named, not left out.
    """

    instances: int
    mean_v: float
    mean_low_v: float
    mean_high_v: float
    sigma_v: float
    sigma_low_v: float
    sigma_high_v: float
    level: float
    normality_p: float
    outliers: tuple[int, ...]


def instance_statistics(
    offset_v: npt.ArrayLike, measurement_variance_v2: npt.ArrayLike = 0.0, *, level: float = 0.95
) -> InstanceStatistics:
    """Return mean and standard deviation of offsets between instances.

    Parameters
    ----------
    offset_v : array_like, shape (I,)
        One offset an instance, V.
    measurement_variance_v2 : array_like, shape () or (I,)
        Variance of each offset's own measurement error, V^2.
    level : float
        Confidence, 0..1.

    Raises
    ------
    FitError
        With fewer than two instances.
    """
    offset_v = np.asarray(offset_v, dtype=float)
    count = offset_v.size
    if count < 2:
        raise FitError(
            f"{count} instance{'' if count == 1 else 's'} cannot show how instances differ; "
            "measure 2 or more, best 30 or more"
        )
    # Shifting first keeps digits where the mean is far larger than the scatter.
    shifted_v = offset_v - offset_v[0]
    mean_v = float(offset_v[0] + shifted_v.mean())
    total_v = float(shifted_v.std(ddof=1))
    noise_v2 = float(np.mean(np.asarray(measurement_variance_v2, dtype=float)))
    mean_low_v, mean_high_v = mean_interval(mean_v, total_v, count, level)
    sigma_low_v, sigma_high_v = sigma_interval(total_v, count, level)
    return InstanceStatistics(
        instances=count,
        mean_v=mean_v,
        mean_low_v=float(mean_low_v),
        mean_high_v=float(mean_high_v),
        sigma_v=_less_noise(total_v, noise_v2),
        sigma_low_v=_less_noise(sigma_low_v, noise_v2),
        sigma_high_v=_less_noise(sigma_high_v, noise_v2),
        level=level,
        normality_p=normality_p(shifted_v),
        outliers=outliers(shifted_v),
    )


def _less_noise(sigma_v: npt.ArrayLike, noise_v2: float) -> float:
    return float(np.sqrt(np.maximum(np.square(sigma_v) - noise_v2, 0.0)))


def normality_p(sample: npt.ArrayLike) -> float:
    """Return the p-value of the Anderson-Darling test of normality, mean and sigma unknown.

    Source: R. B. D'Agostino & M. A. Stephens, Goodness-of-Fit Techniques, 1986,
    table 4.9, with the statistic multiplied by ``1 + 0.75/n + 2.25/n^2``.

    Parameters
    ----------
    sample : array_like, shape (n,)

    Returns
    -------
    float
        NaN below `FEWEST_FOR_NORMALITY` values or where all are equal.
    """
    x = np.sort(np.asarray(sample, dtype=float))
    n = x.size
    if n < FEWEST_FOR_NORMALITY or x[0] == x[-1]:
        return np.nan
    z = (x - x.mean()) / x.std(ddof=1)
    odd = 2.0 * np.arange(n) + 1.0
    a2 = -n - float(np.mean(odd * (log_ndtr(z) + log_ndtr(-z[::-1]))))
    return _anderson_darling_p(a2 * (1.0 + 0.75 / n + 2.25 / n**2))


def _anderson_darling_p(a2: float) -> float:
    """Return the upper tail probability of the modified statistic (table 4.9)."""
    if a2 < 0.2:
        return float(-np.expm1(-13.436 + 101.14 * a2 - 223.73 * a2**2))
    if a2 < 0.34:
        return float(-np.expm1(-8.318 + 42.796 * a2 - 59.938 * a2**2))
    if a2 < 0.6:
        return float(np.exp(0.9177 - 4.279 * a2 - 1.38 * a2**2))
    # The published parabola turns upwards far out; its value at 13 is below 1e-30.
    a2 = min(a2, 13.0)
    return float(np.exp(1.2937 - 5.709 * a2 + 0.0186 * a2**2))


def outliers(
    sample: npt.ArrayLike, *, alpha: float = OUTLIER_ALPHA, most: int | None = None
) -> tuple[int, ...]:
    """Return the positions of outliers by the generalised extreme Studentised deviate test.

    Source: B. Rosner, Technometrics 25, 1983, 165-172. Several outliers cannot hide
    one another, as they can when single-outlier tests are repeated.

    Parameters
    ----------
    sample : array_like, shape (n,)
    alpha : float
        Probability that a clean sample is said to hold any.
    most : int, optional
        Largest number looked for; default a tenth of the sample, at least 1
        and at most 20. Samples below 3 have none.

    Returns
    -------
    tuple of int
        Farthest first.
    """
    x = np.asarray(sample, dtype=float)
    n = x.size
    left = np.arange(n)
    removed: list[int] = []
    found = 0
    wanted = min(max(n // 10, 1), 20) if most is None else most
    for i in range(1, min(wanted, n - 2) + 1):
        away = np.abs(x[left] - x[left].mean())
        spread = x[left].std(ddof=1)
        if spread == 0.0:
            break
        farthest = int(np.argmax(away))
        removed.append(int(left[farthest]))
        t = -stdtrit(n - i - 1, alpha / (2.0 * (n - i + 1)))
        limit = (n - i) * t / np.sqrt((n - i - 1 + t * t) * (n - i + 1))
        if away[farthest] > limit * spread:
            found = i
        left = np.delete(left, farthest)
    return tuple(removed[:found])
