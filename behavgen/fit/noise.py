"""Noise table -> NoiseEffect and the trip points of its S-curves."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault, FitError
from behavgen.fit.conditions import Sites, conditions_of, find_sites
from behavgen.fit.process_surfaces import SurfaceFamily, noisy_family
from behavgen.fit.s_curve import SCurveFits, fit_s_curves, misfit_notice
from behavgen.fit.s_curve_identification import Reason
from behavgen.fit.wording import condition_words
from behavgen.model import Condition, ConditionFit, Estimate, NoiseEffect, Parameter, significant
from behavgen.tables.characterisation import NoiseTable

__all__ = ["NoiseFit", "TripPoints", "fit_noise"]

Floats = npt.NDArray[np.float64]

_UNSTATED_RELATIVE_ERROR = 0.01
"""Relative error taken for a ready-made sigma that comes without one."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TripPoints:
    """Nominal trip points at sites: offset in V and its variance, shape (C,) each."""

    sites: Sites
    offset_v: Floats
    variance_v2: Floats


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class NoiseFit:
    """The noise effect and how it came about.

    Parameters
    ----------
    effect : NoiseEffect
    family : SurfaceFamily
    trip_points : TripPoints or None
        None when the table holds no S-curves.
    fits : tuple of ConditionFit
    notices : tuple of str
    """

    effect: NoiseEffect
    family: SurfaceFamily
    trip_points: TripPoints | None
    fits: tuple[ConditionFit, ...]
    notices: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Curves:
    """S-curves by condition and instance, shape (S,) each."""

    site: npt.NDArray[np.intp]
    fits: SCurveFits
    rows: npt.NDArray[np.intp]


def fit_noise(table: NoiseTable | None, processes: tuple[str, ...]) -> NoiseFit | None:
    """Fit S-curves by maximum likelihood and a surface through their sigmas.

    Raises
    ------
    FitError
        Names every S-curve that cannot be identified and what to measure instead.
    """
    if table is None:
        return None
    sites = find_sites(table.conditions)
    curves = _fit_curves(table, sites) if len(table.vdiff_v) else None
    log_sigma, variance, conditions = _log_sigmas(table, sites, curves)
    family = noisy_family(conditions, log_sigma, variance, processes)
    scale = float(np.mean(variance))
    return NoiseFit(
        effect=NoiseEffect(surface=family.surface(0, "V", "log", scale)),
        family=family,
        trip_points=_trip_points(sites, curves) if curves else None,
        fits=_condition_fits(sites, curves, table) if curves else (),
        notices=_misfits(sites, curves) if curves else (),
    )


def _fit_curves(table: NoiseTable, sites: Sites) -> _Curves:
    _, instance = np.unique(table.instance, return_inverse=True)
    pairs, curve = np.unique(
        np.column_stack([sites.of_row, instance.ravel()]), axis=0, return_inverse=True
    )
    curve = curve.ravel()
    fits = fit_s_curves(table.vdiff_v, table.trials, table.ones, curve)
    bad = np.flatnonzero(fits.identification.reason != Reason.FINE)
    if len(bad):
        raise FitError(*(_refusal(table, sites, fits, pairs, int(c)) for c in bad))
    return _Curves(site=pairs[:, 0], fits=fits, rows=np.bincount(curve))


def _refusal(
    table: NoiseTable, sites: Sites, fits: SCurveFits, pairs: npt.NDArray[np.intp], curve: int
) -> Fault:
    fault = fits.identification.fault(curve)
    condition = conditions_of(sites)[pairs[curve, 0]]
    place = condition_words(condition)
    return Fault(
        file=table.sources[0].file if table.sources else "",
        what=f"S-curve at {place}: {fault.what}" if place else f"S-curve: {fault.what}",
        allowed=fault.allowed,
    )


def _log_sigmas(
    table: NoiseTable, sites: Sites, curves: _Curves | None
) -> tuple[Floats, Floats, Sites]:
    """Return ln(sigma), its variance and the sites, S-curves first, ready-made sigmas behind."""
    ready_error = np.where(
        np.isfinite(table.sigma_error_v),
        table.sigma_error_v / table.sigma_v,
        _UNSTATED_RELATIVE_ERROR,
    )
    log_sigma, variance = np.log(table.sigma_v), np.maximum(ready_error, 1e-6) ** 2
    values = np.stack(
        [getattr(table.sigma_conditions, n) for n in ("temperature_k", "vdd_v", "vcm_v")], axis=-1
    )
    process = table.sigma_conditions.process
    if curves is not None:
        log_sigma = np.concatenate([np.log(curves.fits.sigma_v), log_sigma])
        variance = np.concatenate([curves.fits.covariance[:, 1, 1], variance])
        values = np.concatenate([sites.values[curves.site], values])
        process = np.concatenate([np.array(sites.process)[curves.site], process])
    return log_sigma, variance, _as_sites(values, process)


def _as_sites(values: Floats, process: npt.NDArray[np.str_]) -> Sites:
    return Sites(
        values=values,
        process=tuple(str(name) for name in process),
        of_row=np.arange(len(values)),
    )


def _trip_points(sites: Sites, curves: _Curves) -> TripPoints:
    """Return one trip point a site: the mean over the instances measured there."""
    count = np.bincount(curves.site, minlength=sites.count)
    total = np.bincount(curves.site, weights=curves.fits.offset_v, minlength=sites.count)
    mean = total / count
    own = np.bincount(curves.site, weights=curves.fits.offset_error_v**2, minlength=sites.count)
    spread = np.bincount(
        curves.site, weights=(curves.fits.offset_v - mean[curves.site]) ** 2, minlength=sites.count
    )
    between = spread / np.maximum(count - 1, 1)
    variance = np.where(count > 1, np.maximum(between, own / count) / count, own)
    return TripPoints(sites=sites, offset_v=mean, variance_v2=variance)


def _condition_fits(sites: Sites, curves: _Curves, table: NoiseTable) -> tuple[ConditionFit, ...]:
    source = table.sources[0].file if table.sources else ""
    conditions = conditions_of(sites)
    return tuple(
        ConditionFit(
            quantity="noise",
            condition=conditions[site],
            rows=int(curves.rows[c]),
            parameters=_parameters(curves.fits, c, conditions[site], source),
            goodness=_finite(curves.fits.goodness_p[c]),
        )
        for c, site in enumerate(curves.site)
    )


def _parameters(
    fits: SCurveFits, c: int, condition: Condition, source: str
) -> tuple[Parameter, ...]:
    origin = f"maximum likelihood, profile interval; {source}"
    place = condition_words(condition)

    def estimate(value: float, low: float, high: float) -> Estimate:
        return Estimate(
            value=significant(float(value)), low=_finite(low), high=_finite(high), level=fits.level
        )

    return (
        Parameter(
            name="offset_v",
            estimate=estimate(fits.offset_v[c], fits.offset_low_v[c], fits.offset_high_v[c]),
            unit="V",
            description=f"trip point at {place}",
            source=origin,
        ),
        Parameter(
            name="noise_sigma_v",
            estimate=estimate(fits.sigma_v[c], fits.sigma_low_v[c], fits.sigma_high_v[c]),
            unit="V",
            low=0.0,
            description=f"noise sigma at {place}",
            source=origin,
        ),
    )


def _finite(value: float) -> float | None:
    return significant(float(value), 6) if np.isfinite(value) else None


def _misfits(sites: Sites, curves: _Curves) -> tuple[str, ...]:
    conditions = conditions_of(sites)
    notices = []
    for c, site in enumerate(curves.site):
        words = misfit_notice(curves.fits, c)
        if words:
            notices.append(f"At {condition_words(conditions[site])} {words}.")
    return tuple(notices)
