"""Many cells are brought up to date: what changed is redone, the rest is not, whatever happens."""

from __future__ import annotations

import gc
import os
import shutil
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from behavgen.errors import TableError, ToolError
from behavgen.freshness import RECORD_FILE
from behavgen.model import ComparatorModel
from behavgen.model_file import load_model
from behavgen.pipeline import CellPlace, fit_cell
from behavgen.project import load_project
from behavgen.regress import runs
from behavgen.regress.cell_work import CellTask, task_of, work_on
from behavgen.regress.runs import run_cells
from tests.regress.many_cells import cell_name, scale_delays, write_many_cells

ROOT = Path(__file__).parents[2]
CELLS = 5


def run_all(folder, **how):
    return {run.name: run for run in run_cells(load_project(folder), **how)}


def fresh_ones(folder, **how):
    return {name for name, run in run_all(folder, **how).items() if run.fresh}


def outputs(folder):
    """Return everything under the output folder but the cache."""
    out = load_project(folder).out
    return {
        file.relative_to(out).as_posix(): file.read_bytes()
        for file in out.rglob("*")
        if file.is_file() and runs.CACHE_FOLDER not in file.parts
    }


@pytest.fixture(scope="module")
def run_once(tmp_path_factory):
    folder = write_many_cells(tmp_path_factory.mktemp("many"), CELLS)
    done = run_all(folder)
    assert all(run.fresh and run.error is None for run in done.values())
    return folder


@pytest.fixture
def project(run_once, tmp_path):
    """A copy of a project all of whose cells are current."""
    return Path(shutil.copytree(run_once, tmp_path / "project"))


def test_cells_come_in_the_order_of_the_project_with_their_models(project):
    done = run_all(project)
    assert [*done] == [cell_name(number) for number in range(CELLS)]
    assert {run.model.cell.name for run in done.values()} == {*done}


def test_a_second_run_without_change_works_on_nothing(project, monkeypatch):
    def refuse(*_):
        raise AssertionError("a current cell was worked on")

    monkeypatch.setattr(runs, "work_on", refuse)
    assert not fresh_ones(project)


def test_only_the_cell_of_a_changed_table_is_worked_on(project):
    scale_delays(project, 2, 1.01)
    assert fresh_ones(project) == {cell_name(2)}


def test_the_run_leaves_what_the_single_steps_leave(run_once, tmp_path):
    folder = write_many_cells(tmp_path, CELLS)
    loaded = load_project(folder)
    for cell in loaded.cells:
        fit_cell(CellPlace(project=loaded, settings=cell))
    assert outputs(folder) == outputs(run_once)


def test_processes_give_the_same_bytes_as_the_serial_run(run_once, tmp_path, monkeypatch):
    monkeypatch.setattr(runs, "CELLS_OF_A_WORKER", 1)
    folder = write_many_cells(tmp_path, CELLS)
    assert [*run_all(folder, jobs=2)] == [cell_name(number) for number in range(CELLS)]
    assert outputs(folder) == outputs(run_once)


def test_a_table_that_is_as_it_was_before_needs_no_work(project):
    before = outputs(project)
    table = project / "tables" / f"{cell_name(0)}_delay.csv"
    as_it_was = table.read_bytes()
    scale_delays(project, 0, 1.01)
    assert fresh_ones(project) == {cell_name(0)}
    table.write_bytes(as_it_was)
    assert not fresh_ones(project)
    assert outputs(project) == before


def test_deleted_results_come_out_of_the_cache(project):
    before = outputs(project)
    for number in range(CELLS):
        shutil.rmtree(project / "build" / cell_name(number))
    assert not fresh_ones(project)
    assert outputs(project) == before


def test_the_cache_may_be_deleted(project):
    shutil.rmtree(project / "build" / runs.CACHE_FOLDER)
    assert not fresh_ones(project)


def test_another_program_works_on_everything_again(project, monkeypatch):
    for module in ("behavgen.cell_place", "behavgen.regress.cell_work"):
        monkeypatch.setattr(f"{module}.code_version", lambda: "another")
    assert len(fresh_ones(project)) == CELLS


def test_a_faulty_table_stops_its_cell_alone_and_keeps_its_places(project):
    table = project / "tables" / f"{cell_name(1)}_delay.csv"
    table.write_text(table.read_text(encoding="utf-8").replace("1e-06,", "1e-06,x", 1), "utf-8")
    scale_delays(project, 3, 1.01)
    done = run_all(project, jobs=2)
    assert isinstance(done[cell_name(1)].error, TableError)
    (fault,) = done[cell_name(1)].faults
    assert (fault.file, fault.row) == (f"tables/{cell_name(1)}_delay.csv", 2)
    assert done[cell_name(1)].model is None
    assert done[cell_name(3)].fresh
    assert done[cell_name(3)].error is None


def test_faults_survive_the_way_from_another_process(project, monkeypatch):
    monkeypatch.setattr(runs, "CELLS_OF_A_WORKER", 1)
    for number in (1, 2):
        table = project / "tables" / f"{cell_name(number)}_delay.csv"
        text = table.read_text(encoding="utf-8").replace("1e-06,", "1e-06,x", 1)
        table.write_text(text, "utf-8")
    done = run_all(project, jobs=2)
    assert [done[cell_name(n)].faults[0].row for n in (1, 2)] == [2, 2]
    assert isinstance(done[cell_name(2)].error, TableError)


def test_only_the_cells_asked_for_are_run(project):
    names = [cell_name(3), cell_name(1)]
    assert [*run_all(project, names=names)] == [cell_name(1), cell_name(3)]


def test_process_codes_stay_when_a_worker_fits_anew(tmp_path):
    folder = write_many_cells(tmp_path, 1)
    table = folder / "tables" / f"{cell_name(0)}_delay.csv"
    header, *rows = table.read_text(encoding="utf-8").splitlines()

    def write(*names):
        lines = [f"process,{header}", *(f"{name},{row}" for name in names for row in rows)]
        table.write_text("\n".join(lines) + "\n", encoding="utf-8")
        (run,) = run_all(folder).values()
        return {process.name: process.code for process in run.model.processes}

    assert write("typ", "slow") == {"typ": 0, "slow": 1}
    assert write("slow", "typ") == {"typ": 0, "slow": 1}


def test_a_worker_with_another_program_refuses(project):
    loaded = load_project(project)
    task = task_of(CellPlace(project=loaded, settings=loaded.cells[0]), with_check=False)
    other = CellTask(project=task.project, before=task.before, with_check=False, program="another")
    products = work_on(other)
    assert isinstance(products.error, ToolError)
    assert not products.files


def test_progress_is_told_after_every_cell_that_needs_work(project):
    for number in (0, 1, 4):
        scale_delays(project, number, 1.01)
    told = []
    assert len(fresh_ones(project, progress=told.append)) == 3
    assert [text.split(",")[0] for text in told] == ["1 of 3 cells", "2 of 3 cells", "3 of 3 cells"]


@pytest.mark.parametrize("again", [False, True])
def test_models_that_were_handed_on_are_not_kept(tmp_path, again):
    folder = write_many_cells(tmp_path, 8)
    if again:
        run_all(folder)
    before, most = models_alive(), 0  # other tests of this process may keep some
    for _ in run_cells(load_project(folder)):
        most = max(most, models_alive() - before)
    assert most <= 3


def models_alive():
    gc.collect()
    return sum(isinstance(one, ComparatorModel) for one in gc.get_objects())


RUN = """
import sys
from pathlib import Path
from behavgen.project import load_project
from behavgen.regress.runs import run_cells
if __name__ == "__main__":
    for run in run_cells(load_project(Path(sys.argv[1])), jobs=int(sys.argv[2])):
        print(run.name, run.fresh, flush=True)
"""


def started(folder, jobs, script):
    script.write_text(RUN, encoding="utf-8")
    command = [sys.executable, str(script), str(folder), str(jobs)]
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    return subprocess.Popen(command, stdout=subprocess.PIPE, text=True, env=environment)


def is_alive(pid):
    """Tell whether a process runs; one that nobody has waited for yet does not."""
    try:
        state = Path(f"/proc/{pid}/stat").read_text(encoding="utf-8").rpartition(")")[2].split()[0]
    except OSError:
        return False
    return state != "Z"


def children_of(pid):
    """Return the processes whose parent that is."""
    found = []
    for stat in Path("/proc").glob("[0-9]*/stat"):
        try:
            fields = stat.read_text(encoding="utf-8").rpartition(")")[2].split()
        except OSError:
            continue
        if int(fields[1]) == pid:
            found.append(int(stat.parent.name))
    return found


@pytest.mark.slow
@pytest.mark.skipif(not Path("/proc/self/stat").exists(), reason="looks for processes in /proc")
@pytest.mark.parametrize("jobs", [1, 2])
def test_a_killed_run_goes_on_where_it_stopped(tmp_path, jobs):
    count = 12
    folder = write_many_cells(tmp_path / "project", count)
    process = started(folder, jobs, tmp_path / "run.py")
    finished = [process.stdout.readline().split()[0] for _ in range(3)]
    workers = children_of(process.pid)
    process.send_signal(signal.SIGKILL)
    process.wait()
    redone = fresh_ones(folder)
    assert not {*finished} & redone
    assert redone
    whole = write_many_cells(tmp_path / "whole", count)
    run_all(whole)
    kept = {name: text for name, text in outputs(folder).items() if "unfinished" not in name}
    assert kept == outputs(whole)
    for _ in range(100):
        if not any(map(is_alive, workers)):
            break
        time.sleep(0.1)
    assert not any(map(is_alive, workers)), "a worker outlives the run"


@pytest.mark.slow
def test_two_runs_at_once_on_one_project_leave_what_one_leaves(tmp_path):
    count = 8
    folder = write_many_cells(tmp_path / "both", count)
    both = [started(folder, 1, tmp_path / f"run{i}.py") for i in range(2)]
    said = [process.communicate(timeout=300)[0] for process in both]
    assert [process.returncode for process in both] == [0, 0]
    assert all(len(text.splitlines()) == count for text in said)
    alone = write_many_cells(tmp_path / "alone", count)
    run_all(alone)
    assert outputs(folder) == outputs(alone)
    for number in range(count):
        assert load_model(folder / "build" / cell_name(number) / f"{cell_name(number)}.model.json")
    assert not fresh_ones(folder)


def test_a_half_written_record_costs_one_cell_its_work_and_no_other(project):
    shutil.rmtree(project / "build" / runs.CACHE_FOLDER)
    (project / "build" / cell_name(2) / RECORD_FILE).write_text('{"format": 1, "st', "utf-8")
    assert fresh_ones(project) == {cell_name(2)}


@pytest.mark.slow
def test_checks_are_made_once_and_kept_with_their_cell(tmp_path):
    folder = write_many_cells(tmp_path, 1)
    (first,) = run_cells(load_project(folder), with_check=True)
    assert first.fresh
    assert first.check.passed
    before = outputs(folder)
    assert f"{first.name}/check/check.json" in before
    (second,) = run_cells(load_project(folder), with_check=True)
    assert not second.fresh
    assert second.check == first.check
    shutil.rmtree(folder / "build" / first.name)
    (third,) = run_cells(load_project(folder), with_check=True)
    assert not third.fresh
    assert outputs(folder) == before
