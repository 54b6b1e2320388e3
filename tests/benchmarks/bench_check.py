"""What checking decisions costs against the bare simulation of the same decisions.

Run alone: ``python tests/benchmarks/bench_check.py [icarus] [verilator]``. The model is that of
the transistor-level tables in ``tests/data/latch_130n``; in Verilator a million decisions are
compared, exactly. The bare simulation plays the same stimulus from the same files to the same
compiled model with the same number of processes; checking adds the stimulus, the reference,
the comparison and the strata. Wall times, both in one run, on both processors; fit and
compilation count for neither. Bounds: checked decisions per second are at least 60 % of the
bare simulation's in Icarus, 40 % in Verilator, whose decision costs less than its comparison.
"""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

sys.path.insert(0, str(Path(__file__).parents[2]))

from behavgen.check.blocks import play_batches, share_out
from behavgen.check.given import own_text
from behavgen.check.harness import harness_macros, top_text
from behavgen.check.runs import Batch, Run, plan_batches
from behavgen.check.simulation import IcarusSimulation, Simulation, VerilatorSimulation, play
from behavgen.emit.systemverilog import systemverilog
from behavgen.fit.fit import fit
from behavgen.model import ComparatorModel
from behavgen.project import load_project
from behavgen.simulators.icarus import find_icarus
from behavgen.simulators.verilator import find_verilator
from behavgen.tables.read import read_tables

JOBS = 2
PROJECT = Path(__file__).parents[1] / "data" / "latch_130n" / "behavgen.toml"
RUNS = ("tt, noise off, between", "tt, noise on", "ss, noise on, offset shifted", "tt, mismatch on",
        "ff, noise off, coldest", "delay off")  # fmt: skip
"""Of a check: enough to meet every effect, few enough to be built in a minute."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Measured:
    """One simulator, and how it is measured; `least` is the bound."""

    make: Callable[[Path], Simulation]
    decisions: int
    least: float


ROUND_DECISIONS = 100_000
"""Compared at a time; each round has stimulus of its own."""

SIMULATORS = {
    "icarus": Measured(
        make=lambda w: IcarusSimulation(icarus=find_icarus(), work=w, logs=w),
        decisions=60_000, least=0.6,
    ),
    "verilator": Measured(
        make=lambda w: VerilatorSimulation(verilator=find_verilator(), work=w, logs=w),
        decisions=1_000_000, least=0.4,
    ),
}  # fmt: skip


def checked_s(
    simulation: Simulation, model: ComparatorModel, batches: tuple[Batch, ...], seed: int
) -> float:
    """Return the wall time of making, playing and comparing all blocks; all must agree."""
    begin = time.perf_counter()
    played = play_batches(simulation, own_text(model), batches, seed=seed, jobs=JOBS)
    wall_s = time.perf_counter() - begin
    assert not any(block.faults or block.problem for one in played for block in one.blocks)
    return wall_s


def bare_s(simulation: Simulation, batches: tuple[Batch, ...]) -> float:
    """Return the wall time of the simulator alone at the same stimulus."""

    def simulate(batch: Batch) -> None:
        first, last = batch.runs[0].index, batch.runs[-1].index
        assert simulation.simulate(f"bare_{batch.name}", *play(first, last)).code == 0

    begin = time.perf_counter()
    with ThreadPoolExecutor(max_workers=JOBS) as pool:
        list(pool.map(simulate, batches))
    return time.perf_counter() - begin


def runs_of(model: ComparatorModel, decisions: int) -> tuple[Run, ...]:
    """Return runs of blocks with a number of decisions in all, several of each kind."""
    plain = {run.name: run for run in plan_batches(model)[0].runs}
    each = -(-decisions // len(RUNS))
    return tuple(
        Run(index=n, name=name, given=plain[name].given, meant=plain[name].meant, decisions=each)
        for n, name in enumerate(RUNS)
    )


def holds(one: Measured, model: ComparatorModel, folder: Path) -> bool:
    """Print one simulator's figures; return whether its bound holds."""
    simulation = one.make(folder)
    rounds = -(-one.decisions // ROUND_DECISIONS)
    runs, text = runs_of(model, one.decisions // rounds), systemverilog(model).text
    batches = share_out(Batch(name="blocks", plusargs=(), runs=runs), len(runs))
    top, macros = top_text(model, runs), harness_macros(model, text)
    assert simulation.compile(model.cell.name, text, top, macros).code == 0
    times = [
        (checked_s(simulation, model, batches, seed), bare_s(simulation, batches))
        for seed in range(1, rounds + 1)
    ]
    check, bare = sum(c for c, _ in times), sum(b for _, b in times)
    count, share = rounds * sum(run.decisions for run in runs), bare / check
    print(f"{simulation.version}: {count} decisions compared, all agree")
    print(f"  checked {count / check:9.0f} per second, bare {count / bare:9.0f} per second")
    print(f"  share {share:.2f}, at least {one.least:g}", flush=True)
    return share >= one.least


def main(names: list[str]) -> int:
    """Print the figures; return 1 when a bound is broken."""
    model = fit(read_tables(load_project(PROJECT), "latch_130n"))
    held = []
    for name in names or list(SIMULATORS):
        with TemporaryDirectory() as folder:
            held.append(holds(SIMULATORS[name], model, Path(folder).resolve()))
    return int(not all(held))


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
