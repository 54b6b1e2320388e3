"""The same harness and stimulus in Verilator: the same bits and delays, to the last place."""

from pathlib import Path

import pytest

from behavgen.check.agreement import compare
from behavgen.check.harness import harness_macros, top_text, write_stimulus
from behavgen.check.runs import TOP, plan_batches
from behavgen.check.simulation import play
from behavgen.check.stimulus import make_stimulus
from behavgen.check.waveform import expect, read_record
from behavgen.resources import sim_folder
from behavgen.simulators.process import run_logged
from behavgen.simulators.verilator import find_verilator
from tests.check.checking import emitted_text
from tests.example_models import full_model

MODEL = full_model()
WITHOUT_X = ("typ, noise off, between", "slow, noise on")
"""Runs whose unresolved decisions hold or toss a coin: Verilator knows no X."""


@pytest.fixture(scope="module")
def built(tmp_path_factory):
    """A folder with a program that plays the runs without X, and these runs."""
    folder = tmp_path_factory.mktemp("two_states")
    runs = [run for run in plan_batches(MODEL)[0].runs if run.name in WITHOUT_X]
    texts = {"module.sv": emitted_text(MODEL), "top.sv": top_text(MODEL, runs)}
    for name, text in texts.items():
        (folder / name).write_text(text)
    sources = [folder / "module.sv", sim_folder() / "tops" / "block_harness.sv", folder / "top.sv"]
    done = find_verilator().build(
        sources, top=TOP, output=folder / "simulation", log=folder / "build.log",
        macros=harness_macros(MODEL, texts["module.sv"]),
    )  # fmt: skip
    assert done.code == 0, done.tail(20)
    return folder, {run.name: run for run in runs}


def agreement(folder: Path, run):
    stimulus = make_stimulus(MODEL, run, seed=1)
    write_stimulus(folder, run, stimulus)
    plusargs = [f"+{arg}" for arg in play(run.index, run.index)]
    program = [folder / "simulation", *plusargs]
    assert run_logged(program, log=folder / "run.log", folder=folder).code == 0
    record = read_record(folder / f"{run.index}.events")
    return compare(expect(MODEL, run, stimulus), record)


@pytest.mark.slow
@pytest.mark.parametrize("name", WITHOUT_X)
def test_a_two_state_simulator_agrees_in_every_decision(name, built):
    folder, runs = built
    found = agreement(folder, runs[name])
    assert not found.fault.any()
    assert not found.delay_error.any()
    assert found.compared.sum() > 1000
