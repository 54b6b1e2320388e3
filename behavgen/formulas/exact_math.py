"""Logarithm and exponential that agree to the last bit in every language.

Only ``+ - * /`` on IEEE 754 doubles and moves of their bits are used, in one
stated order, so that the same text in SystemVerilog gives the same bits. The
math libraries' own functions differ in the last place between simulators.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

__all__ = ["EXP_SERIES", "LN2_HIGH", "LN2_LOW", "LN_SERIES", "exact_exp", "exact_ln", "horner"]

Floats = npt.NDArray[np.float64]

LN2_HIGH = float.fromhex("0x1.62e42feep-1")
"""ln 2 to 33 bits: k * LN2_HIGH is exact for every exponent k of a double."""
LN2_LOW = float.fromhex("0x1.a39ef35793c76p-33")
LN_SERIES = tuple(1.0 / (2 * k + 1) for k in range(11))
"""ln(m) = 2 s (1 + s^2/3 + s^4/5 + ...), s = (m-1)/(m+1), |s| < 0.1716."""
EXP_SERIES = (
    1.0 / 6.0, -1.0 / 360.0, 1.0 / 15120.0, -1.0 / 604800.0, 1.0 / 23950080.0,
    -691.0 / 653837184000.0,
)  # fmt: skip
"""r coth(r/2) = 2 + r^2/6 - r^4/360 + ... (M. Abramowitz, I. Stegun, Handbook of Mathematical
Functions, 1964, 4.5.67), whence exp(r) = 1 + 2 r / (r coth(r/2) - r); on |r| <= ln(2)/2 the
remainder is below 3e-18."""


def horner(coefficients: tuple[float, ...], x: Floats) -> Floats:
    """Evaluate ``c[0] + c[1] x + ...`` by Horner's rule, highest power first.

    Parameters
    ----------
    coefficients : tuple of float
        In rising powers.
    x : ndarray, any shape

    Returns
    -------
    ndarray, shape of `x`
    """
    result = np.full_like(x, coefficients[-1])
    for coefficient in reversed(coefficients[:-1]):
        result = result * x + coefficient
    return result


def exact_ln(x: Floats) -> Floats:
    """Natural logarithm of positive normal doubles, within 2 units in the last place.

    Parameters
    ----------
    x : ndarray, any shape
        Positive, finite, not denormal.

    Returns
    -------
    ndarray, shape of `x`
    """
    bits = np.ascontiguousarray(x, dtype=np.float64).view(np.uint64)
    exponent = ((bits >> np.uint64(52)) & np.uint64(0x7FF)).astype(np.int64) - 1022
    half_to_one = (bits & np.uint64(0x800FFFFFFFFFFFFF)) | np.uint64(1022 << 52)
    m = half_to_one.view(np.float64)
    low = m < 0.70710678118654757
    m = np.where(low, m + m, m)
    e = (exponent - low).astype(np.float64)
    s = (m - 1.0) / (m + 1.0)
    return e * LN2_HIGH + (e * LN2_LOW + (2.0 * s) * horner(LN_SERIES, s * s))


def exact_exp(x: Floats) -> Floats:
    """Exponential for ``|x| <= 700``, within 2 units in the last place.

    Parameters
    ----------
    x : ndarray, any shape

    Returns
    -------
    ndarray, shape of `x`
    """
    x = np.asarray(x, dtype=np.float64)
    k = np.rint(x * 1.4426950408889634)
    r = (x - k * LN2_HIGH) - k * LN2_LOW
    square = r * r
    rest = (horner(EXP_SERIES, square) * square + 2.0) - r
    power = ((k.astype(np.int64) + 1023) << 52).view(np.float64)
    return (2.0 * r / rest + 1.0) * power
