"""Surfaces through values of any size: fitted relative to their mean and a unit of their own.

The prior of `surfaces` leaves a constant free as long as it is not large beside
the differences that matter, which logarithms of seconds and charges in C are not.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import Sites
from behavgen.fit.process_surfaces import SurfaceFamily, exact_family

__all__ = ["centred_family", "emitted_at", "missed_squared"]

Floats = npt.NDArray[np.float64]


def centred_family(
    sites: Sites, targets: Floats, processes: tuple[str, ...], unit: npt.ArrayLike = 1.0
) -> SurfaceFamily:
    """Fit values without random error.

    Parameters
    ----------
    sites : Sites
    targets : ndarray, shape (C, L)
    processes : tuple of str
        All processes of the cell.
    unit : array_like, shape (L,) or ()
        Size of a difference that matters; errors count in it.
    """
    scale = np.broadcast_to(np.asarray(unit, dtype=float), targets.shape[1:])
    centre = targets.mean(axis=0)
    family = exact_family(sites, (targets - centre) / scale, processes)
    constant = family.fit.constant_term

    def restored(coefficients: Floats) -> Floats:
        whole = coefficients * scale
        whole[constant] += centre
        return whole

    fit = family.fit
    return replace(
        family,
        fit=replace(fit, coefficients=restored(fit.coefficients), left_out=fit.left_out * scale),
        coefficients={name: restored(values) for name, values in family.coefficients.items()},
        left_out=family.left_out * scale,
    )


def emitted_at(family: SurfaceFamily, sites: Sites) -> Floats:
    """Return what the surfaces give at the sites, shape (C, L)."""
    names = [name or family.primary for name in sites.process]
    rows = [
        family.fit.predict_with(family.coefficients[name], sites.values[c : c + 1])
        for c, name in enumerate(names)
    ]
    return np.concatenate(rows)


def missed_squared(family: SurfaceFamily) -> Floats:
    """Return the mean square error at conditions left out, shape (L,); NaN with one condition."""
    missed = family.left_out[np.isfinite(family.left_out).all(axis=-1)]
    if not len(missed):
        return np.full(family.left_out.shape[1], np.nan)
    mean: Floats = (missed**2).mean(axis=0)
    return mean
