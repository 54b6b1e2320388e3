"""Delays must fall with the overdrive everywhere, not only at tabulated conditions.

Where node delays lie close, surfaces through them may cross between tabulated
conditions. They are then held apart there by the change of all coefficients
that moves the surfaces least at the tabulated ones: a least-squares problem
with equations for the points that would cross, found a few at a time.
"""

from __future__ import annotations

import itertools
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import CONDITION_NAMES, Sites
from behavgen.fit.law_solution import inverse_of
from behavgen.fit.process_surfaces import SurfaceFamily
from behavgen.fit.surface_changes import prior_spread
from behavgen.fit.surface_forms import design
from behavgen.model import Box, Condition

__all__ = ["first_crossing", "held_apart"]

Floats = npt.NDArray[np.float64]

_STEPS = 9
_LEAST_FALL = 5e-4
"""Relative, from node to node, where nodes are held apart."""
_MOST_ROUNDS = 40


def first_crossing(family: SurfaceFamily) -> Condition | None:
    """Return the condition inside the box where node delays rise most; None where all fall.

    Parameters
    ----------
    family : SurfaceFamily
        Logarithms of tau and of the node delays.
    """
    worst, found = 0.0, None
    for process, coefficients in family.coefficients.items():
        at = _grid(family.boxes[process])
        rises = _rises(design(family.fit.form, at), coefficients).max(axis=-1, initial=-np.inf)
        if rises.max() > worst:
            worst = float(rises.max())
            named = process if len(family.coefficients) > 1 else ""
            found = _condition(named, at[int(rises.argmax())])
    return found


def held_apart(family: SurfaceFamily, sites: Sites) -> SurfaceFamily:
    """Return the family with node delays held apart where they would cross.

    Parameters
    ----------
    family : SurfaceFamily
    sites : Sites
        Tabulated conditions, where the surfaces are to move least.
    """
    form = family.fit.form
    terms = design(form, sites.values)
    yielding = inverse_of(terms.T @ terms + np.diag(prior_spread(form) ** -2.0))
    coefficients = {
        process: _apart(design(form, _grid(family.boxes[process])), values, yielding)
        for process, values in family.coefficients.items()
    }
    fit = replace(family.fit, coefficients=coefficients[family.primary])
    return replace(family, fit=fit, coefficients=coefficients)


def _grid(box: Box) -> Floats:
    """Return conditions all over a box, shape (N, 3)."""
    spans = [getattr(box, name) for name in CONDITION_NAMES]
    levels = [[np.nan] if s is None else np.linspace(s.low, s.high, _STEPS) for s in spans]
    return np.array(list(itertools.product(*levels)))


def _rises(terms: Floats, coefficients: Floats) -> Floats:
    """Return relative rises from node to node, shape (N, K - 1)."""
    rises: Floats = np.diff(terms @ coefficients[:, 1:], axis=-1)
    return rises


def _apart(terms: Floats, coefficients: Floats, yielding: Floats) -> Floats:
    """Return coefficients whose nodes fall at all points, moved least."""
    held: list[tuple[int, int]] = []
    moved = coefficients
    for _ in range(_MOST_ROUNDS):
        rises = _rises(terms, moved)
        highest = rises.argmax(axis=0) if rises.size else np.empty(0, dtype=int)
        crossing = [(int(i), k) for k, i in enumerate(highest) if rises[i, k] > 0.0]
        if not crossing:
            break
        held += [point for point in crossing if point not in held]
        moved = coefficients + _least_change(terms, coefficients, yielding, held)
    return moved


def _least_change(
    terms: Floats, coefficients: Floats, yielding: Floats, held: list[tuple[int, int]]
) -> Floats:
    """Return the least change that makes the nodes fall at the held points as they should."""
    pull = np.zeros((len(held), *coefficients.shape))
    for q, (i, k) in enumerate(held):
        pull[q, :, k + 1], pull[q, :, k + 2] = terms[i], -terms[i]
    missing = _LEAST_FALL - np.einsum("qtl,tl->q", pull, coefficients)
    answer = np.einsum("tu,qul->qtl", yielding, pull)
    force, *_ = np.linalg.lstsq(np.einsum("ptl,qtl->pq", pull, answer), missing, rcond=1e-9)
    change: Floats = np.einsum("q,qtl->tl", force, answer)
    return change


def _condition(process: str, values: Floats) -> Condition:
    temperature_k, vdd_v, vcm_v = (None if np.isnan(v) else float(v) for v in values)
    return Condition(process=process, temperature_k=temperature_k, vdd_v=vdd_v, vcm_v=vcm_v)
