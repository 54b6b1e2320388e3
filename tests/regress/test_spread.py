"""Work spread over processes: results in order, workers that die, tasks not piling up."""

from __future__ import annotations

import os
import time
from functools import partial

import pytest

from behavgen.errors import ToolError
from behavgen.regress.spread import spread
from behavgen.regress.workers import AHEAD


def squared_slowly(task):
    time.sleep(0.2 if task == 0 else 0.0)
    return task * task


def killed_once(folder, task):
    """Die of task 3, but not a second time."""
    mark = folder / "died"
    if task == 3 and not mark.exists():
        mark.touch()
        os._exit(9)
    return task


def killed_always(task):
    if task == 3:
        os._exit(9)
    return task


def stopping(task):
    if task == 2:
        raise ValueError("a bug")
    return task


def threads_of(_):
    return os.environ["OPENBLAS_NUM_THREADS"]


@pytest.mark.parametrize("jobs", [1, 2])
def test_results_come_in_the_order_of_the_tasks(jobs):
    assert [*spread(squared_slowly, range(8), jobs=jobs)] == [n * n for n in range(8)]


def test_tasks_are_taken_only_a_few_at_a_time():
    taken = []

    def tasks():
        for number in range(40):
            taken.append(number)
            yield number

    results = spread(squared_slowly, tasks(), jobs=2)
    for number in range(10):
        next(results)
        assert len(taken) <= number + 1 + 2 * AHEAD
    results.close()


def test_a_lost_worker_costs_a_retry(tmp_path):
    assert [*spread(partial(killed_once, tmp_path), range(8), jobs=2)] == [*range(8)]
    assert (tmp_path / "died").exists()


def test_a_task_that_kills_every_worker_is_given_up_and_the_others_are_done():
    results = [*spread(killed_always, range(8), jobs=2)]
    assert isinstance(results[3], ToolError)
    assert "lost" in str(results[3])
    assert [n for n in results if not isinstance(n, ToolError)] == [0, 1, 2, 4, 5, 6, 7]


def test_a_bug_is_not_hidden():
    results = spread(stopping, range(8), jobs=2)
    assert [next(results), next(results)] == [0, 1]
    with pytest.raises(ValueError, match="a bug"):
        next(results)


def test_workers_leave_the_cores_to_each_other():
    assert [*spread(threads_of, range(2), jobs=2)] == ["1", "1"]
