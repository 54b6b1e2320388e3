"""The command that says what to measure next, as users meet it."""

from __future__ import annotations

import json
import re
import subprocess
import sys
from pathlib import Path

import pytest

from behavgen.cli.caution import CAUTION
from tests.cli.commands import run
from tests.small_project import write_small_project


@pytest.fixture
def project(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A project in which one stands: 9 levels of 1000 decisions around 0 V, sigma 1 mV."""
    folder = write_small_project(tmp_path / "project")
    monkeypatch.chdir(folder)
    return folder


@pytest.fixture
def outside(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder without a project."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def unwrapped(text: str) -> str:
    return " ".join(text.split())


class TestInAProject:
    """What the tables tell and what they do not."""

    def test_what_is_known_and_what_to_measure(
        self, project: Path, capsys: pytest.CaptureFixture[str]
    ) -> None:
        ran = run(capsys, "plan", "--sigma-within", "0.5%")
        assert ran.exit_code == 0
        assert ran.stderr == ""
        shown = unwrapped(ran.stdout)
        known = re.search(r"noise sigma within ([\d.]+) %; 0.5 % is not yet reached", shown)
        assert known is not None
        assert 2.5 < float(known[1]) < 4.5  # 1.96 sqrt(2.6 / 9000) of such levels is 3.3 %
        levels = re.search(r"(\d+) decisions at each of (.+): sigma within 0.5 %", shown)
        assert levels is not None
        assert re.fullmatch(r"-[\d.]+ mV, -[\d.]+ mV, [\d.]+ mV, [\d.]+ mV", levels[2])
        # 1.6436 (1.96 / 0.005)^2 = 252 600 at the least
        assert 1.0 < 4 * float(levels[1]) / 252_600 < 1.2
        assert f"cost {4 * int(levels[1])} decisions with noise" in shown
        assert CAUTION in shown
        assert ran.stdout.splitlines()[-1].startswith("OK  1 cell planned.  Next: measure these")
        assert ran.stdout.splitlines()[-1].endswith("then behavgen plan")

    def test_usual_wishes(self, project: Path, capsys: pytest.CaptureFixture[str]) -> None:
        shown = unwrapped(run(capsys, "plan").stdout)
        assert "noise sigma 5 %, mismatch 10 %, tau 1 %, delay 2 %" in shown
        assert "5 % is reached" in shown
        assert "instances 197: spread within 10 %" in shown
        assert "delay: supply only at 1 V, 1.2 V, so a bend is unknown: measure at 1.1 V" in shown

    def test_all_is_reached(self, project: Path, capsys: pytest.CaptureFixture[str]) -> None:
        ran = run(capsys, "plan", "--sigma-within", "20%", "-q")
        assert ran.stdout == (
            "OK  1 cell planned; every interval wanted is reached.  Next: behavgen report\n"
        )

    def test_in_json(self, project: Path, capsys: pytest.CaptureFixture[str]) -> None:
        told = run(capsys, "plan", "latch", "--json", "--sigma-within", "0.5%").json
        plan = told["cells"]["latch"]
        (curve,) = plan["curves"]
        assert sum(curve["s_curve"]["trials"]) == plan["cost"]["decisions"] == curve["decisions"]
        assert curve["s_curve"]["sigma_half"] <= 0.005
        assert plan["goals"]["sigma"] == 0.005
        assert plan["done"] is False

    def test_what_no_table_tells_needs_a_guess(
        self, project: Path, capsys: pytest.CaptureFixture[str]
    ) -> None:
        ran = run(capsys, "plan", "--mean-within", "0.5m")
        assert "mean offset: no spread is known; give --guess-spread" in unwrapped(ran.stdout)
        assert run(capsys, "plan", "--mean-within", "0.5m", "--strict").exit_code == 1
        guessed = run(capsys, "plan", "--mean-within", "0.5m", "--guess-spread", "6m")
        assert re.search(r"instances +\d+: .*mean within 500 uV", unwrapped(guessed.stdout))


class TestFromGuesses:
    """Before there is a project."""

    def test_a_first_measurement(self, outside: Path, capsys: pytest.CaptureFixture[str]) -> None:
        guesses = ("--guess-sigma", "0.5m", "--guess-spread", "6m", "--guess-tau", "15p")
        ran = run(capsys, "plan", *guesses)
        assert ran.exit_code == 0
        shown = unwrapped(ran.stdout)
        assert "halve -24 mV..24 mV 7 times to find the trip point" in shown
        assert "times the fewest possible" in shown
        assert "even in their logarithm: tau within" in shown
        assert "windows at" in shown
        assert ran.stdout.splitlines()[-1].endswith("behavgen new DIR --from FILE ...")

    def test_instances_need_no_guess(
        self, outside: Path, capsys: pytest.CaptureFixture[str]
    ) -> None:
        """A relative interval of a spread depends on the number of instances alone."""
        told = run(capsys, "plan", "--mismatch-within", "10%", "--json").json
        assert told["cells"]["first measurement"]["instances"]["instances"] == 197

    def test_nothing_to_go_by(self, outside: Path, capsys: pytest.CaptureFixture[str]) -> None:
        ran = run(capsys, "plan")
        assert ran.exit_code == 2
        assert "behavgen plan --sigma-within 5% --guess-sigma 0.5m" in ran.complaint


def test_a_model_file(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(capsys, "fit").exit_code == 0
    file = project / "build" / "latch" / "latch.model.json"
    ran = run(capsys, "plan", "--model", file, "--sigma-within", "0.5%")
    assert ran.exit_code == 0
    assert "is not yet reached" in unwrapped(ran.stdout)
    missing = run(capsys, "plan", "--model", "nowhere.json")
    assert missing.exit_code == 2
    assert "nowhere.json" in missing.complaint


def test_every_wrong_number_is_named(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    words = ("--sigma-within", "5", "--offset-within", "50 parsec", "--guess-tau", "0")
    ran = run(capsys, "plan", *words)
    assert ran.exit_code == 2
    said = ran.stderr.splitlines()
    assert len(said) == 3
    assert said[0].startswith("--sigma-within: '5' is out of range")
    assert said[1].startswith("--offset-within: '50 parsec'")
    assert said[2].startswith("--guess-tau: '0' is out of range")


def test_help_imports_nothing_heavy(outside: Path) -> None:
    root = Path(__file__).parents[2]
    code = (
        "import sys, json; from behavgen.__main__ import main; main(['plan', '--help']);"
        "heavy = {'numpy', 'scipy', 'polars', 'jinja2', 'pydantic'};"
        "print(json.dumps(sorted(heavy & set(sys.modules))))"
    )
    ran = subprocess.run(
        [sys.executable, "-c", code], cwd=root, capture_output=True, text=True, check=True
    )
    assert json.loads(ran.stdout.splitlines()[-1]) == []
