"""Past values come back as recorded, under several processes, and are easily thrown away."""

from __future__ import annotations

import os
import sqlite3
import subprocess
import sys
import time
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest

from behavgen.errors import ProjectError
from behavgen.regress.history import History
from behavgen.regress.past import PastValue

ROOT = Path(__file__).parents[2]
DAY = datetime(2026, 3, 1, tzinfo=UTC)


def tau(value, cell="latch", parameter="tau_s", verdict=""):
    return PastValue(
        cell=cell, parameter=parameter, unit="s", value=value, low=0.9 * value, verdict=verdict
    )


@pytest.fixture
def file(tmp_path):
    return tmp_path / "build" / "history.sqlite"


@pytest.fixture
def history(file):
    with History(file) as opened:
        yield opened


def run_on(history, day, *values, passed=True):
    run = history.begin(DAY + timedelta(days=day))
    history.record(run, values)
    history.finish(run, passed=passed)
    return run


def test_values_come_back_as_recorded(history):
    values = (tau(1e-11, verdict="drifts"), tau(0.1, parameter="alpha"), tau(2e-11, cell="other"))
    run = run_on(history, 0, *values)
    assert history.values(run, "latch") == (values[1], values[0])
    assert history.values(run, "other") == (values[2],)
    assert history.values(run + 1, "latch") == ()


def test_runs_tell_how_they_ended(history):
    run_on(history, 0)
    run_on(history, 1, passed=False)
    history.begin(DAY + timedelta(days=2))
    assert [run.passed for run in history.runs()] == [True, False, None]
    assert [run.began for run in history.runs()] == [DAY + timedelta(days=d) for d in range(3)]


def test_trends_run_from_old_to_new_for_each_parameter(history):
    for day in range(5):
        run_on(history, day, tau(1e-11 + day * 1e-12), tau(0.1 + day, parameter="alpha"))
    alpha, taus = history.trends("latch", last=3)
    assert (alpha.parameter, taus.parameter) == ("alpha", "tau_s")
    assert [point.value for point in alpha.points] == [2.1, 3.1, 4.1]
    assert [point.began.day for point in taus.points] == [3, 4, 5]
    assert taus.points[-1].low == 0.9 * taus.points[-1].value
    assert taus.points[-1].high is None
    assert history.trends("nobody") == ()


def test_a_run_at_a_moment_is_the_last_finished_one_before(history):
    first, second = run_on(history, 0), run_on(history, 2)
    history.begin(DAY + timedelta(days=3))  # killed
    assert history.run_at(DAY - timedelta(seconds=1)) is None
    assert history.run_at(DAY + timedelta(days=1)).number == first
    assert history.run_at(DAY + timedelta(days=9)).number == second


def test_recording_a_cell_again_in_a_run_replaces_it(history):
    run = history.begin(DAY)
    history.record(run, [tau(1e-11)])
    history.record(run, [tau(2e-11)])
    assert [value.value for value in history.values(run, "latch")] == [2e-11]


def test_pruning_keeps_the_last_runs_and_no_number_comes_again(history):
    numbers = [run_on(history, day, tau(1e-11, cell=f"cell{day}")) for day in range(6)]
    assert history.prune(keep_runs=2) == 4
    assert [run.number for run in history.runs()] == numbers[-2:]
    assert history.trends("cell0") == ()
    assert len(history.trends("cell5")) == 1
    assert history.prune(keep_runs=0) == 2
    assert history.begin(DAY) > numbers[-1]


def test_it_opens_again_after_being_deleted(file):
    with History(file) as history:
        run_on(history, 0, tau(1e-11))
    for part in file.parent.iterdir():
        part.unlink()
    with History(file) as history:
        assert history.runs() == ()


def test_a_failed_write_leaves_nothing(history):
    run = history.begin(DAY)
    broken = PastValue(cell="latch", parameter="tau_s", unit="s", value=None)
    with pytest.raises(ProjectError):
        history.record(run, [tau(1e-11, parameter="alpha"), broken])
    assert history.values(run, "latch") == ()
    assert history.trends("latch") == ()


@pytest.mark.parametrize(
    "content", [b"no database at all, but long enough" * 40, b"SQLite format 3"]
)
def test_a_file_that_is_no_history_is_told_with_the_way_out(file, content):
    file.parent.mkdir()
    file.write_bytes(content)
    with pytest.raises(ProjectError, match=r"history\.sqlite.*cannot be used.*delete it"):
        History(file)


def test_another_format_is_told(file):
    History(file).close()
    base = sqlite3.connect(file)
    base.execute("PRAGMA user_version = 99")
    base.close()
    with pytest.raises(ProjectError, match="history format 99"):
        History(file)


WRITER = """
import sys, time
from datetime import UTC, datetime
from pathlib import Path
from behavgen.regress.history import History
from behavgen.regress.past import PastValue
slowest = 0.0
with History(Path(sys.argv[1])) as history:
    run = history.begin(datetime(2026, 3, 1, tzinfo=UTC))
    for number in range(60):
        values = [PastValue(cell=f"cell{number}", parameter=f"p{k}", unit="1", value=float(run))
                  for k in range(12)]
        begin = time.perf_counter()
        history.record(run, values)
        slowest = max(slowest, time.perf_counter() - begin)
    history.finish(run, passed=True)
print(run, slowest)
"""


def test_processes_that_write_at_once_lose_nothing_and_wait_for_a_write_only(file):
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    command = [sys.executable, "-c", WRITER, str(file)]
    writers = [
        subprocess.Popen(command, stdout=subprocess.PIPE, text=True, env=environment)
        for _ in range(4)
    ]
    said = [writer.communicate(timeout=120)[0].split() for writer in writers]
    assert sorted(int(run) for run, _ in said) == [1, 2, 3, 4]
    with History(file) as history:
        assert [run.passed for run in history.runs()] == 4 * [True]
        for run in range(1, 5):
            for number in (0, 59):
                assert [v.value for v in history.values(run, f"cell{number}")] == 12 * [float(run)]
    # Each waits at most for the few writes that are before it, far from the others' whole run.
    assert max(float(slowest) for _, slowest in said) < 5.0


def test_a_reader_is_not_held_up_by_a_write_under_way(file, history):
    run_on(history, 0, tau(1e-11))
    writing = sqlite3.connect(file, isolation_level=None)
    writing.execute("BEGIN IMMEDIATE")
    writing.execute("UPDATE run SET passed = 0")
    begin = time.perf_counter()
    assert history.runs()[0].passed is True
    assert time.perf_counter() - begin < 1.0
    writing.execute("ROLLBACK")
    writing.close()
