"""Delay tables of invented latches with a corner that barely decides.

The demo's latch equations with other thresholds, solved in time. Run as a script
from the root of the project, ``python -m tests.fit.weak_latches`` or by path, it writes
the tables of tests/data/weak_corner anew (a minute).
"""

from __future__ import annotations

import csv
import io
import itertools
import sys
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np

from behavgen.demo.latch import SENSE_LATCH, Operating, circuit_at
from behavgen.demo.measurements import decision_delay
from behavgen.tables.characterisation import Conditions, DelayTable

FOLDER = Path(__file__).parents[1] / "data" / "weak_corner"
OVERDRIVE_V = np.geomspace(1e-6, 0.3, 20)
TEMPERATURE_C = (-40.0, 27.0, 125.0)
VDD_V = (0.9, 1.0, 1.1)
POINTS_BETWEEN = 60
_ZERO_CELSIUS_K = 273.15


@dataclass(frozen=True, slots=True, kw_only=True)
class WeakLatch:
    """A latch and how it is characterised.

    Parameters
    ----------
    threshold_v : float
    vcm_v : tuple of float
    observed_for_s : float
    p_channel : bool
        The same latch upside down: its common mode counts from the supply.
    seed : int
        Of the operating points between the tabulated ones.
    """

    threshold_v: float
    vcm_v: tuple[float, ...]
    observed_for_s: float
    p_channel: bool = False
    seed: int = 1

    @property
    def conditions(self):
        """Temperature (C), supply and common mode (V), one row a condition."""
        return np.array(list(itertools.product(TEMPERATURE_C, VDD_V, self.vcm_v)))

    def delays(self, conditions, overdrive_v):
        """Return delays in s, shape (N, K); NaN: not resolved in time."""
        temp_c, vdd_v, vcm_v = (column[:, None] for column in conditions.T)
        at = Operating(
            vdd_v=vdd_v,
            temperature_k=temp_c + _ZERO_CELSIUS_K,
            vcm_v=vdd_v - vcm_v if self.p_channel else vcm_v,
            threshold_shift_v=np.zeros_like(vdd_v),
            drive_factor=np.ones_like(vdd_v),
        )
        design = replace(SENSE_LATCH, capacitance_skew=0.0, threshold_v=self.threshold_v)
        return decision_delay(circuit_at(design, at), overdrive_v, watched_s=self.observed_for_s)

    def table(self):
        """Return rows of temperature, supply, common mode, overdrive and delay."""
        conditions = self.conditions
        overdrive_v = np.tile(OVERDRIVE_V, (len(conditions), 1))
        delay_s = self.delays(conditions, overdrive_v)
        return np.column_stack(
            [np.repeat(conditions, len(OVERDRIVE_V), axis=0), overdrive_v.ravel(), delay_s.ravel()]
        )

    def between(self):
        """Return such rows at random operating points between the tabulated ones."""
        rng = np.random.default_rng(self.seed)
        low, high = self.conditions.min(axis=0), self.conditions.max(axis=0)
        conditions = np.round(low + rng.uniform(size=(POINTS_BETWEEN, 3)) * (high - low), 4)
        overdrive_v = np.exp(rng.uniform(np.log(1e-5), np.log(0.25), POINTS_BETWEEN))
        delay_s = self.delays(conditions, overdrive_v[:, None])
        return np.column_stack([conditions, overdrive_v, delay_s])


LATCHES = {
    "two_common_modes": WeakLatch(threshold_v=0.42, vcm_v=(0.55, 0.7), observed_for_s=2e-9),
    "three_common_modes": WeakLatch(threshold_v=0.42, vcm_v=(0.5, 0.6, 0.7), observed_for_s=2e-9),
    "p_channel_pair": WeakLatch(
        threshold_v=0.40, vcm_v=(0.3, 0.42), observed_for_s=0.8e-9, p_channel=True
    ),
}


def csv_text(rows) -> str:
    """Return rows as the text of a table; unresolved delays are left empty."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(["temp_C", "vdd_V", "vcm_V", "vod_V", "delay_s"])
    for *condition, overdrive_v, delay_s in rows.tolist():
        delay = f"{delay_s:.5g}" if np.isfinite(delay_s) else ""
        writer.writerow([*(f"{value:.6g}" for value in condition), f"{overdrive_v:.5g}", delay])
    return text.getvalue()


def read_rows(name: str):
    """Return a stored table's rows; NaN where nothing resolved."""
    with (FOLDER / f"{name}.csv").open() as file:
        return np.array(
            [[float(value or "nan") for value in row.values()] for row in csv.DictReader(file)]
        )


def delay_table(rows, observed_for_s: float) -> DelayTable:
    """Return rows as the fit takes them."""
    temp_c, vdd_v, vcm_v, overdrive_v, delay_s = rows.T
    nothing = np.full(len(rows), np.nan)
    return DelayTable(
        conditions=Conditions(
            temperature_k=temp_c + _ZERO_CELSIUS_K, vdd_v=vdd_v, vcm_v=vcm_v,
            process=np.full(len(rows), ""),
        ),
        overdrive_v=overdrive_v, delay_s=delay_s,
        observed_for_s=np.full(len(rows), observed_for_s), offset_v=nothing,
        decision=np.full(len(rows), -1), measured="", sources=(),
    )  # fmt: skip


if __name__ == "__main__":
    for name, latch in LATCHES.items():
        for suffix, rows in (("", latch.table()), ("_between", latch.between())):
            path = FOLDER / f"{name}{suffix}.csv"
            path.write_text(csv_text(rows))
            sys.stdout.write(f"{path.name}\n")
