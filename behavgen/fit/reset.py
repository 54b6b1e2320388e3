"""Reset table or the project's single value -> ResetEffect."""

from __future__ import annotations

import numpy as np

from behavgen.fit.conditions import find_sites
from behavgen.fit.process_surfaces import exact_family
from behavgen.model import Box, ResetEffect, Surface, Variant, significant
from behavgen.tables.characterisation import ResetTable

__all__ = ["fit_reset"]


def fit_reset(
    table: ResetTable | None, stated_s: float | None, processes: tuple[str, ...]
) -> ResetEffect | None:
    """Fit a surface through the tabulated reset delays; the table wins over a stated value.

    Parameters
    ----------
    table : ResetTable or None
    stated_s : float or None
        The project file's ``reset_delay`` in s; 0 is no effect.
    processes : tuple of str
        All processes of the cell.
    """
    if table is None:
        return _constant(stated_s, processes) if stated_s else None
    sites = find_sites(table.conditions)
    count = np.bincount(sites.of_row)
    mean = np.bincount(sites.of_row, weights=np.log(table.reset_delay_s)) / count
    family = exact_family(sites, mean[:, None], processes)
    variance = np.nanmean(family.left_out**2) if sites.count > 1 else 0.0
    return ResetEffect(surface=family.surface(0, "s", "log", float(variance)))


def _constant(reset_delay_s: float, processes: tuple[str, ...]) -> ResetEffect:
    coefficient = significant(float(np.log(reset_delay_s)))
    return ResetEffect(
        surface=Surface(
            unit="s",
            transform="log",
            axes=(),
            exponents=((),),
            variants=tuple(
                Variant(process=name, coefficients=(coefficient,), box=Box()) for name in processes
            ),
        )
    )
