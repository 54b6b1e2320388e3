"""Rows at conditions -> delay laws, of their own or with their shape from the others."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.centred_surfaces import emitted_at
from behavgen.fit.conditions import Sites, find_sites
from behavgen.fit.delay_rows import TimedRows, padded
from behavgen.fit.delay_surfaces import delay_family
from behavgen.fit.law import LawFit, fit_law
from behavgen.fit.law_solution import DelayRows
from behavgen.fit.short_conditions import few_overdrives, narrow_range, with_borrowed_laws

__all__ = ["LEAST_ROWS", "DelayLaws", "delay_laws", "enough_rows"]

Mask = npt.NDArray[np.bool_]

LEAST_ROWS = 3
"""Resolved rows from which on a condition can carry a law of its own."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DelayLaws:
    """Laws at all conditions of a table.

    Parameters
    ----------
    sites : Sites
    short : ndarray of bool, shape (C,)
        Sites whose law has its shape from the others.
    law : LawFit
    """

    sites: Sites
    short: Mask
    law: LawFit


def delay_laws(rows: TimedRows, processes: tuple[str, ...]) -> DelayLaws:
    """Fit the law at every condition.

    Parameters
    ----------
    rows : TimedRows
        At least one condition has `enough_rows`.
    processes : tuple of str
        All processes of the cell.
    """
    sites = find_sites(rows.conditions)
    table = padded(rows, sites)
    telling = _telling(rows, sites, table)
    law = fit_law(table.at(np.flatnonzero(telling)))
    short = ~telling | narrow_range(table, law.log_node)
    if short.all():
        short = ~telling
    if short.any():
        law = law.at(~short[telling])
        others = find_sites(rows.conditions.taken(~short[sites.of_row]))
        expected = np.exp(emitted_at(delay_family(others, law, processes), sites))
        law = with_borrowed_laws(law, short, table.at(np.flatnonzero(short)), expected[short])
    return DelayLaws(sites=sites, short=short, law=law)


def _telling(rows: TimedRows, sites: Sites, table: DelayRows) -> Mask:
    """Return which sites help to choose the law."""
    bounded = np.bincount(sites.of_row, weights=rows.is_bound, minlength=sites.count) > 0.0
    enough = enough_rows(rows, sites)
    telling = enough & ~few_overdrives(table) & ~bounded
    return telling if telling.any() else enough


def enough_rows(rows: TimedRows, sites: Sites) -> Mask:
    """Return which sites have enough resolved rows to carry a law of their own, shape (C,)."""
    enough = np.zeros(sites.count, dtype=bool)
    for c in range(sites.count):
        here = (sites.of_row == c) & ~rows.is_bound & (rows.weight > 0.0)
        enough[c] = here.sum() >= LEAST_ROWS and len(np.unique(rows.overdrive_v[here])) > 1
    return enough
