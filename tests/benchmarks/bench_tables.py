"""What reading large tables costs, against a bare read by polars, and in memory.

Run alone: ``python tests/benchmarks/bench_tables.py [ROWS]``, ten million rows unless
said otherwise; the tables are invented and written into a temporary folder.
Bounds: at most twice the processor time of a bare read of all cells, and at most
1.5 GiB at the peak (at ten million rows). Delays in no order at all are measured beside:
only for them must every row be compared with every other. Each figure is the lowest of
three processes'.
"""

from __future__ import annotations

import multiprocessing
import subprocess
import sys
from concurrent.futures import ProcessPoolExecutor
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import polars as pl

ROWS = 10_000_000
MOST_RATIO = 2.0
MOST_GIB = 1.5
MEASURED = """
import resource, sys
{work}
used = resource.getrusage(resource.RUSAGE_SELF)
print(used.ru_utime + used.ru_stime, used.ru_maxrss / 1024**2)
"""
BARE = MEASURED.format(work="import polars as pl\npl.read_csv(sys.argv[1])")
OURS = MEASURED.format(
    work="""
from pathlib import Path
from behavgen.project import load_project
from behavgen.tables.read import read_tables
read_tables(load_project(Path(sys.argv[1]).parent), "latch")
"""
)


def noise_bits(rows):
    """Return single decisions at a few levels: two columns, few distinct values."""
    random = np.random.default_rng(11)
    levels_v = np.round(np.linspace(-1e-3, 1e-3, 21), 6)
    return pl.DataFrame(
        {"vdiff": random.choice(levels_v, rows), "bit": random.integers(0, 2, rows)}
    )


def noise_bits_over_conditions(rows):
    """Return single decisions at nine conditions."""
    random = np.random.default_rng(12)
    return noise_bits(rows).select(
        pl.Series("vdd", random.choice([1.62, 1.8, 1.98], rows)),
        pl.Series("temp", random.choice([-40, 27, 125], rows)),
        "vdiff",
        "bit",
    )


def delays(rows):
    """Return delays as a sweep gives them, at two supplies, every row another."""
    overdrive_v = np.tile(np.geomspace(1e-6, 0.1, rows // 2), 2)
    delay_s = 20e-12 * np.log(0.8 / overdrive_v) + 20e-12
    return pl.DataFrame(
        {
            "vdd": np.repeat([1.0, 1.2], rows // 2),
            "overdrive": pl.Series([f"{v:.9g}" for v in overdrive_v]),
            "delay": pl.Series([f"{t:.6g}" for t in delay_s]),
        }
    )


def measured(script, file):
    """Return processor seconds, which a busy machine does not stretch, and peak GiB."""
    command = [sys.executable, "-c", script, str(file)]
    said = [
        subprocess.run(command, capture_output=True, text=True, check=True).stdout.split()
        for _ in range(3)
    ]
    return min(float(s) for s, _ in said), min(float(gib) for _, gib in said)


def delays_in_any_order(rows):
    """Return the same rows shuffled."""
    return delays(rows).sample(fraction=1.0, shuffle=True, seed=13)


def write_table(made, rows, file):
    """Write an invented table."""
    made(rows).write_csv(file)


def compared(folder, quantity, made, rows):
    """Print what one table costs; return whether it stays within the bounds."""
    file = folder / "table.csv"
    # By a process of its own: those measured count the peak of the one that begins them.
    with ProcessPoolExecutor(1, mp_context=multiprocessing.get_context("spawn")) as pool:
        pool.submit(write_table, made, rows, file).result()
    (folder / "behavgen.toml").write_text(
        f'[[cells.latch.tables]]\nquantity = "{quantity}"\nfile = "table.csv"\n', encoding="utf-8"
    )
    (bare_s, bare_gib), (ours_s, ours_gib) = measured(BARE, file), measured(OURS, file)
    print(
        f"{quantity}, {rows} rows, {file.stat().st_size / 1e6:.0f} MB: {ours_s:.2f} s against "
        f"{bare_s:.2f} s of a bare read ({ours_s / bare_s:.2f} times, at most {MOST_RATIO:g}); "
        f"peak {ours_gib:.2f} GiB against {bare_gib:.2f} GiB (at most {MOST_GIB:g})"
    )
    return ours_s <= MOST_RATIO * bare_s and ours_gib <= MOST_GIB


def main():
    rows = int(sys.argv[1]) if len(sys.argv) > 1 else ROWS
    cases = (("noise", noise_bits), ("noise", noise_bits_over_conditions), ("delay", delays))
    with TemporaryDirectory() as folder:
        passed = [compared(Path(folder), quantity, made, rows) for quantity, made in cases]
        compared(Path(folder), "delay", delays_in_any_order, rows)
    return 0 if all(passed) else 1


if __name__ == "__main__":
    sys.exit(main())
