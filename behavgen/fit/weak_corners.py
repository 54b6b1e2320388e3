"""Conditions that the other conditions foresee far worse than they foresee each other.

Where a circuit barely decides, delays rise steeply and no surface through its
neighbours foresees them. Such a corner must not decide how the surface through
the others is written: where these foresee each other clearly better without
it, the surface is theirs, and what it misses at the corner is added in terms
that vanish at the other tabulated conditions.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.pair_overdrive import choose_through_pair
from behavgen.fit.surface_changes import touched_up
from behavgen.fit.surfaces import SurfaceFit

__all__ = ["choose_around_corners", "left_out_errors", "typical_errors", "weak_corners"]

Floats = npt.NDArray[np.float64]

_TIMES = 5.0
"""Left-out errors over their median, from which on a condition is a corner of its own kind."""
_BETTER = 3.0
"""Left-out errors of the others with a corner over those without it: it bends them. A corner that
is merely slow gives up to 2 and tells how delays rise; one twice as slow as that gives 7."""
_MOST_SHARE = 0.08
"""Of all conditions, up to which corners are looked for: one or two of a usual table."""
_SUSPECTS = 3
"""A corner also spoils how its neighbours are foreseen: the worst of them are tried."""
_TABULATED = 0.005
"""Relative; a surface that misses more at a tabulated condition is led through them."""
_NOTABLE = 0.05
"""Relative; smaller left-out errors are no corner's."""


def left_out_errors(left_out: Floats, metric: Floats) -> Floats:
    """Return the rms relative error of each condition predicted from the others, shape (C,).

    Parameters
    ----------
    left_out : ndarray, shape (C, L)
        Errors of the logarithms at each condition; NaN where unknown.
    metric : ndarray, shape (C, L, L)
    """
    squared = np.einsum("cl,clm,cm->c", left_out, metric, left_out)
    errors: Floats = np.sqrt(np.maximum(squared, 0.0))
    return errors


def weak_corners(left_out: Floats, metric: Floats) -> npt.NDArray[np.bool_]:
    """Return which conditions are foreseen far worse than the others, shape (C,)."""
    missed = left_out_errors(left_out, metric)
    known = missed[np.isfinite(missed)]
    limit = max(_TIMES * float(np.median(known)), _NOTABLE) if len(known) else np.inf
    weak: npt.NDArray[np.bool_] = np.nan_to_num(missed) > limit
    return weak


def typical_errors(left_out: Floats, metric: Floats) -> Floats:
    """Return the left-out errors of all conditions but weak corners, shape (D, L)."""
    known = np.isfinite(left_out).all(axis=-1)
    errors: Floats = left_out[known & ~weak_corners(left_out, metric)]
    return errors


def choose_around_corners(
    values: Floats, targets: Floats, metric: Floats, expected_shapes: Mapping[str, str]
) -> SurfaceFit:
    """Choose as `choose_through_pair` does, without corners where these bend the others.

    Parameters
    ----------
    values : ndarray, shape (C, 3)
    targets : ndarray, shape (C, L)
        Logarithms of delays.
    metric : ndarray, shape (C, L, L)
    expected_shapes : mapping of str to str
    """
    best = choose_through_pair(values, targets, metric, expected_shapes)
    out = np.zeros(len(values), dtype=bool)
    while out.sum() < _MOST_SHARE * len(values):
        missed = np.where(out, 0.0, np.nan_to_num(left_out_errors(best.left_out, metric)))
        if not (weak_corners(best.left_out, metric) & ~out).any():
            break
        trials = []
        for corner in np.argsort(missed)[-_SUSPECTS:]:
            rest = ~out & (np.arange(len(values)) != corner)
            fit = choose_through_pair(values[rest], targets[rest], metric[rest], expected_shapes)
            trials.append((_mean_error(fit.left_out, metric[rest]), rest, fit))
        error, rest, fit = min(trials, key=lambda trial: trial[0])
        if _mean_error(best.left_out[rest], metric[rest]) < _BETTER * error:
            break
        out = ~rest
        left_out = fit.predict(values) - targets
        left_out[rest] = fit.left_out
        best = replace(touched_up(fit, values, targets), left_out=left_out)
    missed = left_out_errors(best.predict(values) - targets, metric)
    if missed.max() > _TABULATED:
        best = replace(touched_up(best, values, targets), left_out=best.left_out)
    return best


def _mean_error(left_out: Floats, metric: Floats) -> float:
    return float(np.nanmean(left_out_errors(left_out, metric)))
