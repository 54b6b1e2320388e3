"""How far a small sample's standard deviation falls short of the true one, on the average."""

from __future__ import annotations

from math import exp, lgamma, sqrt

__all__ = ["mean_deviation"]

_LARGE = 10_000
"""From here on the leading term is exact to 1e-9 and the difference of logarithms is not."""


def mean_deviation(freedom: float) -> float:
    """Return the mean of a normal sample's standard deviation over the true one.

    ``c4 = sqrt(2/f) Gamma((f+1)/2) / Gamma(f/2)`` (NIST/SEMATECH e-Handbook of
    Statistical Methods, 6.3.2).

    Parameters
    ----------
    freedom : float
        Degrees of freedom: for a plain sample its size less one.
    """
    if freedom > _LARGE:
        return 1.0 - 0.25 / freedom
    return sqrt(2.0 / freedom) * exp(lgamma(0.5 * freedom + 0.5) - lgamma(0.5 * freedom))
