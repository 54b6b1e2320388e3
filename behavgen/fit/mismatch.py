"""Instance tables -> MismatchEffect."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import Sites, conditions_of, find_sites
from behavgen.fit.instance_components import instance_components
from behavgen.fit.instances import InstanceStatistics, instance_statistics
from behavgen.fit.process_surfaces import exact_family
from behavgen.fit.wording import condition_words
from behavgen.model import MismatchEffect
from behavgen.tables.characterisation import OffsetStatistics, OffsetTable

__all__ = ["MismatchFit", "fit_mismatch"]

Booleans = npt.NDArray[np.bool_]

_LEAST_SHARE = 1e-3
"""Components below this share of the variance are not carried."""
_DOUBTFUL_P = 1e-3


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MismatchFit:
    """The mismatch effect and how it came about.

    Parameters
    ----------
    effect : MismatchEffect
    statistics : InstanceStatistics or None
        At the condition with most instances; None for ready-made statistics.
    where : str
        That condition in words.
    notices : tuple of str
    """

    effect: MismatchEffect
    statistics: InstanceStatistics | None
    where: str
    notices: tuple[str, ...]


def fit_mismatch(
    table: OffsetTable | None, ready_made: OffsetStatistics | None, processes: tuple[str, ...]
) -> MismatchFit | None:
    """Fit the differences between instances.

    Instances measured at several conditions are compared one by one, so that
    one draw is one physical instance at all conditions.

    Parameters
    ----------
    table : OffsetTable or None
        Rules when both are given.
    ready_made : OffsetStatistics or None
    processes : tuple of str

    Raises
    ------
    FitError
        When no condition has two instances.
    """
    if table is not None:
        return _from_instances(table, processes)
    if ready_made is not None:
        return _from_statistics(ready_made, processes)
    return None


def _from_statistics(table: OffsetStatistics, processes: tuple[str, ...]) -> MismatchFit:
    sites = find_sites(table.conditions)
    family = exact_family(sites, table.sigma_v[:, None], processes)
    effect = MismatchEffect(
        components=(family.surface(0, "V", "plain", 0.0),), instances=int(table.instances.max())
    )
    return MismatchFit(effect=effect, statistics=None, where="", notices=())


def _from_instances(table: OffsetTable, processes: tuple[str, ...]) -> MismatchFit:
    sites = find_sites(table.conditions)
    names, row = np.unique(table.instance, return_inverse=True)
    matrix = np.full((len(names), sites.count), np.nan)
    matrix[row.ravel(), sites.of_row] = table.offset_v
    variance = _measurement_variance(table)
    found = instance_components(matrix, variance)
    compared = np.asarray(np.isfinite(found.loadings_v).all(axis=-1), dtype=bool)
    kept = max(int((found.share > _LEAST_SHARE).sum()), 1)
    family = exact_family(_subset(sites, compared), found.loadings_v[compared, :kept], processes)
    most = found.reference
    column = matrix[:, most]
    measured = np.isfinite(column)
    statistics = instance_statistics(column[measured], variance)
    where = condition_words(conditions_of(sites)[most])
    return MismatchFit(
        effect=MismatchEffect(
            components=tuple(family.surface(k, "V", "plain", 0.0) for k in range(kept)),
            instances=statistics.instances,
        ),
        statistics=statistics,
        where=where,
        notices=tuple(_notices(statistics, names[measured], where, compared)),
    )


def _subset(sites: Sites, keep: Booleans) -> Sites:
    rows = np.flatnonzero(keep)
    return Sites(
        values=sites.values[rows],
        process=tuple(sites.process[k] for k in rows),
        of_row=np.arange(len(rows)),
    )


def _measurement_variance(table: OffsetTable) -> float:
    """Return the mean variance of brackets taken as uniform between their ends."""
    width = table.offset_high_v - table.offset_low_v
    known = np.isfinite(width)
    return float(np.mean(width[known] ** 2) / 12.0) if known.any() else 0.0


def _notices(
    statistics: InstanceStatistics,
    names: npt.NDArray[np.str_],
    where: str,
    compared: Booleans,
) -> list[str]:
    notices = []
    if statistics.outliers:
        far = ", ".join(str(names[k]) for k in statistics.outliers)
        notices.append(
            f"Instances far out for a normal sample at {where}: {far}; none is left out."
        )
    if statistics.normality_p < _DOUBTFUL_P:
        notices.append(
            f"The offsets of the {statistics.instances} instances at {where} are not normally "
            f"distributed (Anderson-Darling p = {statistics.normality_p:.1g}); the models draw "
            "normal ones."
        )
    if not compared.all():
        notices.append(
            f"{int((~compared).sum())} conditions of the instance table share too few instances "
            "with the others and do not shape the mismatch."
        )
    if statistics.sigma_v == 0.0:
        notices.append("The instances differ by no more than their measurement error.")
    return notices
