"""Delay and window tables -> DelayEffect.

The window is the delay read the other way, ``W(t) = 2 delay^-1(t)``: a window
row is a delay row at half its width, and both share one tau.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault, FitError
from behavgen.fit.conditions import CONDITION_NAMES, Sites, find_sites
from behavgen.fit.law import LawFit, fit_law
from behavgen.fit.law_solution import DelayRows
from behavgen.fit.process_surfaces import SurfaceFamily, exact_family
from behavgen.model import DelayEffect, Range, significant
from behavgen.tables.characterisation import Conditions, DelayTable, WindowTable

__all__ = ["DelayFit", "ResolvedRows", "fit_delay", "resolved_rows"]

Floats = npt.NDArray[np.float64]

_LEAST_ROWS = 3
_TABLE_PRECISION = 3e-3
"""Relative error of a delay row that carries no random error: how well any law fits it."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ResolvedRows:
    """Delay rows and window rows as one list, shape (N,) each.

    Parameters
    ----------
    conditions : Conditions
    overdrive_v, delay_s : ndarray
        Magnitude of the overdrive; windows enter with half their width.
    weight : ndarray
        Of the relative error; below 1 where a window was counted.
    is_window : ndarray of bool
    """

    conditions: Conditions
    overdrive_v: Floats
    delay_s: Floats
    weight: Floats
    is_window: npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DelayFit:
    """The delay effect and how it came about.

    Parameters
    ----------
    effect : DelayEffect
    rows : ResolvedRows
    sites : Sites
        Of the rows that were fitted.
    law : LawFit
    family : SurfaceFamily
    notices : tuple of str
    """

    effect: DelayEffect
    rows: ResolvedRows
    sites: Sites
    law: LawFit
    family: SurfaceFamily
    notices: tuple[str, ...]


def resolved_rows(
    delay: DelayTable | None, window: WindowTable | None, processes: tuple[str, ...]
) -> ResolvedRows:
    """Return the rows that resolved, at overdrives other than zero."""
    parts = []
    if delay is not None:
        use = np.isfinite(delay.delay_s) & (np.abs(delay.overdrive_v) > 0.0)
        parts.append(
            ResolvedRows(
                conditions=_taken(delay.conditions, use),
                overdrive_v=np.abs(delay.overdrive_v[use]),
                delay_s=delay.delay_s[use],
                weight=np.ones(int(use.sum())),
                is_window=np.zeros(int(use.sum()), dtype=bool),
            )
        )
    if window is not None:
        use = np.isfinite(window.window_v) & (window.window_v > 0.0)
        conditions = _taken(window.conditions, use)
        if delay is not None and (delay.conditions.process != "").any():
            # A window table that names no process was measured in the default one.
            named = np.where(conditions.process == "", processes[0], conditions.process)
            conditions = replace(conditions, process=named)
        # A relative error of the width moves the time by tau times as much, about t / 10.
        slack = 0.1 * window.window_relative_error[use] / _TABLE_PRECISION
        parts.append(
            ResolvedRows(
                conditions=conditions,
                overdrive_v=0.5 * window.window_v[use],
                delay_s=window.resolve_time_s[use],
                weight=1.0 / (1.0 + slack * slack),
                is_window=np.ones(int(use.sum()), dtype=bool),
            )
        )
    return _joined(parts)


def _taken(conditions: Conditions, use: npt.NDArray[np.bool_]) -> Conditions:
    return Conditions(
        vdd_v=conditions.vdd_v[use],
        temperature_k=conditions.temperature_k[use],
        vcm_v=conditions.vcm_v[use],
        process=conditions.process[use],
    )


def _joined(parts: list[ResolvedRows]) -> ResolvedRows:
    return ResolvedRows(
        conditions=Conditions(
            vdd_v=np.concatenate([p.conditions.vdd_v for p in parts]),
            temperature_k=np.concatenate([p.conditions.temperature_k for p in parts]),
            vcm_v=np.concatenate([p.conditions.vcm_v for p in parts]),
            process=np.concatenate([p.conditions.process for p in parts]),
        ),
        overdrive_v=np.concatenate([p.overdrive_v for p in parts]),
        delay_s=np.concatenate([p.delay_s for p in parts]),
        weight=np.concatenate([p.weight for p in parts]),
        is_window=np.concatenate([p.is_window for p in parts]),
    )


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
        When no condition has enough resolved rows at distinct overdrives.
    """
    if delay is None and window is None:
        return None
    rows = resolved_rows(delay, window, processes)
    sites = find_sites(rows.conditions)
    usable, notices = _usable_sites(rows, sites, windows_alone=delay is None)
    if not usable.any():
        raise FitError(_too_few(delay, window))
    rows, sites = _restricted(rows, sites, usable)
    law = fit_law(_padded(rows, sites))
    span = Range(low=float(rows.overdrive_v.min()), high=float(rows.overdrive_v.max()))
    family = exact_family(
        sites,
        np.log(law.parameters),
        processes,
        metric=law.metric,
        overdrive_v=span,
        expected_shapes=_expected_shapes(sites, law),
    )
    freedom = max(round(float(law.freedom.sum())), 1)
    measured = delay.measured if delay is not None else window.measured if window else ""
    return DelayFit(
        effect=_effect(law, family, measured, freedom),
        rows=rows,
        sites=sites,
        law=law,
        family=family,
        notices=(*notices, *_measured_alike(delay, window)),
    )


def _expected_shapes(sites: Sites, law: LawFit) -> dict[str, str]:
    """Return how delays are expected to bend along each axis.

    Common practice: rates grow with a voltage beyond a threshold and mobility
    falls with temperature, so that delays fall more steeply than in proportion.
    Where the delay rises with the voltage (inputs of the other polarity), a
    straight line is taken.
    """
    shapes = {"temperature_k": "reciprocal"}
    slowness = np.log(law.parameters[:, 1:]).mean(axis=-1)
    for name in ("vdd_v", "vcm_v"):
        level = sites.values[:, CONDITION_NAMES.index(name)]
        if np.isfinite(level).all() and np.ptp(level) > 0.0:
            falls = np.corrcoef(level, slowness)[0, 1] < 0.0
            shapes[name] = "reciprocal_square" if falls else "plain"
    return shapes


def _usable_sites(
    rows: ResolvedRows, sites: Sites, *, windows_alone: bool
) -> tuple[npt.NDArray[np.bool_], list[str]]:
    """Return which sites can carry a law, and what to say of the others."""
    usable = np.ones(sites.count, dtype=bool)
    short, lone = 0, 0
    for c in range(sites.count):
        here = sites.of_row == c
        enough = here.sum() >= _LEAST_ROWS and len(np.unique(rows.overdrive_v[here])) > 1
        alone = not windows_alone and rows.is_window[here].all()
        usable[c] = enough and not alone
        short += not enough
        lone += enough and alone
    notices = []
    if short:
        notices.append(
            f"{short} of {sites.count} conditions have fewer than {_LEAST_ROWS} resolved delays at "
            "distinct overdrives and are left out of the delay fit."
        )
    if lone:
        notices.append(
            f"{lone} conditions of the window table are not in the delay table; their windows are "
            "not fitted."
        )
    return usable, notices


def _too_few(delay: DelayTable | None, window: WindowTable | None) -> Fault:
    table = delay if delay is not None else window
    assert table is not None
    return Fault(
        file=table.sources[0].file if table.sources else "",
        what=f"no condition has {_LEAST_ROWS} resolved delays at two or more distinct overdrives",
        allowed="tau cannot be told from fewer; measure delays at overdrives a decade or more "
        "apart, the lowest well below 1 mV",
    )


def _restricted(
    rows: ResolvedRows, sites: Sites, usable: npt.NDArray[np.bool_]
) -> tuple[ResolvedRows, Sites]:
    keep = usable[sites.of_row]
    kept = ResolvedRows(
        conditions=_taken(rows.conditions, keep),
        overdrive_v=rows.overdrive_v[keep],
        delay_s=rows.delay_s[keep],
        weight=rows.weight[keep],
        is_window=rows.is_window[keep],
    )
    return kept, find_sites(kept.conditions)


def _padded(rows: ResolvedRows, sites: Sites) -> DelayRows:
    order = np.argsort(sites.of_row, kind="stable")
    counts = np.bincount(sites.of_row, minlength=sites.count)
    column = np.arange(len(order)) - np.repeat(np.cumsum(counts) - counts, counts)
    place = (sites.of_row[order], column)

    def spread(values: Floats, filler: float) -> Floats:
        padded = np.full((sites.count, int(counts.max())), filler)
        padded[place] = values[order]
        return padded

    return DelayRows(
        overdrive_v=spread(rows.overdrive_v, 1.0),
        delay_s=spread(rows.delay_s, 1.0),
        weight=spread(rows.weight, 0.0),
    )


def _effect(law: LawFit, family: SurfaceFamily, measured: str, freedom: int) -> DelayEffect:
    surfaces = [family.surface(k, "s", "log") for k in range(law.parameters.shape[-1])]
    relative = law.covariance / (law.parameters[:, :, None] * law.parameters[:, None, :])
    scatter = relative.mean(axis=0)
    return DelayEffect(
        tau=surfaces[0],
        node_overdrive_v=tuple(significant(float(v)) for v in np.exp(law.log_node)),
        nodes=tuple(surfaces[1:]),
        law=law.chosen.name,
        measured=measured,
        scatter=_rounded(scatter),
        scatter_freedom=freedom,
        lack_of_fit=_rounded(_lack_of_fit(family, scatter)),
        leverage=_rounded(family.fit.leverage),
    )


def _lack_of_fit(family: SurfaceFamily, scatter: Floats) -> Floats:
    """Return the covariance of left-out errors beyond what scatter explains; (0, 0) if unknown."""
    errors = family.left_out[np.isfinite(family.left_out).all(axis=-1)]
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
