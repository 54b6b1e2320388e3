"""Small tables of memory, aperture, energy and kickback, and those of the characterised latch."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np

from behavgen.tables.characterisation import (
    ApertureTable,
    Conditions,
    EnergyTable,
    KickbackTable,
    MemoryTable,
    TableSource,
)

FOLDER = Path(__file__).parents[1] / "data" / "latch_130n"


def source(quantity):
    return (TableSource(quantity=quantity, file=f"{quantity}.csv", sha256="0" * 64, rows=1),)


def conditions(rows, vdd=np.nan, temperature=np.nan, vcm=np.nan, process=""):
    """Return conditions of so many rows; values are broadcast."""
    given = (np.broadcast_to(np.asarray(v, dtype=float), rows) for v in (vdd, temperature, vcm))
    vdd_v, temperature_k, vcm_v = given
    names = np.broadcast_to(np.asarray(process, dtype=np.str_), rows)
    return Conditions(vdd_v=vdd_v, temperature_k=temperature_k, vcm_v=vcm_v, process=names)


def memory_table(reset_s, shift_v, censored=False, **where):
    reset_s = np.asarray(reset_s, dtype=float)
    return MemoryTable(
        conditions=conditions(len(reset_s), **where),
        reset_time_s=reset_s,
        memory_shift_v=np.asarray(shift_v, dtype=float),
        censored=np.broadcast_to(np.asarray(censored, dtype=bool), reset_s.shape),
        sources=source("memory"),
    )


def aperture_table(time_s, weight, step_v=np.nan, **where):
    time_s = np.asarray(time_s, dtype=float)
    return ApertureTable(
        conditions=conditions(len(time_s), **where),
        step_time_s=time_s,
        step_weight=np.asarray(weight, dtype=float),
        step_v=np.broadcast_to(np.asarray(step_v, dtype=float), time_s.shape),
        sources=source("aperture"),
    )


def energy_table(overdrive_v, energy_j, cycle_s=np.nan, **where):
    overdrive_v = np.asarray(overdrive_v, dtype=float)
    return EnergyTable(
        conditions=conditions(len(overdrive_v), **where),
        overdrive_v=overdrive_v,
        vdiff_v=np.full(len(overdrive_v), np.nan),
        energy_j=np.asarray(energy_j, dtype=float),
        cycle_time_s=np.broadcast_to(np.asarray(cycle_s, dtype=float), overdrive_v.shape),
        sources=source("energy"),
    )


def kickback_table(common_c, differential_c, vdiff_v=np.nan, resistance=np.nan, **where):
    differential_c = np.asarray(differential_c, dtype=float)
    shape = differential_c.shape
    common, vdiff, ohm = (
        np.broadcast_to(np.asarray(v, dtype=float), shape) for v in (common_c, vdiff_v, resistance)
    )
    return KickbackTable(
        conditions=conditions(len(differential_c), **where),
        charge_common_c=common,
        charge_differential_c=differential_c,
        vdiff_v=vdiff,
        source_resistance_ohm=ohm,
        sources=source("kickback"),
    )


def latch_column(quantity, header):
    """Return a column of one of the latch's tables as numbers."""
    with (FOLDER / f"{quantity}.csv").open(newline="") as lines:
        return np.array([float(row[header]) for row in csv.DictReader(lines)])


def latch_where(quantity):
    """Return the conditions of one of the latch's tables as keywords."""
    return {
        "vdd": latch_column(quantity, "vdd_V"),
        "temperature": latch_column(quantity, "temp_C") + 273.15,
        "vcm": latch_column(quantity, "vcm_V"),
    }
