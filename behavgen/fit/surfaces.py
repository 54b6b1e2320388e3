"""Values at tabulated conditions -> a smooth surface between them.

A surface is a polynomial in transformed conditions, fitted by least squares
with a prior that prefers low powers (ridge regression; A. E. Hoerl, R. W.
Kennard, Technometrics 12, 1970, 55-67). The prior lets the data decide as far
as they reach: on a full grid the polynomial goes through its points; on a
star-shaped set of conditions the cross terms that nobody measured stay out.

What to use when: `choose_by_left_out` for values without random error (delays
from simulation), `choose_by_likelihood` for values with known random errors
(sigmas from S-curves).
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import CONDITION_NAMES
from behavgen.formulas.polynomial import AXIS_SHAPES, axis_coordinate
from behavgen.model import Axis, significant

__all__ = [
    "Form",
    "SurfaceFit",
    "axis_powers",
    "choose_by_left_out",
    "choose_by_likelihood",
    "design",
    "difference_by_left_out",
]

Floats = npt.NDArray[np.float64]

_CONSTANT_SPREAD = 1e4
"""Prior spread of the constant term: wide enough to be free."""
_AS_GOOD = 1.05
"""Fewer terms are preferred while the left-out error rises by no more than this factor."""
_AS_LIKELY = 2.0
"""The same for twice the log likelihood."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Form:
    """How a surface is written: its axes and terms."""

    axes: tuple[Axis, ...]
    exponents: tuple[tuple[int, ...], ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SurfaceFit:
    """A fitted family of L surfaces that share axes and terms.

    Parameters
    ----------
    form : Form
    coefficients : ndarray, shape (terms, L)
    covariance : ndarray, shape (terms, terms)
        Of the coefficients, for targets whose weighted residuals have unit variance.
    left_out : ndarray, shape (C, L)
        Error at each condition of the surface chosen and fitted without it.
    """

    form: Form
    coefficients: Floats
    covariance: Floats
    left_out: Floats

    def predict(self, values: Floats) -> Floats:
        """Return the targets' surfaces, shape (N, L), at conditions of shape (N, 3)."""
        return self.predict_with(self.coefficients, values)

    def predict_with(self, coefficients: Floats, values: Floats) -> Floats:
        """Return the same with other coefficients, shape (terms, L)."""
        prediction: Floats = design(self.form, values) @ coefficients
        return prediction

    @property
    def constant_term(self) -> int:
        """Position of the constant among the terms."""
        return next(k for k, term in enumerate(self.form.exponents) if not any(term))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Candidates:
    """All ways to write a surface: shapes of axes times priors, as one batch.

    Parameters
    ----------
    axes : tuple of tuple of Axis, length S
    exponents : tuple
        The complete set of M terms.
    spread : ndarray, shape (P, M)
        Prior spread of each coefficient; 0 leaves the term out.
    """

    axes: tuple[tuple[Axis, ...], ...]
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


def _axes(values: Floats, shapes: dict[str, str]) -> tuple[Axis, ...]:
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


def _candidates(
    values: Floats, decays: tuple[float, ...], ratios: tuple[float, ...]
) -> _Candidates:
    """Return all candidates; `ratios` are prior spreads of a linear term over the residual's."""
    powers = axis_powers(values)
    positive = {n: bool((values[:, CONDITION_NAMES.index(n)] > 0.0).all()) for n in powers}
    shapes = [
        AXIS_SHAPES if power > 1 and positive[name] else AXIS_SHAPES[:1]
        for name, power in powers.items()
    ]
    exponents = _visible(values, powers)
    order = np.array([sum(term) for term in exponents])
    spread = [
        np.where(order == 0, _CONSTANT_SPREAD, ratio * decay ** (order - 1.0)) * (order <= highest)
        for highest in range(max(order) + 1)
        for decay in decays
        for ratio in ratios
    ]
    return _Candidates(
        axes=tuple(
            _axes(values, dict(zip(powers, chosen, strict=True)))
            for chosen in itertools.product(*shapes)
        ),
        exponents=exponents,
        spread=np.array(spread),
    )


def _visible(values: Floats, powers: dict[str, int]) -> tuple[tuple[int, ...], ...]:
    """Return the terms, lowest total power first, that these conditions can tell apart."""
    every = itertools.product(*(range(power + 1) for power in powers.values()))
    axes = _axes(values, dict.fromkeys(powers, "plain"))
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


def _scaled_designs(candidates: _Candidates, values: Floats, weights: Floats) -> Floats:
    """Return sqrt(weight) * design * prior spread, shape (S * P, C, M)."""
    plain = np.stack(
        [
            design(Form(axes=axes, exponents=candidates.exponents), values)
            for axes in candidates.axes
        ]
    )
    scaled = plain[:, None] * candidates.spread[None, :, None, :] * np.sqrt(weights)[:, None]
    return scaled.reshape(-1, *plain.shape[1:])


def choose_by_left_out(
    values: Floats, targets: Floats, metric: Floats | None = None, *, nested: bool = True
) -> SurfaceFit:
    """Choose shape, order and prior by leaving one condition out at a time.

    The fitted errors count too, so that of surfaces that foresee equally well
    the one that goes through its own points is taken. Left-out errors have a
    closed form, residual / (1 - leverage), and so have those with two
    conditions left out; selection is therefore repeated inside every fold and
    the errors reported are of surfaces that never saw their condition, not
    even to be chosen.

    Parameters
    ----------
    values : ndarray, shape (C, 3)
        Conditions in the order of `CONDITION_NAMES`; NaN columns are ignored.
    targets : ndarray, shape (C, L)
    metric : ndarray, shape (C, L, L), optional
        An error `d` at a condition costs ``sqrt(d @ metric @ d)``; identity by default.
    nested : bool
        Repeat the selection inside each fold.

    Returns
    -------
    SurfaceFit
    """
    candidates = _candidates(values, decays=(0.3,), ratios=(30.0, 100.0, 300.0))
    weights = np.ones(len(values))
    scaled = _scaled_designs(candidates, values, weights)
    smoother, residual = _smoothers(scaled, targets)
    if metric is None:
        metric = np.broadcast_to(np.eye(targets.shape[1]), (len(values), *(targets.shape[1],) * 2))
    single = residual / _slack(smoother)[..., None]
    terms = _terms(candidates)
    fitted = _cost(residual, metric).mean(axis=-1)
    best = _simplest(_cost(single, metric).mean(axis=-1) + fitted, terms)
    left_out = _nested(smoother, residual, single, metric, terms) if nested else single[best]
    if len(values) == 1:
        left_out = np.full_like(targets, np.nan)
    return _finished(candidates, best, values, targets, weights, left_out)


def _terms(candidates: _Candidates) -> npt.NDArray[np.intp]:
    """Return how many terms each candidate of the batch has, shape (S * P,)."""
    return np.tile((candidates.spread > 0.0).sum(axis=-1), len(candidates.axes))


def _simplest(cost: Floats, terms: npt.NDArray[np.intp]) -> int:
    """Return the candidate with the fewest terms, then the least cost, among those as good."""
    enough = cost <= cost.min() * _AS_GOOD + 1e-12
    fewest = enough & (terms == terms[enough].min())
    return int(np.argmin(np.where(fewest, cost, np.inf)))


def _smoothers(scaled: Floats, targets: Floats) -> tuple[Floats, Floats]:
    """Return smoother matrices (B, C, C) and residuals fit - target (B, C, L)."""
    normal = scaled.transpose(0, 2, 1) @ scaled + np.eye(scaled.shape[-1])
    smoother = scaled @ np.linalg.solve(normal, scaled.transpose(0, 2, 1))
    return smoother, smoother @ targets - targets


def _slack(smoother: Floats) -> Floats:
    return np.maximum(1.0 - np.diagonal(smoother, axis1=-2, axis2=-1), 1e-12)


def _cost(error: Floats, metric: Floats) -> Floats:
    """Return each condition's cost, shape (..., C); the root keeps one bad corner from ruling."""
    squared = np.einsum("...cl,clm,...cm->...c", error, metric, error, optimize=True)
    return np.sqrt(np.maximum(squared, 0.0))


def _nested(
    smoother: Floats, residual: Floats, single: Floats, metric: Floats, terms: npt.NDArray[np.intp]
) -> Floats:
    """Return left-out errors, each of the candidate that the other conditions choose."""
    count = smoother.shape[-1]
    slack = _slack(smoother)
    left_out = np.empty_like(residual[0])
    for i in range(count):
        across = smoother[:, :, i]
        determinant = np.maximum(slack * slack[:, i : i + 1] - across * smoother[:, i, :], 1e-12)
        pair = slack[:, i, None, None] * residual + across[..., None] * residual[:, i : i + 1]
        fitted = residual + across[..., None] * single[:, i : i + 1]
        cost = _cost(pair / determinant[..., None], metric) + _cost(fitted, metric)
        cost[:, i] = 0.0
        left_out[i] = single[_simplest(cost.sum(axis=-1), terms), i]
    return left_out


def choose_by_likelihood(values: Floats, target: Floats, variance: Floats) -> SurfaceFit:
    """Choose shape, order and prior by the likelihood of values with known errors.

    Parameters
    ----------
    values : ndarray, shape (C, 3)
    target : ndarray, shape (C,)
    variance : ndarray, shape (C,)
        Of each target's random error.

    Returns
    -------
    SurfaceFit
        With L = 1; `left_out` is that of the chosen surface.
    """
    scale = float(np.mean(variance))
    weights = scale / variance
    candidates = _candidates(values, decays=(0.3,), ratios=(0.1, 0.5, 2.0, 10.0, 100.0))
    scaled = _scaled_designs(candidates, values, weights)
    whitened = target * np.sqrt(weights) / np.sqrt(scale)
    spread = np.eye(len(target)) + scaled @ scaled.transpose(0, 2, 1)
    _, log_determinant = np.linalg.slogdet(spread)
    fit = np.linalg.solve(spread, np.broadcast_to(whitened, (len(spread), len(target)))[..., None])
    surprise = log_determinant + np.einsum("c,bc->b", whitened, fit[..., 0])
    likely = surprise <= surprise.min() + _AS_LIKELY
    terms = _terms(candidates)
    best = int(np.argmin(np.where(likely & (terms == terms[likely].min()), surprise, np.inf)))
    smoother, residual = _smoothers(scaled[best : best + 1], whitened[:, None])
    left_out = residual[0] / _slack(smoother)[0][:, None] * np.sqrt(scale / weights)[:, None]
    return _finished(candidates, best, values, target[:, None], weights, left_out)


def difference_by_left_out(fit: SurfaceFit, values: Floats, targets: Floats) -> Floats:
    """Fit what is left at other conditions, in the terms of a finished fit.

    The highest total power is chosen by leaving one condition out; a single
    condition gives a constant difference.

    Parameters
    ----------
    fit : SurfaceFit
    values : ndarray, shape (C, 3)
    targets : ndarray, shape (C, L)

    Returns
    -------
    ndarray, shape (terms, L)
        To be added to the fit's coefficients.
    """
    gap = targets - fit.predict(values)
    order = np.array([sum(term) for term in fit.form.exponents])
    plain = design(fit.form, values)
    spread = [
        np.where(order == 0, _CONSTANT_SPREAD, 1e2 * 0.3 ** (order - 1.0)) * (order <= highest)
        for highest in (range(max(order) + 1) if len(values) > 2 else (0,))
    ]
    scaled = plain * np.array(spread)[:, None, :]
    smoother, residual = _smoothers(scaled, gap)
    cost = np.linalg.norm(residual / _slack(smoother)[..., None], axis=-1).sum(axis=-1)
    best = scaled[int(np.argmin(cost))]
    normal = best.T @ best + np.eye(len(order))
    solution: Floats = np.linalg.solve(normal, best.T @ gap)
    return solution * spread[int(np.argmin(cost))][:, None]


def _finished(
    candidates: _Candidates, best: int, values: Floats, targets: Floats, weights: Floats,
    left_out: Floats,
) -> SurfaceFit:  # fmt: skip
    shape, prior = divmod(best, len(candidates.spread))
    spread = candidates.spread[prior]
    kept = np.flatnonzero(spread > 0.0)
    form = Form(axes=candidates.axes[shape], exponents=tuple(candidates.exponents[k] for k in kept))
    root = np.sqrt(weights)[:, None]
    scaled = root * design(form, values) * spread[kept]
    normal = scaled.T @ scaled + np.eye(len(kept))
    inverse = np.linalg.inv(normal) * np.outer(spread[kept], spread[kept])
    coefficients = inverse @ ((root * design(form, values)).T @ (root * targets))
    return SurfaceFit(form=form, coefficients=coefficients, covariance=inverse, left_out=left_out)
