"""The demo walks the whole path, as far as the tools reach."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.cli.commands import run


def test_without_a_simulator_everything_but_the_check_is_done(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("PATH", "")
    monkeypatch.chdir(tmp_path)
    ran = run(capsys, "demo")
    assert ran.exit_code == 4
    assert "iverilog" in ran.complaint
    assert ran.stdout.splitlines()[-1].startswith("NOT OK  2 cells from tables to report, but")
    results = tmp_path / "behavgen-demo" / "build" / "sense_latch"
    assert {"report.html", "sense_latch.sv", "sense_latch.va"} <= {
        p.name for p in results.iterdir()
    }
    told = run(capsys, "demo", "--json").json
    assert told["failed_by"] == ["tools"]
    assert told["cells"]["sense_latch"]["check"] is None


def test_a_folder_with_something_else_in_it_is_left_alone(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    mine = tmp_path / "behavgen.toml"
    mine.write_text("# mine\n", encoding="utf-8")
    ran = run(capsys, "demo", "--out", tmp_path)
    assert ran.exit_code == 2
    assert "behavgen.toml" in ran.complaint
    assert [path.name for path in tmp_path.iterdir()] == ["behavgen.toml"]
    assert mine.read_text(encoding="utf-8") == "# mine\n"


@pytest.mark.slow
def test_the_whole_path(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    ran = run(capsys, "demo", "--out", "look")
    assert ran.exit_code == 0, ran.stdout
    assert ran.stderr == ""
    labels = [line.split()[0] for line in ran.stdout.splitlines() if line[2:3].strip()]
    positions = [
        labels.index(step) for step in ("project", "tables", "fit", "emit", "check", "report")
    ]
    assert positions == sorted(positions)
    for name in ("report.html", "sense_latch.sv", "sense_latch.va"):
        path = Path("look", "build", "sense_latch", name)
        assert path.is_file()
        assert str(path) in ran.stdout
    assert "invented" in ran.stdout
    assert "sign-off" in ran.stdout
    assert "open look/build/sense_latch/report.html" in ran.stdout.splitlines()[-1]
    told = run(capsys, "-C", "look", "--json").json
    assert {state for cell in told["cells"].values() for state in cell.values()} == {"current"}
