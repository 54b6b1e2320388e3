"""What a check costs: checked decisions per second, and against the bare simulation.

Run alone: ``python tests/benchmarks/bench_check.py``. The bare simulation plays the same
stimulus to the same compiled model, without benches, Python or a second batch. Both
are measured in one run, in seconds of processor time, the best of a few rounds each.
Bound: a check costs at most 4 times the bare simulation.
"""

from __future__ import annotations

import os
import sys
import time
from pathlib import Path
from tempfile import TemporaryDirectory

sys.path.insert(0, str(Path(__file__).parents[2]))

from behavgen.check.check import check
from behavgen.check.harness import harness_macros, top_text
from behavgen.check.preparation import plan_check, prepare_blocks
from behavgen.check.simulation import CompiledCheck, play
from behavgen.emit.systemverilog import systemverilog
from behavgen.simulators.icarus import find_icarus
from tests.example_models import full_model

MODEL = full_model()
ROUNDS = 3
MOST_RATIO = 4.0


def processor_s() -> float:
    """Return the processor time of this process and of all that it has waited for."""
    spent = os.times()
    return spent.user + spent.system + spent.children_user + spent.children_system


def whole_check(folder: Path) -> tuple[float, float, int]:
    """Return processor and wall time of a check in s, and its decisions."""
    begin, clock = processor_s(), time.perf_counter()
    report = check(MODEL, systemverilog(MODEL), folder=folder)
    assert report.passed
    return processor_s() - begin, time.perf_counter() - clock, report.decisions


def bare_simulation(folder: Path) -> float:
    """Return the processor time in s of the simulator alone at the same stimulus."""
    bare = CompiledCheck(icarus=find_icarus(), work=folder, logs=folder)
    plan = plan_check(MODEL, seed=1, jobs=2)
    text = systemverilog(MODEL).text
    top = top_text(MODEL, plan.runs)
    assert bare.compile(MODEL.cell.name, text, top, harness_macros(MODEL, text)).code == 0
    blocks = prepare_blocks(MODEL, plan, folder, seed=1)
    begin = processor_s()
    assert bare.simulate("bare", *play(0, blocks[-1].run.index)).code == 0
    return processor_s() - begin


def main() -> int:
    """Print the figures; return 1 when the bound is exceeded."""
    with TemporaryDirectory() as folder:
        checks = [whole_check(Path(folder)) for _ in range(ROUNDS)]
        bare_s = min(bare_simulation(Path(folder)) for _ in range(ROUNDS))
    check_s, wall_s, decisions = min(checks)
    ratio = check_s / bare_s
    print(f"{decisions} decisions checked in {wall_s:.2f} s, {check_s:.2f} s of processor time")
    print(f"{decisions / wall_s:.0f} checked decisions per second")
    print(f"bare simulation {bare_s:.2f} s of processor time, {decisions / bare_s:.0f} per second")
    print(f"ratio {ratio:.2f}, at most {MOST_RATIO:g}")
    return int(ratio > MOST_RATIO)


if __name__ == "__main__":
    sys.exit(main())
