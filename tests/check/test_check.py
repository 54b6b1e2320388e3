"""The whole check in a real simulator: what is right passes, what is wrong is told."""

import json
import os
import re
import subprocess
import sys
from dataclasses import replace
from functools import partial
from pathlib import Path

import pytest

from behavgen.check import preparation
from behavgen.check.runs import plan_batches
from behavgen.check.verdict import load_report
from behavgen.errors import ProjectError, ToolError
from behavgen.model import Process
from tests.check.checking import checked, emitted_text, failures
from tests.example_models import complete_model, full_model, minimal_model, renamed_pins_model
from tests.simulators.mock_tools import put_on_path

SMALL = minimal_model()
ROOT = Path(__file__).parents[2]


def without(model, *effects):
    return replace(model, **dict.fromkeys(effects))


MODELS = {
    "memory, aperture and energy": complete_model(),
    "every effect": full_model(),
    "falling edge, reset low, coin": full_model(
        decides_on="falling", in_reset="low", when_unresolved="coin"
    ),
    "holds, picoseconds": full_model(in_reset="hold", when_unresolved="hold", time_precision="1ps"),
    "renamed pins, reset mid": renamed_pins_model(in_reset="mid"),
    "renamed pins, holds, falling edge": renamed_pins_model(in_reset="hold", decides_on="falling"),
    "delay only": minimal_model(in_reset="low"),
    "no delay": without(full_model(), "delay", "reset"),
    "noise only": without(full_model(), "delay", "reset", "offset", "mismatch"),
    "no noise": without(full_model(in_reset="hold"), "noise", "mismatch"),
}


@pytest.mark.slow
@pytest.mark.parametrize("model", MODELS.values(), ids=MODELS.keys())
def test_what_is_emitted_passes(model, tmp_path):
    report = checked(model, tmp_path)
    assert failures(report) == []
    assert report.passed
    assert report.decisions >= 20_000
    assert report.disagreement_count == report.excluded == 0
    assert report.worst_delay_ticks <= 1
    assert report.simulator.startswith("Icarus Verilog ")


@pytest.fixture(scope="module")
def small_check(tmp_path_factory):
    """Check of the smallest model, made once: its folder and its report."""
    folder = tmp_path_factory.mktemp("small")
    told = []
    report = checked(SMALL, folder, progress=told.append)
    return folder, report, told


def test_a_check_leaves_its_report_its_results_and_its_logs(small_check):
    folder, report, told = small_check
    names = {path.name for path in (folder / "check").iterdir()}
    assert {"check.json", "results.xml", "compile.log"} <= names
    suffixes = {path.suffix for path in (folder / "check").iterdir()}
    assert suffixes == {".csv", ".json", ".log", ".xml"}
    assert [path.name for path in folder.iterdir()] == ["check"]
    assert load_report(folder / "check" / "check.json") == report
    assert told[0] == "compiling"
    assert any("decisions" in words for words in told)


def test_sentences_name_what_was_checked(small_check):
    _, report, _ = small_check
    names = {bench.name for bench in report.benches}
    assert "every bit is that of the reference" in names
    assert "an unknown process code is fatal and names the known ones" in names
    assert len(names) > 25
    results = (small_check[0] / "check" / "results.xml").read_text()
    assert "every bit is that of the reference: nominal, noise off, coldest" in results


@pytest.mark.slow
def test_the_same_check_gives_the_same_bytes_whatever_the_jobs(small_check, tmp_path):
    folder, _, _ = small_check
    checked(SMALL, tmp_path, jobs=1)
    first, second = (path / "check" / "check.json" for path in (folder, tmp_path))
    assert first.read_bytes() == second.read_bytes()


@pytest.mark.slow
def test_nothing_in_the_shell_changes_the_verdict(small_check, tmp_path):
    """Variables that would skip tests, drop assertions or stop Python, and a foreign folder."""
    trouble = {
        "COCOTB_TEST_FILTER": "nothing",
        "COCOTB_TEST_MODULES": "nothing",
        "COCOTB_RESULTS_FILE": "elsewhere.xml",
        "COCOTB_RESOLVE_X": "ZEROS",
        "GPI_EXTRA": "nothing.so",
        "TESTCASE": "nothing",
        "PYTHONOPTIMIZE": "2",
        "PYTHONWARNINGS": "error",
        "PYTHONHASHSEED": "5",
        "SIM_CMD_PREFIX": "false",
        "WAVES": "1",
    }
    program = (
        "import sys; from pathlib import Path; sys.path.insert(0, sys.argv[1])\n"
        "from tests.check.checking import checked; from tests.example_models import minimal_model\n"
        "sys.exit(0 if checked(minimal_model(), Path(sys.argv[2])).passed else 1)\n"
    )
    elsewhere = tmp_path / "a folder"
    elsewhere.mkdir()
    environment = {**os.environ, **trouble, "PYTHONDONTWRITEBYTECODE": "1"}
    command = [sys.executable, "-W", "ignore", "-c", program, str(ROOT), str(tmp_path / "out put")]
    subprocess.run(command, cwd=elsewhere, env=environment, check=True)
    assert list(elsewhere.iterdir()) == []
    here, there = small_check[0], tmp_path / "out put"
    first, second = (path / "check" / "check.json" for path in (here, there))
    assert json.loads(first.read_text()) == json.loads(second.read_text())


def test_a_text_that_does_not_compile_is_a_verdict_with_the_place(tmp_path):
    text = emitted_text(SMALL).replace("endmodule", "endmodul")
    report = checked(SMALL, tmp_path, text)
    assert not report.passed
    assert report.decisions == 0
    (bench,) = report.benches
    assert bench.name == "the text compiles"
    assert "compile.log" in bench.message
    assert "latch_minimal.sv:" in bench.message


@pytest.mark.slow
def test_insides_that_cannot_be_read_are_told_and_the_rest_is_checked(tmp_path):
    text = re.sub(r"\bx_cause\b", "hidden", emitted_text(SMALL))
    report = checked(SMALL, tmp_path, text)
    failed = {bench.name for bench in report.benches if not bench.passed}
    assert "the insides can be read" in failed
    assert all("insides" in name or name.startswith("overdrives") for name in failed)
    assert report.decisions >= 20_000
    assert report.disagreement_count == 0


@pytest.mark.slow
def test_a_parameter_that_is_missing_is_told(tmp_path):
    text = re.sub(r"\bMEMORY_ON\b", "REMEMBERS", emitted_text(SMALL))
    report = checked(SMALL, tmp_path, text)
    failed = {bench.name: bench.message for bench in report.benches if not bench.passed}
    message = failed["the parameters are those of the interface"]
    assert message == "the module has no parameter MEMORY_ON"


def test_another_module_is_a_verdict(tmp_path):
    text = emitted_text(SMALL).replace("module latch_minimal", "module another")
    assert not checked(SMALL, tmp_path, text).passed


def test_a_simulation_that_ends_itself_is_a_verdict(tmp_path):
    text = emitted_text(SMALL).replace("endmodule", '  initial #1 $fatal(1, "gone");\nendmodule')
    report = checked(SMALL, tmp_path, text)
    assert not report.passed
    failed = {bench.name: bench.message for bench in report.benches if not bench.passed}
    message = failed["the simulation runs to its end"]
    assert "ended with exit code 1; parameters_1.log ends with:" in message
    assert "gone" in message


def test_a_stratum_that_was_not_exercised_fails_the_check(tmp_path, monkeypatch):
    short = partial(plan_batches, decisions=2000)
    monkeypatch.setattr(preparation, "plan_batches", short)
    report = checked(SMALL, tmp_path)
    assert all(bench.passed for bench in report.benches)
    assert report.disagreement_count == 0
    assert any(stratum.short for stratum in report.strata)
    assert not report.passed


def test_a_missing_simulator_is_told_before_anything_is_written(tmp_path, monkeypatch):
    put_on_path(tmp_path / "bin", monkeypatch)
    with pytest.raises(ToolError, match="apt-get install iverilog"):
        checked(SMALL, tmp_path / "out")
    assert not (tmp_path / "out").exists()


def test_a_folder_that_cannot_be_made_is_told(tmp_path):
    (tmp_path / "taken").write_text("a file")
    with pytest.raises(ProjectError, match="cannot be made"):
        checked(SMALL, tmp_path / "taken")


@pytest.mark.slow
def test_process_codes_are_those_of_the_model(tmp_path):
    """Codes far apart and a process name with a dot: the module must still be told apart."""
    far = replace(SMALL, processes=(Process(name="nominal", code=1000),))
    report = checked(far, tmp_path)
    assert failures(report) == []
