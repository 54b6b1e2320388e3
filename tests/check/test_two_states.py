"""In Verilator: the same decisions to the last place, and the whole check of a small cell."""

from pathlib import Path

import pytest

from behavgen.check.agreement import compare
from behavgen.check.harness import harness_macros, top_text, write_stimulus
from behavgen.check.runs import TOP, plan_batches
from behavgen.check.simulation import play
from behavgen.check.stimulus import make_stimulus
from behavgen.check.waveform import expect, read_record
from behavgen.demo import copy_demo
from behavgen.fit.fit import fit
from behavgen.project import load_project
from behavgen.resources import sim_folder
from behavgen.simulators.icarus import find_icarus
from behavgen.simulators.process import run_logged
from behavgen.simulators.verilator import find_verilator
from behavgen.tables.read import read_tables
from tests.check.checking import checked, emitted_text, failures
from tests.example_models import full_model

MODEL = full_model()
WITHOUT_X = ("typ, noise off, between", "slow, noise on")
"""Runs whose unresolved decisions hold or toss a coin: Verilator knows no X."""


@pytest.fixture(scope="module")
def prepared(tmp_path_factory):
    """The runs without X, a folder with their texts and stimulus, the sources and macros."""
    folder = tmp_path_factory.mktemp("two_states")
    runs = [run for run in plan_batches(MODEL)[0].runs if run.name in WITHOUT_X]
    texts = {"module.sv": emitted_text(MODEL), "top.sv": top_text(MODEL, runs)}
    for name, text in texts.items():
        (folder / name).write_text(text)
    for run in runs:
        write_stimulus(folder, run, make_stimulus(MODEL, run, seed=1))
    sources = [folder / "module.sv", sim_folder() / "tops" / "block_harness.sv", folder / "top.sv"]
    return runs, folder, sources, harness_macros(MODEL, texts["module.sv"])


def plusargs(runs) -> list[str]:
    """Return what makes one simulation play all runs at once."""
    indices = [run.index for run in runs]
    return [f"+{arg}" for arg in play(min(indices), max(indices))]


def in_icarus(runs, folder: Path, sources, macros) -> None:
    icarus, compiled = find_icarus(), folder / "compiled"
    done = icarus.compile(sources, top=TOP, output=compiled, log=folder / "i.log", macros=macros)
    assert done.code == 0, done.tail(20)
    command = ["vvp", "-n", compiled, *plusargs(runs)]
    assert run_logged(command, log=folder / "icarus.log", folder=folder).code == 0


def in_verilator(runs, folder: Path, sources, macros) -> None:
    program = folder / "simulation"
    done = find_verilator().build(
        sources, top=TOP, output=program, log=folder / "v.log", macros=macros
    )
    assert done.code == 0, done.tail(20)
    command = [program, *plusargs(runs)]
    assert run_logged(command, log=folder / "verilator.log", folder=folder).code == 0


@pytest.mark.slow
@pytest.mark.parametrize("simulate", [in_icarus, in_verilator])
def test_instances_side_by_side_agree_in_every_decision(simulate, prepared):
    runs, folder, *build = prepared
    simulate(runs, folder, *build)
    for run in runs:
        record = read_record(folder / f"{run.index}.events")
        found = compare(expect(MODEL, run, make_stimulus(MODEL, run, seed=1)), record)
        assert not found.fault.any()
        assert not found.delay_error.any()
        assert found.compared.sum() > 1000


@pytest.mark.slow
def test_a_small_cell_passes_the_whole_check_in_verilator(tmp_path):
    project = load_project(copy_demo(tmp_path / "demo"))
    report = checked(
        fit(read_tables(project, "slicer")), tmp_path,
        questions=("decisions", "tables", "distribution"), wishes={"simulator": "verilator"},
    )  # fmt: skip
    assert failures(report) == []
    assert report.passed
    assert report.simulator.startswith("Verilator ")
    assert report.decisions >= 20_000
    assert report.closure
    assert report.distribution
