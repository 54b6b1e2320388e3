"""Rows of the delay and window tables, in one list and by condition.

The window is the delay read the other way, ``W(t) = 2 delay^-1(t)``: a window
row is a delay row at half its width. A row that did not resolve while it was
observed says that its delay is at least that long.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, fields, replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import Sites
from behavgen.fit.law_solution import DelayRows
from behavgen.tables.characterisation import Conditions, DelayTable, WindowTable

__all__ = [
    "TimedRows",
    "joined",
    "padded",
    "resolved_rows",
    "selected",
    "unresolved_rows",
]

Floats = npt.NDArray[np.float64]
Mask = npt.NDArray[np.bool_]

_TABLE_PRECISION = 3e-3
"""Relative error of a delay row that carries no random error: how well any law fits it."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class TimedRows:
    """Rows of delays and windows, shape (N,) each.

    Parameters
    ----------
    conditions : Conditions
    overdrive_v, delay_s : ndarray
        Magnitude of the overdrive; windows enter with half their width.
    weight : ndarray
        Of the relative error; below 1 where a window was counted, 0 where a row is left out.
    is_window : ndarray of bool
    is_bound : ndarray of bool
        The delay is at least `delay_s`.
    """

    conditions: Conditions
    overdrive_v: Floats
    delay_s: Floats
    weight: Floats
    is_window: Mask
    is_bound: Mask


_COLUMNS = tuple(field.name for field in fields(TimedRows) if field.name != "conditions")


def resolved_rows(
    delay: DelayTable | None, window: WindowTable | None, processes: tuple[str, ...]
) -> TimedRows:
    """Return the rows that resolved, at overdrives other than zero."""
    parts = []
    if delay is not None:
        use = np.isfinite(delay.delay_s) & (np.abs(delay.overdrive_v) > 0.0)
        parts.append(_of_delays(delay, use, delay.delay_s))
    if window is not None:
        use = np.isfinite(window.window_v) & (window.window_v > 0.0)
        conditions = window.conditions.taken(use)
        if delay is not None and (delay.conditions.process != "").any():
            # A window table that names no process was measured in the default one.
            named = np.where(conditions.process == "", processes[0], conditions.process)
            conditions = replace(conditions, process=named)
        # A relative error of the width moves the time by tau times as much, about t / 10.
        slack = 0.1 * window.window_relative_error[use] / _TABLE_PRECISION
        parts.append(
            TimedRows(
                conditions=conditions,
                overdrive_v=0.5 * window.window_v[use],
                delay_s=window.resolve_time_s[use],
                weight=1.0 / (1.0 + slack * slack),
                is_window=np.ones(int(use.sum()), dtype=bool),
                is_bound=np.zeros(int(use.sum()), dtype=bool),
            )
        )
    return joined(parts)


def unresolved_rows(delay: DelayTable) -> TimedRows:
    """Return the rows of which only a least delay is known, at overdrives other than zero."""
    observed_s = delay.observed_for_s
    use = np.isnan(delay.delay_s) & (observed_s > 0.0) & (np.abs(delay.overdrive_v) > 0.0)
    rows = _of_delays(delay, use, observed_s)
    return replace(rows, is_bound=np.ones_like(rows.is_bound))


def _of_delays(delay: DelayTable, use: Mask, time_s: Floats) -> TimedRows:
    count = int(use.sum())
    return TimedRows(
        conditions=delay.conditions.taken(use),
        overdrive_v=np.abs(delay.overdrive_v[use]),
        delay_s=time_s[use],
        weight=np.ones(count),
        is_window=np.zeros(count, dtype=bool),
        is_bound=np.zeros(count, dtype=bool),
    )


def selected(rows: TimedRows, keep: Mask) -> TimedRows:
    """Return some of the rows."""
    columns = {name: getattr(rows, name)[keep] for name in _COLUMNS}
    return TimedRows(conditions=rows.conditions.taken(keep), **columns)


def joined(parts: Iterable[TimedRows]) -> TimedRows:
    """Return all rows as one list."""
    parts = list(parts)
    given = [part.conditions for part in parts]
    names = [field.name for field in fields(Conditions)]
    return TimedRows(
        conditions=Conditions(
            **{name: np.concatenate([getattr(c, name) for c in given]) for name in names}
        ),
        **{name: np.concatenate([getattr(part, name) for part in parts]) for name in _COLUMNS},
    )


def padded(rows: TimedRows, sites: Sites) -> DelayRows:
    """Return the rows by condition, padded to equal length."""
    order = np.argsort(sites.of_row, kind="stable")
    counts = np.bincount(sites.of_row, minlength=sites.count)
    column = np.arange(len(order)) - np.repeat(np.cumsum(counts) - counts, counts)
    place = (sites.of_row[order], column)

    def spread(values: Floats, filler: float) -> Floats:
        whole = np.full((sites.count, int(counts.max())), filler)
        whole[place] = values[order]
        return whole

    return DelayRows(
        overdrive_v=spread(rows.overdrive_v, 1.0),
        delay_s=spread(rows.delay_s, 1.0),
        weight=spread(rows.weight, 0.0),
    )
