"""Polynomials in the operating conditions, folded one condition at a time.

The order of operations is part of the meaning: emitted models fold the slow
conditions first and repeat only the last fold when the fast one moves, and
their results must equal these to the last bit.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

__all__ = ["AXIS_SHAPES", "axis_coordinate", "dense_coefficients", "nested_horner", "quantise"]

Floats = npt.NDArray[np.float64]

AXIS_SHAPES = ("plain", "reciprocal", "reciprocal_square", "reciprocal_fourth")
"""x, 1/x, 1/x^2 and 1/x^4: what a condition enters a polynomial as."""


def quantise(x: npt.ArrayLike, steps_per_unit: float) -> Floats:
    """Round to the nearest multiple of ``1 / steps_per_unit``, halves upwards.

    ``floor(x * steps + 0.5) / steps`` with a power of two, so that the result is exact.
    """
    return np.floor(np.asarray(x, dtype=float) * steps_per_unit + 0.5) / steps_per_unit


def axis_coordinate(x: Floats, shape: str, centre: float, half_range: float) -> Floats:
    """Return ``(shape(x) - centre) / half_range``.

    Parameters
    ----------
    x : ndarray
        Condition in SI units, already quantised and clamped.
    shape : str
        One of `AXIS_SHAPES`; the square is ``1 / (x * x)``.
    centre, half_range : float
        In the unit of ``shape(x)``.
    """
    if shape == "reciprocal":
        x = 1.0 / x
    elif shape == "reciprocal_square":
        x = 1.0 / (x * x)
    elif shape == "reciprocal_fourth":
        x = 1.0 / ((x * x) * (x * x))
    return (x - centre) / half_range


def dense_coefficients(
    exponents: tuple[tuple[int, ...], ...], coefficients: npt.ArrayLike
) -> Floats:
    """Return coefficients as a dense array indexed by the powers of each axis.

    Parameters
    ----------
    exponents : tuple of tuple of int
        One tuple a term, one power an axis.
    coefficients : array_like, shape (..., terms)

    Returns
    -------
    ndarray, shape (powers of axis 1, powers of axis 2, ..., *leading shape)
        Absent terms are 0.
    """
    values = np.asarray(coefficients, dtype=float)
    shape = tuple(max(column) + 1 for column in zip(*exponents, strict=True))
    dense = np.zeros(shape + values.shape[:-1])
    for term, powers in enumerate(exponents):
        dense[powers] = values[..., term]
    return dense


def nested_horner(dense: Floats, coordinates: tuple[Floats, ...]) -> Floats:
    """Evaluate a polynomial, folding the first axis first, each by Horner's rule.

    Parameters
    ----------
    dense : ndarray, shape (powers of axis 1, ..., powers of axis A)
        From `dense_coefficients`.
    coordinates : tuple of ndarray, each shape (N,)
        One an axis, in the order of the array's axes.

    Returns
    -------
    ndarray, shape (N,); shape () when there are no axes
    """
    folded: Floats = dense[..., None] if coordinates else dense
    for coordinate in coordinates:
        value = folded[-1]
        for lower in folded[-2::-1]:
            value = value * coordinate + lower
        folded = value
    return folded
