"""Delay and window tables -> DelayEffect.

Conditions that resolved over the usual overdrives give the law and its node
values. Those of which little resolved take the shape that the surfaces through
the others let expect, and rows that did not resolve bound delays from below.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault, FitError
from behavgen.fit.conditions import Sites, find_sites
from behavgen.fit.delay_direction import rising_faults
from behavgen.fit.delay_laws import LEAST_ROWS, DelayLaws, delay_laws, enough_rows
from behavgen.fit.delay_rows import (
    TimedRows,
    joined,
    resolved_rows,
    selected,
    unresolved_rows,
)
from behavgen.fit.delay_surfaces import delay_family, falling_family
from behavgen.fit.law import LawFit
from behavgen.fit.outlying_rows import without_outlying
from behavgen.fit.process_surfaces import SurfaceFamily
from behavgen.fit.unresolved_delays import violated_bounds
from behavgen.fit.weak_corners import typical_errors
from behavgen.model import DelayEffect, Range, significant
from behavgen.tables.characterisation import DelayTable, WindowTable

__all__ = ["DelayFit", "fit_delay"]

Floats = npt.NDArray[np.float64]
Mask = npt.NDArray[np.bool_]

_MOST_ROUNDS = 5
"""Of holding up delays that unresolved rows bound."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DelayFit:
    """The delay effect and how it came about.

    Parameters
    ----------
    effect : DelayEffect
    rows : TimedRows
        What was fitted: rows that resolved and rows that bound.
    sites : Sites
        Of these rows.
    short : ndarray of bool, shape (C,)
        Sites whose law has its shape from the others.
    law : LawFit
    family : SurfaceFamily
    notices : tuple of str
    """

    effect: DelayEffect
    rows: TimedRows
    sites: Sites
    short: Mask
    law: LawFit
    family: SurfaceFamily
    notices: tuple[str, ...]


def fit_delay(
    delay: DelayTable | None, window: WindowTable | None, processes: tuple[str, ...]
) -> DelayFit | None:
    """Fit delays and windows together.

    Parameters
    ----------
    delay, window : table or None
    processes : tuple of str
        All processes of the cell, the default first.

    Returns
    -------
    DelayFit or None
        None when there is neither table.

    Raises
    ------
    FitError
        When no condition has enough resolved rows at distinct overdrives, or delays do
        not fall with the overdrive.
    """
    if delay is None and window is None:
        return None
    rows, lone = _usable(resolved_rows(delay, window, processes), windows_alone=delay is None)
    if not enough_rows(rows, find_sites(rows.conditions)).any():
        raise FitError(_too_few(delay, window))
    rising = rising_faults(rows, _file(delay, window))
    if rising:
        raise FitError(*rising)
    rows, named = without_outlying(rows)
    rows, laws, family = _fitted(rows, delay, processes)
    family, apart = falling_family(family, laws.sites, laws.law, processes)
    measured = delay.measured if delay is not None else window.measured if window else ""
    return DelayFit(
        effect=_effect(laws, family, measured),
        rows=rows,
        sites=laws.sites,
        short=laws.short,
        law=laws.law,
        family=family,
        notices=(*lone, *named, *apart, *_measured_alike(delay, window)),
    )


def _fitted(
    rows: TimedRows, delay: DelayTable | None, processes: tuple[str, ...]
) -> tuple[TimedRows, DelayLaws, SurfaceFamily]:
    """Fit laws and surfaces; add rows that did not resolve as long as the model falls short."""
    span = Range(low=float(rows.overdrive_v.min()), high=float(rows.overdrive_v.max()))
    bounds = None if delay is None else unresolved_rows(delay)
    for _ in range(_MOST_ROUNDS):
        laws = delay_laws(rows, processes)
        family = delay_family(laws.sites, laws.law, processes, span)
        broken = None if bounds is None else violated_bounds(bounds, family, laws.law.log_node)
        if broken is None:
            break
        fitted, rows = rows, joined((rows, broken))
    else:
        rows = fitted
    return rows, laws, family


def _usable(rows: TimedRows, *, windows_alone: bool) -> tuple[TimedRows, list[str]]:
    """Return the rows at conditions that can carry a law, and what to say of the others."""
    if windows_alone:
        return rows, []
    sites = find_sites(rows.conditions)
    delays = np.bincount(sites.of_row, weights=~rows.is_window, minlength=sites.count)
    lone = int((delays == 0.0).sum())
    if not lone:
        return rows, []
    return selected(rows, delays[sites.of_row] > 0.0), [
        f"{lone} conditions of the window table are not in the delay table; their windows are "
        "not fitted."
    ]


def _file(delay: DelayTable | None, window: WindowTable | None) -> str:
    table = delay if delay is not None else window
    return table.sources[0].file if table is not None and table.sources else ""


def _too_few(delay: DelayTable | None, window: WindowTable | None) -> Fault:
    return Fault(
        file=_file(delay, window),
        what=f"no condition has {LEAST_ROWS} resolved delays at two or more distinct overdrives",
        allowed="tau cannot be told from fewer; measure delays at overdrives a decade or more "
        "apart, the lowest well below 1 mV",
    )


def _effect(laws: DelayLaws, family: SurfaceFamily, measured: str) -> DelayEffect:
    law, told = laws.law, ~laws.short
    surfaces = [family.surface(k, "s", "log") for k in range(law.parameters.shape[-1])]
    relative = law.covariance / (law.parameters[:, :, None] * law.parameters[:, None, :])
    scatter = relative[told].mean(axis=0)
    return DelayEffect(
        tau=surfaces[0],
        node_overdrive_v=tuple(significant(float(v)) for v in np.exp(law.log_node)),
        nodes=tuple(surfaces[1:]),
        law=law.chosen.name,
        law_error=significant(law.chosen.left_out, 3),
        runner_up=law.runner_up.name if law.runner_up else "",
        runner_up_error=significant(law.runner_up.left_out, 3) if law.runner_up else None,
        measured=measured,
        scatter=_rounded(scatter),
        scatter_freedom=max(round(float(law.freedom[told].sum())), 1),
        lack_of_fit=_rounded(_lack_of_fit(family, law, scatter)),
        leverage=_rounded(family.fit.leverage),
    )


def _lack_of_fit(family: SurfaceFamily, law: LawFit, scatter: Floats) -> Floats:
    """Return the covariance of left-out errors beyond what scatter explains; (0, 0) if unknown.

    A corner that barely decides does not count: what is missed there says nothing
    of the rest.
    """
    errors = typical_errors(family.left_out, law.metric)
    if len(errors) == 0:
        return np.empty((0, 0))
    excess = errors.T @ errors / len(errors) - family.fit.inflation * scatter
    values, vectors = np.linalg.eigh(excess)
    covariance: Floats = (vectors * np.maximum(values, 0.0)) @ vectors.T
    return covariance


def _rounded(matrix: Floats) -> tuple[tuple[float, ...], ...]:
    return tuple(tuple(significant(float(v), 6) for v in row) for row in matrix)


def _measured_alike(delay: DelayTable | None, window: WindowTable | None) -> list[str]:
    if delay is None or window is None or not (delay.measured and window.measured):
        return []
    if delay.measured == window.measured:
        return []
    return [
        f'The delay table is measured as "{delay.measured}", the window table as '
        f'"{window.measured}"; fitted together they should be measured alike.'
    ]
