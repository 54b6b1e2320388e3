"""What batches left behind becomes results: their end, their benches, their messages."""

from pathlib import Path

import pytest

from behavgen.check.bench_results import bench_results, message_results, summarise
from behavgen.check.directed import WARNING_RUN
from behavgen.check.runs import Batch, Run, Settings
from behavgen.check.simulation import BatchOutcome
from behavgen.simulators.cocotb_benches import BenchOutcome
from behavgen.simulators.process import Finished
from tests.example_models import full_model

SETTINGS = Settings(process="typ", temperature_c=27.0)
SILENT = Run(index=3, name="says nothing", given=SETTINGS, meant=SETTINGS)
WARNING = Run(index=4, name=WARNING_RUN, given=SETTINGS, meant=SETTINGS)
TOLD = "[behavgen] check_top.run_4.dut t=5 decision 1: it happened\n"


def outcome(tmp_path: Path, *, code=0, log=3 * TOLD, benches=None):
    path = tmp_path / "first.log"
    path.write_text(log)
    passed = BenchOutcome(module="test_clock", name="all_is_well/mode=x", message="")
    return BatchOutcome(
        batch=Batch(name="first", plusargs=(), runs=(SILENT, WARNING), benches=("test_clock",)),
        finished=Finished(code=code, log=path),
        benches=(passed,) if benches is None else benches,
    )


def failing(tmp_path, **changed):
    found = outcome(tmp_path, **changed)
    results = [result for _, result in bench_results(found)]
    results += message_results(full_model(), found, [])
    return {result.name: result.message for result in results if not result.passed}


def test_all_is_well(tmp_path):
    assert failing(tmp_path) == {}


def test_a_failed_bench_names_its_option(tmp_path):
    bad = BenchOutcome(module="test_clock", name="all_is_well/mode=x", message="it is not")
    assert failing(tmp_path, benches=(bad,)) == {"all is well: mode x": "it is not"}


@pytest.mark.parametrize(
    ("changed", "said"),
    [
        ({"code": 1}, "ended with exit code 1; first.log ends with:"),
        ({"code": -11, "benches": ()}, "ended with exit code -11"),
        ({"benches": ()}, "ended with exit code 0"),
        ({"code": None}, "did not end in time; see first.log"),
    ],
)
def test_a_simulation_that_ends_otherwise_is_a_failure(changed, said, tmp_path):
    assert said in failing(tmp_path, **changed)["the simulation runs to its end: first"]


@pytest.mark.parametrize("count", [0, 2, 4])
def test_each_cause_is_warned_of_once(count, tmp_path):
    name = "each cause is warned of once"
    assert failing(tmp_path, log=count * TOLD) == {name: f"3 messages expected, {count} found"}


def test_a_silent_instance_says_nothing(tmp_path):
    log = 3 * TOLD + TOLD.replace("run_4", "run_3")
    name = "a silent instance says nothing"
    assert failing(tmp_path, log=log) == {name: "0 messages expected, 1 found"}


def test_the_summary_has_a_result_for_each_sentence(tmp_path):
    runs = [
        BenchOutcome(module="m", name=f"all_is_well/mode={mode}", message=message)
        for mode, message in (("x", ""), ("coin", "it is not"))
    ]
    suites = bench_results(outcome(tmp_path, benches=tuple(runs)))
    summary = {result.name: result for result in summarise(suites)}
    assert summary["all is well"].message == "1 of 2 fail, first mode coin: it is not"
    assert summary["the simulation runs to its end"].passed
