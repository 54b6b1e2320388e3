"""Confidence intervals of counts, means and standard deviations, vectorised.

Which one: `wilson_interval` for a proportion to be shown; `exact_interval` where
the stated confidence must not fall short, and for rates that were never seen;
`mean_interval` and `sigma_interval` for a normal sample.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy.special import betaincinv, chdtri, ndtri, stdtrit

__all__ = [
    "Interval",
    "exact_interval",
    "mean_interval",
    "normal_quantile",
    "sigma_interval",
    "student_quantile",
    "wilson_interval",
]

Floats = npt.NDArray[np.float64]
Interval = tuple[Floats, Floats]
"""Lower and upper ends."""


def normal_quantile(level: float) -> float:
    """Return `z` such that a standard normal variable lies within +-z with probability `level`."""
    return float(-ndtri(0.5 * (1.0 - level)))


def student_quantile(level: float, degrees_of_freedom: npt.ArrayLike) -> Floats:
    """Return `t` such that Student's variable lies within +-t with probability `level`."""
    t: Floats = -stdtrit(np.asarray(degrees_of_freedom, dtype=float), 0.5 * (1.0 - level))
    return t


def wilson_interval(ones: npt.ArrayLike, trials: npt.ArrayLike, level: float = 0.95) -> Interval:
    """Return the score interval of a proportion (E. B. Wilson, J. Am. Stat. Assoc. 22, 1927).

    Parameters
    ----------
    ones, trials : array_like of int
        Counts; broadcast.
    level : float
        Confidence, 0..1; reached on average, not for every proportion.
    """
    k, n = np.asarray(ones, dtype=float), np.asarray(trials, dtype=float)
    z2 = normal_quantile(level) ** 2
    centre = (k + 0.5 * z2) / (n + z2)
    half = np.sqrt(z2 * (k * (n - k) / np.maximum(n, 1.0) + 0.25 * z2)) / (n + z2)
    return np.where(k == 0, 0.0, centre - half), np.where(k == n, 1.0, centre + half)


def exact_interval(ones: npt.ArrayLike, trials: npt.ArrayLike, level: float = 0.95) -> Interval:
    """Return the interval of a proportion that never covers less than `level`.

    Source: C. J. Clopper & E. S. Pearson, Biometrika 26, 1934. With no ones, or
    only ones, the open end still carries half of the error probability.

    Parameters
    ----------
    ones, trials : array_like of int
        Counts; broadcast.
    level : float
        Confidence, 0..1.
    """
    k, n = np.asarray(ones, dtype=float), np.asarray(trials, dtype=float)
    tail = 0.5 * (1.0 - level)
    low = betaincinv(np.maximum(k, 1.0), n - np.maximum(k, 1.0) + 1.0, tail)
    high = betaincinv(np.minimum(k, n - 1.0) + 1.0, n - np.minimum(k, n - 1.0), 1.0 - tail)
    return np.where(k == 0, 0.0, low), np.where(k == n, 1.0, high)


def mean_interval(
    mean: npt.ArrayLike, sigma: npt.ArrayLike, size: npt.ArrayLike, level: float = 0.95
) -> Interval:
    """Return Student's interval of the mean of a normal sample (Biometrika 6, 1908).

    Parameters
    ----------
    mean, sigma : array_like
        Sample mean and standard deviation, same unit.
    size : array_like of int
        Sample size, at least 2.
    level : float
        Confidence, 0..1.
    """
    n = np.asarray(size, dtype=float)
    half = student_quantile(level, n - 1.0) * np.asarray(sigma, dtype=float) / np.sqrt(n)
    return np.asarray(mean - half), np.asarray(mean + half)


def sigma_interval(sigma: npt.ArrayLike, size: npt.ArrayLike, level: float = 0.95) -> Interval:
    """Return the chi-square interval of the standard deviation of a normal sample.

    ``(n-1) s^2 / sigma^2`` is chi-square with ``n - 1`` degrees of freedom
    (NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.8).

    Parameters
    ----------
    sigma : array_like
        Sample standard deviation, divisor ``n - 1``.
    size : array_like of int
        Sample size, at least 2.
    level : float
        Confidence, 0..1.
    """
    s, dof = np.asarray(sigma, dtype=float), np.asarray(size, dtype=float) - 1.0
    tail = 0.5 * (1.0 - level)
    return s * np.sqrt(dof / chdtri(dof, tail)), s * np.sqrt(dof / chdtri(dof, 1.0 - tail))
