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

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.surface_forms import Candidates, Form, candidates, design
from behavgen.model import Axis

__all__ = [
    "SurfaceFit",
    "choose_by_left_out",
    "choose_by_likelihood",
    "left_out_cost",
    "slack_of",
    "smoothers",
]

Floats = npt.NDArray[np.float64]

_AS_GOOD = 1.1
"""The expected axes and fewer terms are preferred while the error rises by no more than this."""
_AS_LIKELY = 2.0
"""The same for twice the log likelihood."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SurfaceFit:
    """A fitted family of L surfaces that share axes and terms.

    Parameters
    ----------
    form : Form
    coefficients : ndarray, shape (terms, L)
    covariance : ndarray, shape (terms, terms)
        Of the coefficients given the prior, for targets of unit variance.
    leverage : ndarray, shape (terms, terms)
        Of the coefficients from random errors of the targets alone, unit variance.
    inflation : float
        Mean variance of a left-out error for independent target errors of unit variance.
    left_out : ndarray, shape (C, L)
        Error at each condition of the surface chosen and fitted without it.
    """

    form: Form
    coefficients: Floats
    covariance: Floats
    leverage: Floats
    inflation: float
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


def _scaled_designs(ways: Candidates, values: Floats, weights: Floats) -> Floats:
    """Return sqrt(weight) * design * prior spread, shape (S * P, C, M)."""
    plain = np.stack(
        [design(Form(axes=axes, exponents=ways.exponents), values) for axes in ways.axes]
    )
    scaled = plain[:, None] * ways.spread[None, :, None, :] * np.sqrt(weights)[:, None]
    batch: Floats = scaled.reshape(-1, *plain.shape[1:])
    return batch


def choose_by_left_out(
    values: Floats,
    targets: Floats,
    metric: Floats | None = None,
    expected_shapes: Mapping[str, str] | None = None,
    highest_powers: Mapping[str, int] | None = None,
    highest_order: int | None = None,
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
    expected_shapes, highest_powers, highest_order : optional
        See `surface_forms.candidates`.

    Returns
    -------
    SurfaceFit
    """
    centre = targets.mean(axis=0)
    targets = targets - centre  # the constant's prior is free only beside small values
    ways = candidates(
        values,
        (0.3,),
        (30.0, 100.0, 300.0),
        expected_shapes or {},
        highest_powers or {},
        highest_order,
    )
    weights = np.ones(len(values))
    scaled = _scaled_designs(ways, values, weights)
    smoother, residual = smoothers(scaled, targets)
    if metric is None:
        metric = np.broadcast_to(np.eye(targets.shape[1]), (len(values), *(targets.shape[1],) * 2))
    single = residual / slack_of(smoother)[..., None]
    oddity = _oddity(ways)
    fitted = _cost(residual, metric).mean(axis=-1)
    best = _simplest(_cost(single, metric).mean(axis=-1) + fitted, oddity)
    left_out = _nested(smoother, residual, single, metric, oddity)
    if len(values) == 1:
        left_out = np.full_like(targets, np.nan)
    fit = _finished(ways, best, values, targets, weights, left_out)
    coefficients = fit.coefficients.copy()
    coefficients[fit.constant_term] += centre
    return replace(fit, coefficients=coefficients)


def _oddity(ways: Candidates) -> npt.NDArray[np.intp]:
    """Return how far each candidate is from what one would write first, shape (S * P,).

    Unexpected axes count before terms.
    """
    terms = np.tile((ways.spread > 0.0).sum(axis=-1), len(ways.axes))
    surprises = np.repeat(ways.surprises, len(ways.spread))
    oddity: npt.NDArray[np.intp] = surprises * (1 + len(ways.exponents)) + terms
    return oddity


def _simplest(cost: Floats, oddity: npt.NDArray[np.intp]) -> int:
    """Return the least odd candidate, then the one of least cost, among those as good."""
    enough = cost <= cost.min() * _AS_GOOD + 1e-12
    simplest = enough & (oddity == oddity[enough].min())
    return int(np.argmin(np.where(simplest, cost, np.inf)))


def smoothers(scaled: Floats, targets: Floats) -> tuple[Floats, Floats]:
    """Return smoother matrices (B, C, C) and residuals fit - target (B, C, L)."""
    normal = scaled.transpose(0, 2, 1) @ scaled + np.eye(scaled.shape[-1])
    smoother = scaled @ np.linalg.solve(normal, scaled.transpose(0, 2, 1))
    residual: Floats = smoother @ targets - targets
    return smoother, residual


def slack_of(smoother: Floats) -> Floats:
    """Return what each target leaves to the others, 1 - leverage, shape (..., C)."""
    slack: Floats = np.maximum(1.0 - np.diagonal(smoother, axis1=-2, axis2=-1), 1e-12)
    return slack


def _cost(error: Floats, metric: Floats) -> Floats:
    """Return each condition's cost, shape (..., C); the root keeps one bad corner from ruling."""
    squared = np.einsum("...cl,clm,...cm->...c", error, metric, error, optimize=True)
    cost: Floats = np.sqrt(np.maximum(squared, 0.0))
    return cost


def left_out_cost(fit: SurfaceFit, metric: Floats) -> float:
    """Return the mean over conditions of what their left-out errors cost.

    The worst tenth of the conditions do not count: a corner that barely decides
    is foreseen by nothing.
    """
    cost = np.sort(_cost(fit.left_out, metric))
    return float(cost[: len(cost) - (len(cost) + 9) // 10].mean())


def _nested(
    smoother: Floats, residual: Floats, single: Floats, metric: Floats, oddity: npt.NDArray[np.intp]
) -> Floats:
    """Return left-out errors, each of the candidate that the other conditions choose.

    With condition i out, errors elsewhere are sums ``a u + b w`` of the residuals u there
    and w at i; their costs follow from products that are formed once a fold.
    """
    slack = slack_of(smoother)
    weighed = (residual.transpose(1, 0, 2) @ metric).transpose(1, 0, 2)
    own = (weighed * residual).sum(axis=-1)
    flat = metric.reshape(len(metric), -1)
    left_out = np.empty_like(residual[0])
    for i in range(smoother.shape[-1]):
        across, here, there = smoother[:, :, i], residual[:, i], slack[:, i : i + 1]
        determinant = np.maximum(slack * there - across * smoother[:, i, :], 1e-12)
        mixed = (weighed @ here[..., None])[..., 0]
        foreign = (here[:, :, None] * here[:, None, :]).reshape(len(here), -1) @ flat.T
        pair = there * (there * own + 2.0 * across * mixed) + across**2 * foreign
        share = across / there
        fitted = own + share * (2.0 * mixed + share * foreign)
        cost = np.sqrt(np.maximum(pair, 0.0)) / determinant + np.sqrt(np.maximum(fitted, 0.0))
        cost[:, i] = 0.0
        left_out[i] = single[_simplest(cost.sum(axis=-1), oddity), i]
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
    ways = candidates(values, (0.3,), (0.1, 0.5, 2.0, 10.0, 100.0), {}, {})
    scaled = _scaled_designs(ways, values, weights)
    whitened = target * np.sqrt(weights) / np.sqrt(scale)
    spread = np.eye(len(target)) + scaled @ scaled.transpose(0, 2, 1)
    _, log_determinant = np.linalg.slogdet(spread)
    fit = np.linalg.solve(spread, np.broadcast_to(whitened, (len(spread), len(target)))[..., None])
    surprise = log_determinant + np.einsum("c,bc->b", whitened, fit[..., 0])
    likely = surprise <= surprise.min() + _AS_LIKELY
    oddity = _oddity(ways)
    best = int(np.argmin(np.where(likely & (oddity == oddity[likely].min()), surprise, np.inf)))
    smoother, residual = smoothers(scaled[best : best + 1], whitened[:, None])
    left_out = residual[0] / slack_of(smoother)[0][:, None] * np.sqrt(scale / weights)[:, None]
    return _finished(ways, best, values, target[:, None], weights, left_out)


def _finished(
    ways: Candidates, best: int, values: Floats, targets: Floats, weights: Floats,
    left_out: Floats,
) -> SurfaceFit:  # fmt: skip
    shape, prior = divmod(best, len(ways.spread))
    spread = ways.spread[prior]
    kept = np.flatnonzero(spread > 0.0)
    form = _without_idle_axes(ways.axes[shape], tuple(ways.exponents[k] for k in kept))
    root = np.sqrt(weights)[:, None]
    scaled = root * design(form, values) * spread[kept]
    normal = scaled.T @ scaled + np.eye(len(kept))
    inverse = np.linalg.inv(normal) * np.outer(spread[kept], spread[kept])
    plain = root * design(form, values)
    coefficients = inverse @ (plain.T @ (root * targets))
    return SurfaceFit(
        form=form,
        coefficients=coefficients,
        covariance=inverse,
        leverage=inverse @ plain.T @ plain @ inverse,
        inflation=_inflation(plain @ inverse @ plain.T),
        left_out=left_out,
    )


def _without_idle_axes(axes: tuple[Axis, ...], exponents: tuple[tuple[int, ...], ...]) -> Form:
    """Return the form with only the axes that some term uses."""
    busy = [k for k in range(len(axes)) if any(term[k] for term in exponents)]
    return Form(
        axes=tuple(axes[k] for k in busy),
        exponents=tuple(tuple(term[k] for k in busy) for term in exponents),
    )


def _inflation(smoother: Floats) -> float:
    """Return the mean of (sum over the others of S_ij^2 + (1 - S_ii)^2) / (1 - S_ii)^2."""
    slack = slack_of(smoother)
    others = (smoother**2).sum(axis=-1) - np.diag(smoother) ** 2
    return float(np.mean(1.0 + others / slack**2))
