"""The demo's tables: which invented circuit is measured where, and how that is written down.

Run ``python -m behavgen.demo.scenario --out DIR`` to simulate all tables anew; the
seeds are fixed, so they come out as they are committed. Headers differ in style
from table to table on purpose, as they do in practice.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.demo import measurements
from behavgen.demo.latch import (
    SENSE_LATCH,
    SLICER,
    Circuit,
    Design,
    Mismatch,
    Operating,
    circuit_at,
)
from behavgen.files import write_whole

__all__ = [
    "CORNERS",
    "DELAY_POINTS",
    "Point",
    "Table",
    "all_tables",
    "sense_latch_delay",
    "sense_latch_noise",
    "sense_latch_offset",
    "sense_latch_reset",
    "sense_latch_window",
    "slicer_delay",
    "slicer_noise",
    "write_tables",
]

Floats = npt.NDArray[np.float64]

SEED = 20
CELSIUS_K = 273.15
WATCHED_S = 320e-12
SEARCHED_SPAN_V = 0.6
DECISION_S = 220e-12
TRIALS = 300
INSTANCES = 80
INSTANCES_AT_BOTH = 24

# Process name: shift of every threshold in V, factor on every drive.
PROCESSES = {"typ": (0.0, 1.0), "slow": (0.03, 0.92), "fast": (-0.03, 1.08)}


@dataclass(frozen=True, slots=True, kw_only=True)
class Point:
    """One operating point, in the units of the tables."""

    vdd_v: float
    temp_c: float
    vcm_v: float = 0.6
    process: str = "typ"


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """One file: headers and rows, ready to be written."""

    header: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]

    def text(self) -> str:
        """Return the table as CSV."""
        return "".join(",".join(line) + "\n" for line in (self.header, *self.rows))


NOMINAL = Point(vdd_v=1.0, temp_c=27)
HOT_LOW = Point(vdd_v=0.9, temp_c=125)
COLD_HIGH = Point(vdd_v=1.1, temp_c=-40)
HOT_HIGH = Point(vdd_v=1.1, temp_c=125)
COLD_LOW = Point(vdd_v=0.9, temp_c=-40)

TYPICAL_GRID = tuple(
    Point(vdd_v=vdd_v, temp_c=temp_c, vcm_v=vcm_v)
    for vdd_v in (0.9, 1.0, 1.1)
    for temp_c in (-40, 27, 125)
    for vcm_v in (0.5, 0.6, 0.7)
)
DELAY_POINTS = (
    *TYPICAL_GRID,
    *(replace(point, process="slow") for point in (NOMINAL, HOT_LOW, COLD_LOW)),
    *(replace(point, process="fast") for point in (NOMINAL, COLD_HIGH, HOT_HIGH)),
)
CORNERS = {
    "nominal": NOMINAL,
    "hot_low": HOT_LOW,
    "cold_high": COLD_HIGH,
    "hot_high": HOT_HIGH,
    "cold_low": COLD_LOW,
    "slow_nominal": replace(NOMINAL, process="slow"),
    "fast_nominal": replace(NOMINAL, process="fast"),
}
RESOLVE_TIMES_S = {
    NOMINAL: (45e-12, 55e-12, 70e-12, 90e-12, 120e-12, 150e-12, 180e-12, 200e-12),
    HOT_LOW: (55e-12, 75e-12, 100e-12, 130e-12, 180e-12, 230e-12, 280e-12, 310e-12),
    COLD_HIGH: (30e-12, 40e-12, 55e-12, 70e-12, 90e-12, 110e-12, 130e-12, 145e-12),
}
OVERDRIVES_V = np.round(np.geomspace(1e-6, 0.3, 18), 10)
LEVELS_V = np.array([-1.2, -0.7, -0.3, 0.0, 0.35, 0.7, 1.0, 1.4, 1.9]) * 1e-3
SLICER_SUPPLIES = (Point(vdd_v=0.9, temp_c=27), Point(vdd_v=1.1, temp_c=27))


def _column(values: Iterable[float]) -> Floats:
    return np.array([*values], dtype=np.float64)[:, None]


def _circuit(design: Design, points: Sequence[Point], mismatch: Mismatch | None = None) -> Circuit:
    at = Operating(
        vdd_v=_column(point.vdd_v for point in points),
        temperature_k=_column(point.temp_c + CELSIUS_K for point in points),
        vcm_v=_column(point.vcm_v for point in points),
        threshold_shift_v=_column(PROCESSES[point.process][0] for point in points),
        drive_factor=_column(PROCESSES[point.process][1] for point in points),
    )
    return circuit_at(design, at, mismatch)


def _trip_point(circuit: Circuit) -> Floats:
    """Return the trip point as the table states it: to 0.1 nV."""
    found = measurements.trip_point(circuit, span_v=0.02, passes=7, until_s=600e-12)
    return np.round(found, 10)


def _noise_source(*key: str) -> np.random.Generator:
    """Return a random source of its own for each part of a table, whatever else is simulated."""
    return np.random.default_rng([SEED, *" ".join(key).encode()])


def _number(value: float, digits: int = 6) -> str:
    return "" if np.isnan(value) else f"{value:.{digits}g}"


def sense_latch_delay(points: Sequence[Point] = DELAY_POINTS) -> Table:
    """Delays over 18 overdrives of both signs at each point."""
    circuit = _circuit(SENSE_LATCH, points)
    trip_v = _trip_point(circuit)
    vdiff_v = trip_v + np.concatenate([-OVERDRIVES_V[::-1], OVERDRIVES_V])
    delay_s = measurements.decision_delay(circuit, vdiff_v, watched_s=WATCHED_S)
    rows = [
        (
            point.process,
            *(_number(value) for value in (point.vdd_v, point.temp_c, point.vcm_v)),
            f"{vdiff_v[row, run]:.10f}",
            f"{trip_v[row, 0]:.10f}",
            _number(delay_s[row, run] * 1e12, 7),
            _number(WATCHED_S * 1e12),
            _decision(float(vdiff_v[row, run] - trip_v[row, 0]), float(delay_s[row, run])),
        )
        for row, point in enumerate(points)
        for run in range(vdiff_v.shape[1])
    ]
    header = "process vdd_V temp_C vcm_V vin_diff_V trip_V delay_ps watched_ps decision"
    return Table(header=tuple(header.split()), rows=tuple(rows))


def _decision(overdrive_v: float, delay_s: float) -> str:
    return "" if np.isnan(delay_s) else str(int(overdrive_v > 0))


def sense_latch_noise(corners: Mapping[str, Point] = CORNERS) -> Table:
    """S-curves: how many of 300 noisy decisions at each level are one."""
    rows = []
    for name, point in corners.items():
        ones = measurements.count_ones(
            _circuit(SENSE_LATCH, [point]),
            LEVELS_V,
            TRIALS,
            until_s=DECISION_S,
            noise=_noise_source("noise", name),
        )[0]
        rows += [
            (name, _number(level_v * 1e3), str(TRIALS), str(count))
            for level_v, count in zip(LEVELS_V, ones, strict=True)
        ]
    return Table(header=("corner", "level [mV]", "trials", "ones"), rows=tuple(rows))


def sense_latch_offset(instances: int = INSTANCES, at_both: int = INSTANCES_AT_BOTH) -> Table:
    """Offsets of instances with mismatch, the first `at_both` at a second point too."""
    drawn = _noise_source("offset").standard_normal((INSTANCES, 3))
    runs = [(n, NOMINAL) for n in range(instances)] + [(n, HOT_LOW) for n in range(at_both)]
    scaled = drawn[[n for n, _ in runs]] * (5e-3, 0.02, 8e-3)
    mismatch = Mismatch(
        pair_threshold_v=scaled[:, 0:1],
        pair_drive=scaled[:, 1:2],
        latch_threshold_v=scaled[:, 2:3],
    )
    circuit = _circuit(SENSE_LATCH, [point for _, point in runs], mismatch)
    offset_v = measurements.trip_point(circuit, span_v=0.05, passes=5, until_s=320e-12)
    rows = tuple(
        (f"m{n:02d}", _number(point.vdd_v), _number(point.temp_c), f"{offset * 1e3:.4f}")
        for (n, point), offset in zip(runs, offset_v[:, 0], strict=True)
    )
    return Table(header=("instance", "supply (V)", "junction (C)", "offset (mV)"), rows=rows)


def sense_latch_window(points: Sequence[Point] = tuple(RESOLVE_TIMES_S)) -> Table:
    """Widths of the inputs that are still unresolved some time after the edge."""
    runs = [(point, time_s) for point in points for time_s in RESOLVE_TIMES_S[point]]
    circuit = _circuit(SENSE_LATCH, [point for point, _ in runs])
    window_v = measurements.metastable_window(
        circuit,
        _column(time_s for _, time_s in runs),
        _trip_point(circuit),
        searched_span_v=SEARCHED_SPAN_V,
    )
    rows = tuple(
        (
            _number(point.vdd_v),
            _number(point.temp_c),
            _number(time_s * 1e12),
            _number(width * 1e6),
            _number(SEARCHED_SPAN_V * 1e6),
        )
        for (point, time_s), width in zip(runs, window_v[:, 0], strict=True)
    )
    return Table(header=("VDD", "T_j", "t_after_edge", "unresolved", "searched"), rows=rows)


def sense_latch_reset(points: Sequence[Point] = DELAY_POINTS) -> Table:
    """Reset delays; the common mode has no part in them."""
    points = [point for point in points if point.vcm_v == NOMINAL.vcm_v]
    delay_s = measurements.reset_delay(_circuit(SENSE_LATCH, points))[:, 0]
    rows = tuple(
        (
            point.process,
            _number(point.vdd_v),
            _number(point.temp_c),
            f"{delay * 1e12:.4g}p",
        )
        for point, delay in zip(points, delay_s, strict=True)
    )
    return Table(header=("process", "vdd", "temp", "reset_delay"), rows=rows)


def slicer_delay() -> Table:
    """Delays of the second, smaller cell at two supplies."""
    circuit = _circuit(SLICER, SLICER_SUPPLIES)
    vdiff_v = _trip_point(circuit) + OVERDRIVES_V
    delay_s = measurements.decision_delay(circuit, vdiff_v, watched_s=500e-12)
    rows = tuple(
        (
            _number(point.vdd_v),
            _number(overdrive_v * 1e3),
            _number(delay_s[row, run] * 1e9),
        )
        for row, point in enumerate(SLICER_SUPPLIES)
        for run, overdrive_v in enumerate(OVERDRIVES_V)
    )
    return Table(header=("supply_V", "overdrive_mV", "delay_ns"), rows=rows)


def slicer_noise(trials: int = 5000) -> Table:
    """Noise sigmas of the second cell, from the spread of its outputs over its gain."""
    circuit = _circuit(SLICER, SLICER_SUPPLIES)
    sigma_v = measurements.input_noise(
        circuit, _trip_point(circuit), trials, until_s=70e-12, noise=_noise_source("slicer")
    )
    # Standard error of a sample standard deviation under a Gaussian law: sigma / sqrt(2 N).
    error_v = sigma_v / np.sqrt(2 * trials)
    rows = tuple(
        (_number(point.vdd_v), _number(sigma * 1e6, 4), _number(error * 1e6, 2))
        for point, sigma, error in zip(SLICER_SUPPLIES, sigma_v, error_v, strict=True)
    )
    return Table(header=("vdd", "sigma_uV", "sigma_error_uV"), rows=rows)


def all_tables() -> dict[str, Table]:
    """Simulate every table; keys are file names below the tables' folder."""
    return {
        "sense_latch/delay.csv": sense_latch_delay(),
        "sense_latch/noise.csv": sense_latch_noise(),
        "sense_latch/offset.csv": sense_latch_offset(),
        "sense_latch/window.csv": sense_latch_window(),
        "sense_latch/reset.csv": sense_latch_reset(),
        "slicer/delay.csv": slicer_delay(),
        "slicer/noise.csv": slicer_noise(),
    }


def write_tables(folder: Path) -> None:
    """Simulate every table and write it below `folder`, each whole or not at all."""
    for name, table in all_tables().items():
        write_whole(folder / name, table.text())


if __name__ == "__main__":
    import argparse

    parser = argparse.ArgumentParser(description="Simulate the demo's invented tables anew.")
    parser.add_argument("--out", type=Path, required=True, help="folder for the tables")
    write_tables(parser.parse_args().out)
