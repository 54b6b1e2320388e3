"""Changes to a finished surface, in its own terms or in a few more."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.surface_forms import (
    CONSTANT_SPREAD,
    Form,
    axes_of,
    axis_powers,
    design,
    visible_terms,
)
from behavgen.fit.surfaces import SurfaceFit, slack_of, smoothers

__all__ = ["difference_by_left_out", "prior_spread", "ridge_map", "touched_up"]

Floats = npt.NDArray[np.float64]

_EASE = 1e3
"""A corner may be many times slower than its neighbours."""


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
        prior_spread(fit.form) * (order <= highest)
        for highest in (range(max(order) + 1) if len(values) > 2 else (0,))
    ]
    scaled = plain * np.array(spread)[:, None, :]
    smoother, residual = smoothers(scaled, gap)
    cost = np.linalg.norm(residual / slack_of(smoother)[..., None], axis=-1).sum(axis=-1)
    best = scaled[int(np.argmin(cost))]
    normal = best.T @ best + np.eye(len(order))
    solution: Floats = np.linalg.solve(normal, best.T @ gap)
    return solution * spread[int(np.argmin(cost))][:, None]


def prior_spread(form: Form) -> Floats:
    """Return the prior's spread of each term, for surfaces that are only touched up."""
    order = np.array([sum(term) for term in form.exponents])
    spread: Floats = np.where(order == 0, CONSTANT_SPREAD, 1e2 * 0.3 ** (order - 1.0))
    return spread


def ridge_map(form: Form, plain: Floats, ease: float = 1.0) -> Floats:
    """Return what maps targets to coefficients under that prior, shape (terms, C).

    Parameters
    ----------
    form : Form
    plain : ndarray, shape (C, terms)
        Its design.
    ease : float
        The prior's spreads in units of the usual ones; larger goes closer through the targets.
    """
    spread = ease * prior_spread(form)
    scaled = plain * spread
    normal = scaled.T @ scaled + np.eye(len(spread))
    mapping: Floats = spread[:, None] * np.linalg.solve(normal, scaled.T)
    return mapping


def touched_up(fit: SurfaceFit, values: Floats, targets: Floats) -> SurfaceFit:
    """Return a surface that also goes through conditions it was not fitted to."""
    powers = axis_powers(values)
    known = {axis.condition: axis for axis in fit.form.axes}
    plain = axes_of(values, dict.fromkeys(powers, "plain"))
    axes = tuple(known.get(axis.condition, axis) for axis in plain)
    place = [next((k for k, old in enumerate(fit.form.axes) if old == a), None) for a in axes]
    before = [tuple(0 if k is None else term[k] for k in place) for term in fit.form.exponents]
    new = [term for term in visible_terms(values, powers) if term not in before]
    form = Form(axes=axes, exponents=(*before, *new))
    terms, more = design(form, values), len(new)
    kept = np.pad(fit.coefficients, ((0, more), (0, 0)))
    return replace(
        fit,
        form=form,
        coefficients=kept + ridge_map(form, terms, _EASE) @ (targets - terms @ kept),
        covariance=np.pad(fit.covariance, ((0, more), (0, more))),
        leverage=np.pad(fit.leverage, ((0, more), (0, more))),
    )
