"""The steps that need no simulator, as users meet them."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from behavgen.model_file import load_model
from tests.cli.commands import run
from tests.small_project import PROJECT_TEXT, write_small_project

TWO_CELLS = PROJECT_TEXT + PROJECT_TEXT.replace("latch", "twin")


@pytest.fixture
def project(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A project in which one stands, without a simulator in reach."""
    folder = write_small_project(tmp_path / "project")
    monkeypatch.chdir(folder)
    monkeypatch.setenv("PATH", "")
    return folder


def test_the_way_from_step_to_step(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Each step ends with the command that comes next, and that command works."""
    for command, following in [("fit", "emit"), ("emit", "check"), ("report", "check")]:
        ran = run(capsys, command)
        assert ran.exit_code == 0
        assert ran.stderr == ""
        assert ran.stdout.splitlines()[-1].endswith(f"Next: behavgen {following}")
    names = {path.name for path in (project / "build" / "latch").iterdir()}
    models = {
        "latch.model.json", "latch.sv", "latch_nettype.sv", "latch.va", "latch_event.va"
    }  # fmt: skip
    assert names == {".steps.json", "report.html", *models}


def test_a_step_does_the_steps_before_it(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(capsys, "report").exit_code == 0
    assert (project / "build" / "latch" / "latch.model.json").is_file()


def test_fit_shows_the_latch_that_made_the_tables(
    project: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """The tables follow from tau 20 ps and 16 ps and from 1 mV of noise."""
    shown = run(capsys, "fit").stdout
    assert "logarithmic law, over supply" in shown
    assert "supply 1 V..1.2 V" in shown
    noise = re.search(r"noise_sigma_v +([\d.]+) mV +([\d.]+) uV\.\.([\d.]+) mV \(95 %\)", shown)
    assert noise is not None
    assert 0.96 < float(noise[1]) < 1.04
    assert float(noise[2]) / 1e3 < 1.0 < float(noise[3])
    detail = run(capsys, "fit", "-v").stdout
    assert re.search(r"delay +1 V +13 rows .*tau_s 20 ps", detail)
    assert re.search(r"delay +1\.2 V +13 rows .*tau_s 16 ps", detail)


def test_fit_in_json_is_the_model_file(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    told = run(capsys, "fit", "--json").json
    cell = told["cells"]["latch"]
    model = load_model(project / cell["model"])
    assert [p["name"] for p in cell["parameters"]] == [p.name for p in model.parameters]
    assert cell["box"]["vdd_v"] == {"low": 1.0, "high": 1.2}
    assert {"mismatch", "reset"} <= set(cell["absent"])
    assert {"delay", "noise", "offset"}.isdisjoint(cell["absent"])
    assert (told["command"], told["next"]) == ("fit", "behavgen emit")
    assert "sign-off" in told["caution"]


def test_what_is_current_says_so(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert "current already" not in run(capsys, "emit").stdout
    assert run(capsys, "emit").stdout.count("current already") == 4


def test_quiet_is_one_line(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "fit", "-q")
    assert (ran.stdout, ran.stderr) == ("OK  1 cell fitted.  Next: behavgen emit\n", "")


def test_the_project_is_found_upward(
    project: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    (project / "deep" / "below").mkdir(parents=True)
    monkeypatch.chdir(project / "deep" / "below")
    assert run(capsys, "fit").exit_code == 0
    assert (project / "build" / "latch" / "latch.model.json").is_file()


def test_from_elsewhere_the_next_step_still_works(
    project: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(project.parent)
    ran = run(capsys, "-C", "project", "fit", "latch")
    assert "project/build/latch/latch.model.json" in ran.stdout
    assert ran.stdout.splitlines()[-1].endswith("Next: behavgen -C project emit latch")


def test_cells_may_be_chosen(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write_small_project(project, project=TWO_CELLS)
    assert list(run(capsys, "fit", "twin", "--json").json["cells"]) == ["twin"]
    assert list(run(capsys, "fit", "--json").json["cells"]) == ["latch", "twin"]


def test_one_faulty_cell_does_not_stop_the_others(
    project: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    faulty = TWO_CELLS.replace('file = "delay.csv"', 'file = "dely.csv"', 1)
    write_small_project(project, project=faulty)
    ran = run(capsys, "fit")
    assert ran.exit_code == 3
    assert "dely.csv" in ran.complaint
    assert ran.stdout.splitlines()[-1] == (
        "NOT OK  1 of 2 cells fitted.  Next: mend what stands above, then behavgen fit"
    )
    assert (project / "build" / "twin" / "twin.model.json").is_file()
    assert not (project / "build" / "latch").exists()
    told = run(capsys, "fit", "--json").json
    assert list(told["cells"]) == ["twin"]
    assert told["failed_by"] == ["tables"]


def test_check_without_a_simulator_says_how_to_get_one(
    project: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    ran = run(capsys, "check")
    assert ran.exit_code == 4
    assert "iverilog" in ran.complaint
    assert ran.stdout.splitlines()[-1].endswith("Next: behavgen tools")
    assert (project / "build" / "latch" / "latch.sv").is_file()
    assert not (project / "build" / "latch" / "check" / "check.json").exists()


def test_the_overview_follows_the_work(project: Path, capsys: pytest.CaptureFixture[str]) -> None:
    def states() -> dict[str, str]:
        found: dict[str, str] = run(capsys, "--json").json["cells"]["latch"]
        return found

    assert set(states().values()) == {"missing"}
    run(capsys, "emit")
    assert (states()["fit"], states()["emit"], states()["check"]) == (
        "current", "current", "missing"
    )  # fmt: skip
    shown = run(capsys)
    assert shown.exit_code == 0
    assert shown.stdout.splitlines()[-1] == "OK  1 cell to check.  Next: behavgen check"
    write_small_project(project, project=PROJECT_TEXT.replace("invented latch", "another"))
    assert (states()["fit"], states()["emit"]) == ("stale", "stale")
    assert run(capsys).stdout.splitlines()[-1] == "OK  1 cell to fit.  Next: behavgen fit"


def test_outside_a_project_there_is_help(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    ran = run(capsys)
    assert ran.exit_code == 0
    assert "to begin:\n  behavgen demo" in ran.stdout
    assert run(capsys, "--json").json["project"] is None


def test_the_version(capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "--version")
    assert ran.exit_code == 0
    assert re.fullmatch(r"behavgen \S.*\n", ran.stdout)
