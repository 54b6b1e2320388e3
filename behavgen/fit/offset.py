"""Which offset rules -> OffsetEffect, and what the other sources say of it.

The nominal trip point comes from the S-curves; without them from the delay
table's own offsets; without those from the mean of the instances.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import Sites, find_sites
from behavgen.fit.instances import instance_statistics
from behavgen.fit.noise import TripPoints
from behavgen.fit.process_surfaces import SurfaceFamily, exact_family, noisy_family
from behavgen.model import OffsetEffect
from behavgen.tables.characterisation import (
    Conditions,
    DelayTable,
    OffsetStatistics,
    OffsetTable,
)

__all__ = ["OffsetFit", "fit_offset"]

Floats = npt.NDArray[np.float64]

_NOTABLE_ERRORS = 3.0
"""Disagreement between sources beyond so many joint standard errors is worth a notice."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class OffsetFit:
    """The nominal trip point and how it came about."""

    effect: OffsetEffect
    family: SurfaceFamily
    notices: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Candidate:
    """One source of trip points; variance 0 where the values carry no random error."""

    name: str
    points: TripPoints


def fit_offset(
    trip_points: TripPoints | None,
    delay: DelayTable | None,
    instances: OffsetTable | None,
    statistics: OffsetStatistics | None,
    processes: tuple[str, ...],
) -> OffsetFit | None:
    """Fit the nominal trip point from the source that rules.

    Parameters
    ----------
    trip_points : TripPoints or None
        Of the S-curves.
    delay, instances, statistics : table or None
    processes : tuple of str

    Returns
    -------
    OffsetFit or None
        None when no table tells a trip point.
    """
    sources = [
        source
        for source in (
            _Candidate(name="the S-curves", points=trip_points) if trip_points else None,
            _from_delay(delay),
            _from_instances(instances),
            _from_statistics(statistics),
        )
        if source is not None
    ]
    if not sources:
        return None
    ruling = sources[0]
    points = ruling.points
    if (points.variance_v2 > 0.0).all():
        family = noisy_family(points.sites, points.offset_v, points.variance_v2, processes)
        scale = float(np.mean(points.variance_v2))
    else:
        family = exact_family(points.sites, points.offset_v[:, None], processes)
        scale = float(np.nanmean(family.left_out**2)) if points.sites.count > 1 else 0.0
    return OffsetFit(
        effect=OffsetEffect(surface=family.surface(0, "V", "plain", scale), source=ruling.name),
        family=family,
        notices=tuple(notice for other in sources[1:] for notice in _disagreement(ruling, other)),
    )


def _from_delay(delay: DelayTable | None) -> _Candidate | None:
    if delay is None or not np.isfinite(delay.offset_v).any():
        return None
    use = np.isfinite(delay.offset_v)
    sites = find_sites(_taken(delay.conditions, use))
    count = np.bincount(sites.of_row)
    mean = np.bincount(sites.of_row, weights=delay.offset_v[use]) / count
    points = TripPoints(sites=sites, offset_v=mean, variance_v2=np.zeros(sites.count))
    return _Candidate(name="the delay table", points=points)


def _taken(conditions: Conditions, use: npt.NDArray[np.bool_]) -> Conditions:
    return Conditions(
        vdd_v=conditions.vdd_v[use],
        temperature_k=conditions.temperature_k[use],
        vcm_v=conditions.vcm_v[use],
        process=conditions.process[use],
    )


def _from_instances(table: OffsetTable | None) -> _Candidate | None:
    """Return the mean over instances at the condition where most were measured.

    Subsets at other conditions have other means by chance and do not count.
    """
    if table is None:
        return None
    sites = find_sites(table.conditions)
    most = int(np.argmax(np.bincount(sites.of_row)))
    offsets = table.offset_v[sites.of_row == most]
    if len(offsets) < 2:
        return None
    found = instance_statistics(offsets)
    site = Sites(
        values=sites.values[most : most + 1],
        process=sites.process[most : most + 1],
        of_row=np.zeros(1, dtype=np.intp),
    )
    points = TripPoints(
        sites=site,
        offset_v=np.array([found.mean_v]),
        variance_v2=np.array([found.sigma_v**2 / len(offsets)]),
    )
    return _Candidate(name="the mean of the instances", points=points)


def _from_statistics(table: OffsetStatistics | None) -> _Candidate | None:
    if table is None:
        return None
    points = TripPoints(
        sites=find_sites(table.conditions),
        offset_v=table.mean_v,
        variance_v2=table.sigma_v**2 / table.instances,
    )
    return _Candidate(name="the offset statistics", points=points)


def _disagreement(ruling: _Candidate, other: _Candidate) -> list[str]:
    """Compare two sources at the conditions they share."""
    gaps, errors = [], []
    for i, values in enumerate(ruling.points.sites.values):
        for j, others in enumerate(other.points.sites.values):
            alike = np.array_equal(np.nan_to_num(values), np.nan_to_num(others))
            names = {ruling.points.sites.process[i], other.points.sites.process[j]} - {""}
            if alike and len(names) < 2:
                gaps.append(float(ruling.points.offset_v[i] - other.points.offset_v[j]))
                variance = ruling.points.variance_v2[i] + other.points.variance_v2[j]
                errors.append(float(np.sqrt(variance)))
    if not gaps:
        return []
    ratio = [abs(gap) / max(error, 1e-9) for gap, error in zip(gaps, errors, strict=True)]
    worst = int(np.argmax(ratio))
    if ratio[worst] < _NOTABLE_ERRORS:
        return []
    return [
        f"The nominal trip point follows {ruling.name}; {other.name} differs from it by up to "
        f"{gaps[worst] * 1e3:+.3g} mV, {ratio[worst]:.1f} standard errors."
    ]
