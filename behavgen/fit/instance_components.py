"""What the offsets of the same instances share between conditions.

Conditions are compared instance by instance: the mean of those few instances
that were measured again elsewhere differs from the mean of all by chance alone.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.errors import FitError
from behavgen.fit.intervals import mean_interval

__all__ = ["InstanceComponents", "instance_components"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Booleans = npt.NDArray[np.bool_]

FEWEST_SHARED = 3
"""Instances a condition must share with the reference before it is compared with it."""

_MAX_SWEEPS = 3000
_SETTLED = 1e-9
"""Change of the covariance in a sweep, relative to its largest variance."""

_RIDGE = 1e-12
"""Keeps perfectly correlated conditions invertible; relative to their variances."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class InstanceComponents:
    """What instances share between `C` conditions.

    Parameters
    ----------
    reference : int
        Condition all others are compared with.
    instances, shared : ndarray of int, shape (C,)
        Instances measured there, and of them also at the reference.
    mean_v : ndarray, shape (C,)
        Mean over all instances of the reference plus `shift_v`, V.
    shift_v, shift_low_v, shift_high_v : ndarray, shape (C,)
        Mean difference from the reference over shared instances and its t
        interval, V; NaN with fewer than `FEWEST_SHARED` of them.
    level : float
        Confidence of that interval.
    covariance_v2 : ndarray, shape (C, C)
        Of an instance's offsets at the conditions, V^2; positive semi-definite.
        NaN where too few instances are shared.
    loadings_v : ndarray, shape (C, R)
        ``covariance = loadings @ loadings.T``, V: an instance's offset is its
        condition's mean plus `loadings` times independent standard normal
        variables. The first column is the common component.
    share : ndarray, shape (R,)
        Share of the total variance, falling.
    """

    reference: int
    instances: Integers
    shared: Integers
    mean_v: Floats
    shift_v: Floats
    shift_low_v: Floats
    shift_high_v: Floats
    level: float
    covariance_v2: Floats
    loadings_v: Floats
    share: Floats


def instance_components(
    offset_v: npt.ArrayLike,
    measurement_variance_v2: npt.ArrayLike = 0.0,
    *,
    reference: int | None = None,
    level: float = 0.95,
) -> InstanceComponents:
    """Compare conditions instance by instance.

    Parameters
    ----------
    offset_v : array_like, shape (I, C)
        Offset of each instance at each condition, V; NaN where not measured.
    measurement_variance_v2 : array_like, shape () or (C,)
        Variance of the offsets' own measurement error, V^2.
    reference : int, optional
        Default: the condition with most instances, the first of several.
    level : float
        Confidence, 0..1.

    Raises
    ------
    FitError
        When no condition has two instances.
    """
    offset_v = np.asarray(offset_v, dtype=float)
    seen = ~np.isnan(offset_v)
    instances = seen.sum(axis=0)
    if instances.max(initial=0) < 2:
        raise FitError("no condition has two instances; measure 2 or more, best 30 or more")
    if reference is None:
        reference = int(np.argmax(instances))
    shared = (seen & seen[:, [reference]]).sum(axis=0)
    compared = shared >= min(FEWEST_SHARED, instances[reference])

    mean_v = _means(offset_v)
    shift_v, low_v, high_v = _shifts(offset_v - offset_v[:, [reference]], compared, level)
    mean_v[compared] = mean_v[reference] + shift_v[compared]
    noise_v2 = np.broadcast_to(np.asarray(measurement_variance_v2, dtype=float), compared.shape)
    measured = seen[:, compared].any(axis=1)
    seen_v2 = _covariance(offset_v[np.ix_(measured, compared)])
    factors, share = _factors(seen_v2 - np.diag(noise_v2[compared]))
    loadings_v = np.full((compared.size, share.size), np.nan)
    loadings_v[compared] = factors
    return InstanceComponents(
        reference=reference,
        instances=instances,
        shared=shared,
        mean_v=mean_v,
        shift_v=shift_v,
        shift_low_v=low_v,
        shift_high_v=high_v,
        level=level,
        covariance_v2=loadings_v @ loadings_v.T,
        loadings_v=loadings_v,
        share=share,
    )


def _means(columns: Floats) -> Floats:
    """Return the mean of what was measured in each column; NaN where nothing was."""
    seen = ~np.isnan(columns)
    count = seen.sum(axis=0)
    total = np.where(seen, columns, 0.0).sum(axis=0)
    return np.where(count > 0, total / np.maximum(count, 1), np.nan)


def _shifts(differences_v: Floats, compared: Booleans, level: float) -> tuple[Floats, ...]:
    """Return mean difference and its t interval, shape (C,) each."""
    shift_v = np.where(compared, _means(differences_v), np.nan)
    count = (~np.isnan(differences_v)).sum(axis=0)
    scatter_v2 = _means(np.square(differences_v - shift_v)) * count / np.maximum(count - 1, 1)
    low_v, high_v = mean_interval(shift_v, np.sqrt(scatter_v2), np.maximum(count, 2), level)
    return shift_v, low_v, high_v


def _covariance(offset_v: Floats) -> Floats:
    """Return the maximum likelihood covariance of a normal sample with gaps, shape (C, C).

    Gaps are filled with their conditional mean and covariance until nothing
    changes (A. P. Dempster, N. M. Laird & D. B. Rubin, J. R. Stat. Soc. B 39, 1977).
    Squares are divided by ``I - 1``, so that a sample without gaps gets its
    usual covariance.
    """
    patterns, pattern, count = np.unique(
        ~np.isnan(offset_v), axis=0, return_inverse=True, return_counts=True
    )
    both = patterns[:, :, None] & patterns[:, None, :]
    gaps = np.eye(patterns.shape[1]) * ~patterns[:, None, :]
    mean = _means(offset_v)
    covariance = np.diag(_means(np.square(offset_v - mean)))
    for _ in range(_MAX_SWEEPS):
        ridge = np.diag(_RIDGE * covariance.diagonal() + np.finfo(float).tiny)
        # The inverse of what each pattern shows, zero where it has gaps.
        inverse = np.where(both, np.linalg.inv(both * (covariance + ridge) + gaps), 0.0)
        slopes = inverse @ covariance
        known = np.nan_to_num(offset_v - mean)
        filled = (known[:, None, :] @ slopes[pattern.ravel()])[:, 0]
        hidden = np.tensordot(count, covariance - covariance @ slopes, axes=1)
        mean = mean + filled.mean(axis=0)
        filled = filled - filled.mean(axis=0)
        previous, covariance = covariance, (filled.T @ filled + hidden) / (len(filled) - 1)
        if np.abs(covariance - previous).max() <= _SETTLED * covariance.diagonal().max():
            break
    return covariance


def _factors(covariance_v2: Floats) -> tuple[Floats, Floats]:
    """Return principal components scaled to their standard deviations, and their shares.

    Negative variances, left by subtracting measurement error, become zero.
    """
    variance_v2, axes = np.linalg.eigh(covariance_v2)
    variance_v2, axes = np.maximum(variance_v2[::-1], 0.0), axes[:, ::-1]
    loadings_v = axes * np.where(axes.sum(axis=0) < 0.0, -1.0, 1.0) * np.sqrt(variance_v2)
    total_v2 = variance_v2.sum()
    return loadings_v, variance_v2 / (total_v2 if total_v2 > 0.0 else 1.0)
