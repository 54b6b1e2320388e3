"""Table rows that travel in the model file, for plots and for closure."""

from __future__ import annotations

from typing import Protocol

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import conditions_of, find_sites
from behavgen.fit.energy import EnergyFit
from behavgen.model import CurvePoints, significant
from behavgen.tables.characterisation import Characterisation, Conditions, RowOrigin

__all__ = ["table_points"]

Floats = npt.NDArray[np.float64]


class _Rows(Protocol):
    """Any table: rows with their conditions and where they stand."""

    @property
    def conditions(self) -> Conditions:
        """Of each row."""

    @property
    def origin(self) -> RowOrigin | None:
        """Of each row."""


def table_points(tables: Characterisation, energy: EnergyFit | None) -> tuple[CurvePoints, ...]:
    """Return all rows by quantity and condition, sorted by their abscissa."""
    return (*_timing_and_decisions(tables), *_memory_and_charges(tables, energy))


def _timing_and_decisions(tables: Characterisation) -> list[CurvePoints]:
    found: list[CurvePoints] = []
    if tables.delay is not None:
        t = tables.delay
        use = np.isfinite(t.delay_s)
        found += _curves("delay", t, np.abs(t.overdrive_v), t.delay_s, use)
    if tables.window is not None:
        w = tables.window
        found += _curves("window", w, w.resolve_time_s, w.window_v, w.window_v > 0.0)
    if tables.noise is not None and len(tables.noise.vdiff_v):
        n = tables.noise
        share = n.ones / n.trials
        found += _curves("noise", n, n.vdiff_v, share, n.trials > 0, n.trials)
    if tables.offset is not None:
        o = tables.offset
        _, number = np.unique(o.instance, return_inverse=True)
        found += _curves("offset", o, number.astype(float), o.offset_v,
                         np.isfinite(o.offset_v))  # fmt: skip
    if tables.reset is not None:
        r = tables.reset
        found += _curves("reset", r, np.zeros(len(r.reset_delay_s)), r.reset_delay_s,
                         np.isfinite(r.reset_delay_s))  # fmt: skip
    return found


def _memory_and_charges(tables: Characterisation, energy: EnergyFit | None) -> list[CurvePoints]:
    found: list[CurvePoints] = []
    if tables.memory is not None:
        m = tables.memory
        for quantity, use in (("memory", ~m.censored), ("memory_at_least", m.censored)):
            found += _curves(quantity, m, m.reset_time_s, m.memory_shift_v, use)
    if tables.aperture is not None:
        a = tables.aperture
        found += _curves("aperture", a, a.step_time_s, a.step_weight,
                         np.isfinite(a.step_weight))  # fmt: skip
    if tables.energy is not None and energy is not None:
        e = tables.energy
        found += _curves("energy", e, energy.overdrive_v, e.energy_j, energy.is_shortest)
    if tables.kickback is not None:
        k = tables.kickback
        charges = (("common", k.charge_common_c), ("differential", k.charge_differential_c))
        for name, charge in charges:
            found += _curves(f"kickback_{name}", k, np.nan_to_num(k.vdiff_v), charge,
                             np.isfinite(charge))  # fmt: skip
    return found


def _curves(
    quantity: str,
    table: _Rows,
    x: Floats,
    y: Floats,
    use: npt.NDArray[np.bool_],
    trials: npt.NDArray[np.int64] | None = None,
) -> list[CurvePoints]:
    sites = find_sites(table.conditions)
    curves = []
    for c, condition in enumerate(conditions_of(sites)):
        rows = np.flatnonzero((sites.of_row == c) & use)
        rows = rows[np.argsort(x[rows], kind="stable")]
        if len(rows):
            curves.append(
                CurvePoints(
                    quantity=quantity,
                    condition=condition,
                    x=tuple(significant(float(v), 8) for v in x[rows]),
                    y=tuple(significant(float(v), 8) for v in y[rows]),
                    trials=() if trials is None else tuple(int(v) for v in trials[rows]),
                    files=_files(table.origin, rows),
                    lines=() if table.origin is None else tuple(table.origin.line[rows].tolist()),
                )
            )
    return curves


def _files(origin: RowOrigin | None, rows: npt.NDArray[np.intp]) -> tuple[str, ...]:
    """Return the files of some rows, a file that all share once."""
    if origin is None:
        return ()
    files = tuple(origin.files[k] for k in origin.file[rows])
    return files[:1] if len(set(files)) == 1 else files
