"""What a check can be asked beside its usual work, as users meet it."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from tests.cli.commands import run
from tests.small_project import write_small_project

pytestmark = pytest.mark.slow


@pytest.fixture(scope="module")
def project(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return write_small_project(tmp_path_factory.mktemp("wishes"))


def test_one_question_alone(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "-C", project, "check", "--only", "tables")
    assert ran.exit_code == 0
    assert re.search(r"tables +delay: \d+ rows, .+ % rms, at most .+ %", ran.stdout)
    assert "compared   0 decisions" in ran.stdout
    states = run(capsys, "-C", project, "--json").json
    assert states["cells"]["latch"]["check"] == "missing"


def test_one_decision_again_with_its_waveforms(
    project: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "window.vcd"
    told = run(capsys, "-C", project, "check", "--run", "delay off", "--decision", "3",
               "--waveforms", file)  # fmt: skip
    assert told.exit_code == 0
    assert re.search(r"decision +agrees", told.stdout)
    assert file.read_text(encoding="utf-8").startswith("$date")


def test_a_run_that_is_not_there(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "-C", project, "check", "--run", "no such run")
    assert ran.exit_code == 2
    assert "no run 'no such run'" in ran.stderr
    assert "delay off" in ran.stderr


def test_a_wrong_model_is_told_with_the_command_that_repeats_it(
    project: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(capsys, "-C", project, "emit").exit_code == 0
    text = (project / "build" / "latch" / "latch.sv").read_text(encoding="utf-8")
    file = tmp_path / "wrong.sv"
    file.write_text(re.sub(r"overdrive_v > 0\.0\)", "overdrive_v < 0.0)", text), encoding="utf-8")
    ran = run(capsys, "-C", project, "check", "--only", "decisions", "--model", file)
    assert ran.exit_code == 1
    shown = " ".join(ran.stdout.split())
    again = re.search(r"--run ('.+?'|\S+) --decision (\d+)", shown)
    assert again is not None
    name = again[1].strip("'")
    repeated = run(capsys, "-C", project, "check", "--model", file, "--run", name,
                   "--decision", again[2])  # fmt: skip
    assert repeated.exit_code == 1
    assert "bit of decision" in " ".join(repeated.stdout.split())
