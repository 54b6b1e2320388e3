"""The check as users meet it, in a real simulator."""

from __future__ import annotations

import re
from importlib import import_module
from pathlib import Path

import pytest

from behavgen.__main__ import main
from behavgen.check.verdict import CheckReport
from behavgen.emit.emitted_file import EmittedFile
from tests.cli.commands import run
from tests.small_project import PROJECT_TEXT, write_small_project

pytestmark = pytest.mark.slow


@pytest.fixture(scope="module")
def checked(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A project whose emitted model has been checked."""
    folder = write_small_project(tmp_path_factory.mktemp("checked"))
    assert main(["-C", str(folder), "-q", "check"]) == 0
    return folder


def test_an_emitted_model_agrees(checked: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "-C", checked, "check")
    assert ran.exit_code == 0
    assert ran.stderr == ""
    assert re.search(r"compared +\d+ decisions, 0 in disagreement", ran.stdout)
    assert "(current already)" in ran.stdout
    assert ran.stdout.splitlines()[-1] == (
        f"OK  1 cell checked; model and reference agree.  Next: behavgen -C {checked} report"
    )


def test_the_verdict_in_json(checked: Path, capsys: pytest.CaptureFixture[str]) -> None:
    told = run(capsys, "-C", checked, "check", "--json").json
    cell = told["cells"]["latch"]
    assert told["ok"] is cell["passed"] is True
    assert cell["decisions"] > 1000
    assert cell["strata"] and cell["benches"]
    assert "Icarus" in cell["simulator"]


def test_the_page_comes_with_the_check(checked: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "-C", checked, "report")
    assert re.search(r"with the check of \d+ decisions", ran.stdout)
    told = run(capsys, "-C", checked, "--json").json
    assert set(told["cells"]["latch"].values()) == {"current"}
    assert told["next"] == "look at the pages"


def with_decision_turned(text: str) -> str:
    turned, count = re.subn(r"if \(overdrive_v > 0\.0\)", "if (overdrive_v < 0.0)", text)
    assert count
    return turned


@pytest.fixture
def edited(checked: Path, tmp_path: Path) -> Path:
    """The emitted model with its decision turned round."""
    text = (checked / "build" / "latch" / "latch.sv").read_text(encoding="utf-8")
    file = tmp_path / "edited.sv"
    file.write_text(with_decision_turned(text), encoding="utf-8")
    return file


def test_an_edited_model_disagrees(
    checked: Path, edited: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    ran = run(capsys, "-C", checked, "check", "--model", edited)
    assert ran.exit_code == 1
    assert ran.stderr == ""
    shown = " ".join(ran.stdout.split())
    assert re.search(
        r" first bit of decision \d+ in run .+ at .+: expected .+, got .+ applied", shown
    )
    assert ran.stdout.splitlines()[-1].startswith(
        "NOT OK  1 cell checked; the check fails for latch."
    )
    assert run(capsys, "-C", checked, "check", "-q").exit_code == 0


def test_a_given_file_belongs_to_one_cell(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    two = PROJECT_TEXT + PROJECT_TEXT.replace("latch", "twin")
    folder = write_small_project(tmp_path, project=two)
    ran = run(capsys, "-C", folder, "check", "--model", "edited.sv")
    assert ran.exit_code == 2
    assert "name the cell" in ran.complaint


def test_a_given_file_that_is_not_there(checked: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "-C", checked, "check", "--model", "nowhere.sv")
    assert ran.exit_code == 2
    assert ran.complaint.startswith("nowhere.sv: cannot be read: ")


def test_a_failed_check_is_remembered(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """Asking again simulates nothing and still fails; the overview says so too."""
    module = import_module("behavgen.check.check")
    real_check, checked = module.check, []

    def check_turned(model: object, emitted: EmittedFile, **more: object) -> CheckReport:
        checked.append(emitted.path)
        turned = EmittedFile(path=emitted.path, text=with_decision_turned(emitted.text))
        report: CheckReport = real_check(model, turned, **more)
        return report

    monkeypatch.setattr(module, "check", check_turned)
    folder = write_small_project(tmp_path)
    for _ in range(2):
        ran = run(capsys, "-C", folder, "check", "--json")
        assert ran.exit_code == 1
        assert ran.json["disagreements"] == ["latch"]
    assert checked == ["latch.sv"]
    overview = run(capsys, "-C", folder)
    assert overview.exit_code == 1
    assert "check disagrees" in overview.stdout
    assert run(capsys, "-C", folder, "report").exit_code == 0
