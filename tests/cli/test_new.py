"""A starter project can be read at once, and nothing is ever overwritten."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.cli.commands import run
from tests.small_project import DELAY_ROWS, NOISE_ROWS, write_small_project


@pytest.fixture
def tables(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """A folder with a delay and a noise table in it, where one stands."""
    monkeypatch.chdir(tmp_path)
    (tmp_path / "delay.csv").write_text("\n".join(DELAY_ROWS) + "\n", encoding="utf-8")
    (tmp_path / "noise.csv").write_text("\n".join(NOISE_ROWS) + "\n", encoding="utf-8")
    return tmp_path


def test_a_project_from_tables_can_be_fitted_at_once(
    tables: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    ran = run(capsys, "new", "mine", "--from", "delay.csv", "noise.csv")
    assert ran.exit_code == 0
    assert ran.stdout.splitlines()[-1].startswith("OK  project started.  Next: ")
    assert "behavgen -C mine tables" in ran.stdout
    assert run(capsys, "-C", "mine", "tables").exit_code == 0
    assert run(capsys, "-C", "mine", "fit").exit_code == 0


def test_a_project_without_tables_says_what_to_write(
    tables: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(capsys, "new", "empty").exit_code == 0
    assert "[cells." in (tables / "empty" / "behavgen.toml").read_text(encoding="utf-8")


def test_nothing_is_overwritten(tables: Path, capsys: pytest.CaptureFixture[str]) -> None:
    write_small_project(tables / "mine")
    before = (tables / "mine" / "behavgen.toml").read_bytes()
    ran = run(capsys, "new", "mine", "--from", "delay.csv")
    assert ran.exit_code == 2
    assert "is there already" in ran.complaint
    assert (tables / "mine" / "behavgen.toml").read_bytes() == before


def test_a_table_that_is_not_there(tables: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "new", "mine", "--from", "delay.csv", "nois.csv", "other.csv")
    assert ran.exit_code == 2
    assert len(ran.stderr.splitlines()) == 2
    assert "nois.csv: no such file" in ran.stderr
    assert not (tables / "mine").exists()


def test_where_the_project_goes_follows_the_folder_option(
    tables: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(capsys, "-C", "below", "new", "mine").exit_code == 0
    assert (tables / "below" / "mine" / "behavgen.toml").is_file()
