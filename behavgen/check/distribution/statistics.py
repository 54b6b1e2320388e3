"""p-values of the statistics; each says how often a right model is at least as far off."""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt

__all__ = ["binomial_p", "correlation_p", "normal_p", "product_p", "variance_p"]

Floats = npt.NDArray[np.float64]


def normal_p(z: float) -> float:
    """Return the two-sided p-value of a standard normal."""
    return math.erfc(abs(z) / math.sqrt(2.0))


def binomial_p(ones: int, trials: int, probability: float) -> float:
    """Return twice the smaller exact tail of a binomial count, at most 1."""
    from scipy.special import bdtr, bdtrc  # noqa: PLC0415

    low = float(bdtr(ones, trials, probability))
    high = float(bdtrc(ones - 1, trials, probability)) if ones > 0 else 1.0
    return min(1.0, 2.0 * min(low, high))


def variance_p(squares: float, freedom: int) -> float:
    """Return twice the smaller tail of a sum of squared standard normals, at most 1."""
    from scipy.special import chdtr, chdtrc  # noqa: PLC0415

    return min(1.0, 2.0 * min(float(chdtr(freedom, squares)), float(chdtrc(freedom, squares))))


def product_p(a: npt.NDArray[np.int64], b: npt.NDArray[np.int64]) -> float:
    """Return the p-value of pairs of fair signs being independent: their products are fair."""
    agree = int((a == b).sum())
    return binomial_p(agree, a.size, 0.5)


def correlation_p(a: Floats, b: Floats) -> float:
    """Return the p-value of two normal samples being uncorrelated.

    By the transform artanh r, normal with variance ``1 / (n - 3)``
    (R. A. Fisher, Metron 1, 1921, 3-32).
    """
    if len(a) < 5 or not np.ptp(a) or not np.ptp(b):
        return 1.0
    r = float(np.corrcoef(a, b)[0, 1])
    return normal_p(math.atanh(max(min(r, 1.0 - 1e-12), -1.0 + 1e-12)) * math.sqrt(len(a) - 3))
