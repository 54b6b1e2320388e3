"""What fits cost: delay laws at many conditions against loops, and the whole fit.

Run alone: ``python tests/benchmarks/bench_fit.py``. Ratios are measured in one run.
Bounds: the delay law that latch_130n is modelled with at least 5 times faster a
condition than a loop over scipy's curve_fit, with the same estimates; the fit of the
cell at most 3 times the start-up of an interpreter that imports numpy, scipy.optimize
and polars. The time of a textbook law with two nonlinear voltages is printed beside.
"""

from __future__ import annotations

import os
import resource
import subprocess
import sys
import time
from pathlib import Path

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")

import numpy as np
from scipy.optimize import curve_fit

from behavgen.fit.law import solve_nodes
from behavgen.fit.law_families import solve_families
from behavgen.fit.law_solution import DelayRows
from behavgen.formulas.node_law import node_law_basis

LATCH = Path(__file__).parents[1] / "data" / "latch_130n"
CONDITIONS = 200
LEAST_DELAY_RATIO = 5.0
MOST_FIT_RATIO = 3.0
LOG_NODE = np.linspace(np.log(1e-3), np.log(0.3), 10)
TEXTBOOK = "integration and regeneration law"


def textbook(v, t0, tau, log_vx, ts, log_vi):
    """Return t0 + tau ln(1 + Vx/v) + ts / (1 + v/Vi), times in ps."""
    return t0 + tau * np.log1p(np.exp(log_vx) / v) + ts / (1.0 + v / np.exp(log_vi))


def made_up_delays():
    """Return overdrives (R,) in V, delays (C, R) in ps with 0.2 % scatter, and the truth."""
    rng = np.random.default_rng(3)
    v = np.geomspace(1e-6, 0.3, 35)
    truth = np.column_stack(
        [
            rng.uniform(30, 60, CONDITIONS),
            rng.uniform(8, 40, CONDITIONS),
            np.log(rng.uniform(0.03, 0.1, CONDITIONS)),
            rng.uniform(20, 60, CONDITIONS),
            np.log(rng.uniform(0.01, 0.05, CONDITIONS)),
        ]
    )
    delays = np.array([textbook(v, *row) for row in truth])
    return v, delays * (1.0 + 0.002 * rng.normal(size=delays.shape)), truth


def timed(work):
    begin = time.process_time()
    result = work()
    return result, time.process_time() - begin


def loop(law, v, delays, starts):
    def one(row, start):
        return curve_fit(law, v, row, p0=start, sigma=row, xtol=1e-12, ftol=1e-12)[0]

    return np.array([one(row, start) for row, start in zip(delays, starts, strict=True)])


def compare_delay_fits():
    """Return ratio and largest difference of the node law, and the textbook law's ratio."""
    v, delays, truth = made_up_delays()
    basis = node_law_basis(v, LOG_NODE)

    def nodes(_, *parameters):
        return basis @ np.array(parameters)

    start = np.tile(np.concatenate([[20.0], np.linspace(200.0, 50.0, len(LOG_NODE))]), (200, 1))
    looped, loop_s = timed(lambda: loop(nodes, v, delays, start))
    rows = DelayRows(
        overdrive_v=np.broadcast_to(v, delays.shape).copy(),
        delay_s=delays * 1e-12,
        weight=np.ones_like(delays),
    )
    batch, batch_s = timed(lambda: solve_nodes(rows, LOG_NODE, roughness=0.0))
    gap = float(np.abs(batch.parameters * 1e12 / looped - 1.0).max())
    _, textbook_loop_s = timed(lambda: loop(textbook, v, delays, truth * 1.05))
    _, textbook_s = timed(lambda: solve_families(rows, only=TEXTBOOK))
    return loop_s / batch_s, gap, textbook_loop_s / textbook_s


def cpu_s(*arguments):
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    subprocess.run([sys.executable, *arguments], check=True, stdout=subprocess.DEVNULL)
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    return (after.ru_utime + after.ru_stime) - (before.ru_utime + before.ru_stime)


def fit_against_start_up(repeats=5):
    """Return the median CPU of fitting latch_130n over that of a bare scientific start-up."""
    script = (
        "from pathlib import Path\n"
        "from behavgen.project import load_project\n"
        "from behavgen.tables.read import read_tables\n"
        "from behavgen.fit.fit import fit\n"
        f"project = load_project(Path({str(LATCH)!r}))\n"
        "fit(read_tables(project, 'latch_130n'), project.cells[0])\n"
    )
    ratios = [
        cpu_s("-c", script) / cpu_s("-c", "import numpy, scipy.optimize, polars")
        for _ in range(repeats)
    ]
    return float(np.median(ratios))


def main():
    ratio, gap, textbook_ratio = compare_delay_fits()
    print(
        f"delay fit: node law {ratio:.0f} times faster a condition than a loop over curve_fit "
        f"(at least {LEAST_DELAY_RATIO:g}), estimates differ by {gap:.1e}; textbook law with two "
        f"voltages, started at the truth in the loop, {textbook_ratio:.1f} times"
    )
    share = fit_against_start_up()
    print(f"whole fit: latch_130n {share:.2f} scientific start-ups (at most {MOST_FIT_RATIO:g})")
    sys.exit(not (ratio >= LEAST_DELAY_RATIO and share <= MOST_FIT_RATIO and gap < 1e-6))


if __name__ == "__main__":
    main()
