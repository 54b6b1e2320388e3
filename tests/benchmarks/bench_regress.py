"""What a nightly regression of 300 cells costs: the first run, the next ones, and memory.

Run alone: ``python tests/benchmarks/bench_regress.py [CELLS]``. The cells are small and
invented (`tests/regress/many_cells.py`). Bounds: a second run without change costs at most
3 % of the first one's processor time; fitting all cells at once at least 5 times less than
one process a cell; the peak of memory grows by at most 10 % from a tenth of the cells to all.
Also shown, and required: one changed table works on its cell alone, a drifted cell fails
the run and is named. Processor times, which a busy machine does not stretch; wall times beside.
"""

from __future__ import annotations

import json
import os
import sys
import time
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

sys.path.insert(0, str(Path(__file__).parents[2]))

from tests.regress.many_cells import cell_name, scale_delays, write_many_cells

ROOT = Path(__file__).parents[2]
MOST_SECOND_SHARE = 0.03
LEAST_BATCH_RATIO = 5.0
MOST_GROWTH = 1.1
SINGLE_CELLS = 10
LIMIT = '\n[[limits]]\nof = "tau"\nbelow = "1n"\n'
"""Something to judge by before there is a baseline."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Ran:
    """A finished command: exit code, processor and wall seconds, peak MiB, what it said."""

    code: int
    cpu_s: float
    wall_s: float
    peak_mib: float
    said: str


def ran(folder, *words):
    """Run the command line in a process of its own, with what it begins."""
    log = folder / "said.txt"
    command = [sys.executable, "-m", "behavgen", "-C", str(folder), *words]
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    begin = time.perf_counter()
    file_actions = [
        (os.POSIX_SPAWN_OPEN, 1, str(log), os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o644),
        (os.POSIX_SPAWN_DUP2, 1, 2),
    ]
    pid = os.posix_spawn(sys.executable, command, environment, file_actions=file_actions)
    _, status, used = os.wait4(pid, 0)
    return Ran(
        code=os.waitstatus_to_exitcode(status),
        cpu_s=used.ru_utime + used.ru_stime,
        wall_s=time.perf_counter() - begin,
        peak_mib=used.ru_maxrss / 1024,
        said=log.read_text(encoding="utf-8"),
    )


def told(name, good, text):
    """Print one figure; return whether it is within its bound."""
    print(f"{'ok ' if good else 'NOT'} {name}: {text}", flush=True)
    return good


def models_of(folder):
    """Return every cell's model file with the moment of its last writing."""
    return {
        file.parent.name: file.stat().st_mtime_ns for file in folder.glob("build/*/*.model.json")
    }


def nights(folder, cells):
    """Run regressions of one project under changes; yield whether each was as it must be."""
    with (folder / "behavgen.toml").open("a", encoding="utf-8") as project:
        project.write(LIMIT)
    first = ran(folder, "regress", "-q")
    yield told("first run", first.code == 0, f"{first.cpu_s:.1f} s of CPU, {first.wall_s:.1f} s")
    recorded = ran(folder, "baseline", "-q")
    yield told("baseline", recorded.code == 0, f"{recorded.cpu_s:.2f} s of CPU")
    ran(folder, "regress", "-q")
    second = ran(folder, "regress", "-q")
    share = second.cpu_s / first.cpu_s
    text = f"{second.cpu_s:.2f} s of CPU, {100 * share:.2f} % of the first run (at most 3 %)"
    yield told("run without change", second.code == 0 and share <= MOST_SECOND_SHARE, text)
    before = models_of(folder)
    scale_delays(folder, 7, 1.00001)
    changed = ran(folder, "regress", "-q")
    redone = [name for name, moment in models_of(folder).items() if moment != before[name]]
    alone = changed.code == 0 and redone == [cell_name(7)]
    yield told("one changed table", alone, f"worked on {redone}, {changed.cpu_s:.2f} s of CPU")
    scale_delays(folder, 11, 1.3)
    drifted = ran(folder, "regress", "--json")
    data = json.loads(drifted.said)
    named = drifted.code == 1 and data["disagreements"] == [cell_name(11)]
    yield told("one drifted cell", named, f"exit code {drifted.code}, {data['disagreements']}")
    yield told("memory", True, f"{first.peak_mib:.0f} MiB at the peak, {cells} cells")


def at_once(folder, cells):
    """Compare fitting all cells in one command with one command a cell."""
    together = ran(folder, "fit", "-q")
    build = folder / "build"
    build.rename(folder / "build-before")
    singly = [ran(folder, "fit", "-q", cell_name(number)) for number in range(SINGLE_CELLS)]
    each_s = sum(one.cpu_s for one in singly) / SINGLE_CELLS
    each_wall_s = sum(one.wall_s for one in singly) / SINGLE_CELLS
    ratio = each_s / (together.cpu_s / cells)
    wall = each_wall_s / (together.wall_s / cells)
    return told(
        "fitting all at once",
        ratio >= LEAST_BATCH_RATIO,
        f"{1e3 * together.cpu_s / cells:.0f} ms of CPU a cell, one process a cell "
        f"{1e3 * each_s:.0f} ms: {ratio:.1f} times (at least 5), {wall:.1f} times by the clock",
    )


def growth(folder, cells):
    """Compare the peaks of memory of a tenth of the cells and of all of them."""
    few = ran(write_many_cells(folder / "few", cells // 10), "baseline", "-q", "--jobs", "1")
    many = ran(write_many_cells(folder / "many", cells), "baseline", "-q", "--jobs", "1")
    ratio = many.peak_mib / few.peak_mib
    text = f"{few.peak_mib:.0f} MiB at {cells // 10} cells, {many.peak_mib:.0f} MiB at {cells}"
    return told(
        "growth of memory", ratio <= MOST_GROWTH, f"{text}: {ratio:.2f} times (at most 1.1)"
    )


def main():
    cells = int(sys.argv[1]) if len(sys.argv) > 1 else 300
    with TemporaryDirectory() as scratch:
        folder = Path(scratch)
        passed = [*nights(write_many_cells(folder / "nights", cells), cells)]
        passed.append(at_once(write_many_cells(folder / "fits", cells), cells))
        passed.append(growth(folder, cells))
    return 0 if all(passed) else 1


if __name__ == "__main__":
    sys.exit(main())
