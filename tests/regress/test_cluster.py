"""The work spread over a real Dask cluster on loopback, one of whose workers is killed."""

from __future__ import annotations

import pytest

from behavgen.__main__ import main
from behavgen.errors import ToolError
from behavgen.project import load_project
from behavgen.regress.runs import run_cells
from behavgen.regress.spread import spread
from tests.regress.dask_cluster import running_cluster
from tests.regress.many_cells import write_many_cells

CELLS = 10


def files_under(folder):
    return {
        file.relative_to(folder).as_posix(): file.read_bytes()
        for file in folder.rglob("*")
        if file.is_file()
    }


@pytest.mark.slow
def test_a_killed_worker_costs_a_retry_and_no_byte_differs_from_the_serial_run(
    tmp_path, monkeypatch
):
    alone = load_project(write_many_cells(tmp_path / "alone", CELLS))
    assert all(run.error is None for run in run_cells(alone))
    spread_out = load_project(write_many_cells(tmp_path / "spread", CELLS))
    with running_cluster(tmp_path, workers=2) as cluster:
        runs = []
        for run in run_cells(spread_out, scheduler=cluster.address):
            if not runs:
                cluster.workers[0].kill()
            runs.append(run)
        assert cluster.workers[0].wait() != 0
        by_command = write_many_cells(tmp_path / "command", 3)
        with (by_command / "behavgen.toml").open("a", encoding="utf-8") as file:
            file.write('\n[[limits]]\nof = "tau"\nbelow = "1n"\n')
        monkeypatch.setenv("DASK_SCHEDULER_ADDRESS", cluster.address)
        assert main(["-C", str(by_command), "regress", "-q"]) == 0
    assert [run.name for run in runs] == [cell.name for cell in spread_out.cells]
    assert all(run.fresh and run.error is None and run.model is not None for run in runs)
    assert files_under(spread_out.out) == files_under(alone.out)


def test_a_scheduler_that_does_not_answer_is_a_missing_tool(monkeypatch):
    monkeypatch.setattr("behavgen.regress.cluster.ANSWER_WITHIN_S", 1)
    with pytest.raises(ToolError, match=r"127\.0\.0\.1:1 does not answer"):
        list(spread(str, [1], scheduler="tcp://127.0.0.1:1"))
