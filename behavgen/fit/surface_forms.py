"""All the ways in which a surface over conditions can be written."""

from __future__ import annotations

import itertools
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import CONDITION_NAMES
from behavgen.formulas.polynomial import AXIS_SHAPES, axis_coordinate
from behavgen.model import Axis, significant

__all__ = [
    "CONSTANT_SPREAD",
    "Candidates",
    "Form",
    "axes_of",
    "axis_powers",
    "candidates",
    "design",
    "visible_terms",
]

Floats = npt.NDArray[np.float64]

_STEEPER = {
    "plain": "plain",
    "reciprocal": "reciprocal_square",
    "reciprocal_square": "reciprocal_fourth",
}
"""What bends an axis with two levels: tables thinned to two levels were foreseen best so."""
CONSTANT_SPREAD = 1e4
"""Prior spread of the constant term: wide enough to be free."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Form:
    """How a surface is written: its axes and terms."""

    axes: tuple[Axis, ...]
    exponents: tuple[tuple[int, ...], ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Candidates:
    """All ways to write a surface: shapes of axes times priors, as one batch.

    Parameters
    ----------
    axes : tuple of tuple of Axis, length S
    surprises : ndarray of int, shape (S,)
        How many axes have another shape than expected.
    exponents : tuple
        The complete set of M terms.
    spread : ndarray, shape (P, M)
        Prior spread of each coefficient; 0 leaves the term out.
    """

    axes: tuple[tuple[Axis, ...], ...]
    surprises: npt.NDArray[np.intp]
    exponents: tuple[tuple[int, ...], ...]
    spread: Floats


def axis_powers(values: Floats) -> dict[str, int]:
    """Return the highest power each condition can carry, from its distinct levels.

    Two levels carry a straight line, three or four a parabola, five a cubic;
    one level or none gives no axis.

    Parameters
    ----------
    values : ndarray, shape (C, 3)
    """
    powers = {}
    for name, column in zip(CONDITION_NAMES, values.T, strict=True):
        levels = 1 if np.isnan(column).any() else len(np.unique(column))
        if levels > 1:
            powers[name] = 1 if levels == 2 else 2 if levels < 5 else 3
    return powers


def axes_of(values: Floats, shapes: Mapping[str, str]) -> tuple[Axis, ...]:
    """Return axes of given shapes, scaled to -1..1 over conditions of shape (C, 3)."""
    axes = []
    for name, shape in shapes.items():
        column = values[:, CONDITION_NAMES.index(name)]
        ends = axis_coordinate(np.array([column.min(), column.max()]), shape, 0.0, 1.0)
        centre, half = 0.5 * float(ends[0] + ends[1]), 0.5 * abs(float(ends[1] - ends[0]))
        axes.append(
            Axis(condition=name, shape=shape, centre=significant(centre, 6),
                 half_range=significant(half, 6))
        )  # fmt: skip
    return tuple(axes)


def candidates(
    values: Floats,
    decays: tuple[float, ...],
    ratios: tuple[float, ...],
    expected_shapes: Mapping[str, str],
    highest_powers: Mapping[str, int],
    highest_order: int | None = None,
) -> Candidates:
    """Return all candidates.

    Parameters
    ----------
    values : ndarray, shape (C, 3)
    decays : tuple of float
        Prior spread kept with each further power.
    ratios : tuple of float
        Prior spreads of a linear term over the residual's.
    expected_shapes : mapping of str to str
        Shape that physics expects, by condition; plain by default. It is preferred
        among equally good ones; an axis whose two levels cannot tell takes a steeper one.
    highest_powers : mapping of str to int
        By condition, where lower than the levels allow.
    highest_order : int, optional
        Highest total power of a term.
    """
    levels = axis_powers(values)
    powers = {name: min(power, highest_powers.get(name, power)) for name, power in levels.items()}
    shapes = [_shapes(values, name, power, expected_shapes) for name, power in powers.items()]
    exponents = visible_terms(values, powers)
    order = np.array([sum(term) for term in exponents])
    spread = [
        np.where(order == 0, CONSTANT_SPREAD, ratio * decay ** (order - 1.0)) * (order <= highest)
        for highest in range(max(order) + 1)
        if highest_order is None or highest <= highest_order
        for decay in decays
        for ratio in ratios
    ]
    chosen = [dict(zip(powers, shape, strict=True)) for shape in itertools.product(*shapes)]
    surprises = [
        sum(shape != expected_shapes.get(name, "plain") for name, shape in one.items())
        for one in chosen
    ]
    return Candidates(
        axes=tuple(axes_of(values, one) for one in chosen),
        surprises=np.array(surprises),
        exponents=exponents,
        spread=np.array(spread),
    )


def _shapes(
    values: Floats, name: str, power: int, expected_shapes: Mapping[str, str]
) -> tuple[str, ...]:
    if not (values[:, CONDITION_NAMES.index(name)] > 0.0).all():
        return ("plain",)
    if power == 1:
        return (_STEEPER[expected_shapes.get(name, "plain")],)
    return AXIS_SHAPES[:3]


def visible_terms(values: Floats, powers: Mapping[str, int]) -> tuple[tuple[int, ...], ...]:
    """Return the terms, lowest total power first, that these conditions can tell apart.

    Parameters
    ----------
    values : ndarray, shape (C, 3)
    powers : mapping of str to int
        Highest power of each condition.
    """
    every = itertools.product(*(range(power + 1) for power in powers.values()))
    axes = axes_of(values, dict.fromkeys(powers, "plain"))
    kept: list[tuple[int, ...]] = []
    for term in sorted(every, key=lambda powers: (sum(powers), powers)):
        columns = design(Form(axes=axes, exponents=(*kept, term)), values)
        if np.linalg.matrix_rank(columns, tol=1e-6 * np.sqrt(len(values))) > len(kept):
            kept.append(term)
    return tuple(kept)


def design(form: Form, values: Floats) -> Floats:
    """Return the design matrix, shape (C, terms), at conditions of shape (C, 3)."""
    matrix = np.ones((len(values), len(form.exponents)))
    for position, axis in enumerate(form.axes):
        column = values[:, CONDITION_NAMES.index(axis.condition)]
        coordinate = axis_coordinate(column, axis.shape, axis.centre, axis.half_range)
        matrix *= coordinate[:, None] ** np.array([term[position] for term in form.exponents])
    return matrix
