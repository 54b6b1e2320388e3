"""A project of many small cells, every number of it invented.

Run alone: ``python tests/regress/many_cells.py FOLDER [COUNT]``. The tables are
computed from closed forms with invented parameters and seeded scatter; they
describe no circuit. The cells come in variants with other tables and conditions.
"""

from __future__ import annotations

import math
import sys
from collections.abc import Iterable
from pathlib import Path

import numpy as np

__all__ = ["cell_name", "scale_delays", "write_many_cells"]

SUPPLIES_V = (1.0, 1.1, 1.2)
OVERDRIVES_V = tuple(float(f"{v:.4g}") for v in np.geomspace(1e-6, 0.1, 11))
HEAD = "# Invented numbers, written by a script; they describe no circuit.\n"


def cell_name(number: int) -> str:
    """Return the name of a cell."""
    return f"latch_{number:03d}"


def write_many_cells(folder: Path, count: int) -> Path:
    """Write a project of that many cells into `folder` and return it."""
    (folder / "tables").mkdir(parents=True, exist_ok=True)
    entries = [HEAD, *(_write_cell(folder, number) for number in range(count))]
    (folder / "behavgen.toml").write_text("\n".join(entries), encoding="utf-8")
    return folder


def scale_delays(folder: Path, number: int, factor: float) -> None:
    """Multiply every delay of a cell: its drift in time is then the factor."""
    file = folder / "tables" / f"{cell_name(number)}_delay.csv"
    header, *rows = file.read_text(encoding="utf-8").splitlines()
    scaled = [
        ",".join([*row.split(",")[:-1], f"{float(row.split(',')[-1]) * factor:.6g}"])
        for row in rows
    ]
    _write_rows(file, header, scaled)


def _write_cell(folder: Path, number: int) -> str:
    """Write the tables of one cell, and return its entry in the project file."""
    random = np.random.default_rng([20260301, number])
    quantities = ("delay", *_VARIANTS[number % len(_VARIANTS)])
    lines = [f"[cells.{cell_name(number)}]", f'description = "invented latch {number}"', ""]
    for quantity in quantities:
        header, rows = _TABLES[quantity](random)
        name = f"tables/{cell_name(number)}_{quantity}.csv"
        _write_rows(folder / name, header, rows)
        lines += [f"[[cells.{cell_name(number)}.tables]]", f'quantity = "{quantity}"']
        lines += [f'file = "{name}"', ""]
    return "\n".join(lines)


def _write_rows(file: Path, header: str, rows: Iterable[str]) -> None:
    file.write_text("\n".join([header, *rows]) + "\n", encoding="utf-8")


def _delay(random: np.random.Generator) -> tuple[str, list[str]]:
    """tau ln(1 + 0.5 V / overdrive) + start, 0.2 % of scatter, over two or three supplies."""
    tau_s, start_s = random.uniform(8e-12, 25e-12), random.uniform(15e-12, 40e-12)
    rows = []
    for vdd in SUPPLIES_V[: random.integers(2, 4)]:
        for v in OVERDRIVES_V:
            delay_s = (tau_s * math.log1p(0.5 / v) + start_s) / vdd**2
            rows.append(f"{vdd},{v:.4g},{delay_s * (1.0 + 2e-3 * random.normal()):.6g}")
    return "vdd,overdrive,delay", rows


def _noise(random: np.random.Generator) -> tuple[str, list[str]]:
    """Counts drawn from a Gaussian S-curve at one condition."""
    sigma_v, offset_v = random.uniform(0.3e-3, 1.5e-3), 1e-3 * random.normal()
    rows = []
    for z in np.linspace(-2.0, 2.0, 9):
        vdiff_v = float(f"{offset_v + z * sigma_v:.4g}")
        share = 0.5 * math.erfc(-(vdiff_v - offset_v) / sigma_v / math.sqrt(2.0))
        rows.append(f"{vdiff_v:.4g},1000,{random.binomial(1000, share)}")
    return "vdiff,trials,ones", rows


def _offset(random: np.random.Generator) -> tuple[str, list[str]]:
    """Offsets of instances drawn from a Gaussian."""
    sigma_v = random.uniform(2e-3, 6e-3)
    return "instance,offset", [f"{i},{sigma_v * random.normal():.5g}" for i in range(30)]


def _reset(random: np.random.Generator) -> tuple[str, list[str]]:
    """One reset delay at each supply, shorter at higher ones."""
    reset_s = random.uniform(20e-12, 50e-12)
    return "vdd,reset_delay", [f"{vdd},{reset_s / vdd:.4g}" for vdd in SUPPLIES_V]


_TABLES = {"delay": _delay, "noise": _noise, "offset": _offset, "reset": _reset}
_VARIANTS = (("noise",), ("noise", "offset"), (), ("noise", "reset"), ("offset",))

if __name__ == "__main__":
    write_many_cells(Path(sys.argv[1]), int(sys.argv[2]) if len(sys.argv) > 2 else 300)
