"""The command pack: when it refuses, and what it says."""

from __future__ import annotations

from pathlib import Path

import pytest

import behavgen.cli.pack as command
from behavgen.__main__ import main
from tests.cli.commands import run
from tests.handoff.packages import report, started
from tests.small_project import write_small_project


@pytest.fixture(scope="module")
def emitted(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A project whose model was emitted and never checked."""
    folder = write_small_project(tmp_path_factory.mktemp("emitted"))
    assert main(["-C", str(folder), "-q", "emit"]) == 0
    return folder


def handoff(folder: Path) -> Path:
    return folder / "build" / "latch" / "handoff"


def test_without_a_check_it_refuses(emitted: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "-C", emitted, "pack")
    assert ran.exit_code == 2
    assert "the check of latch is missing" in ran.complaint
    assert "run behavgen check latch, or insist with --unchecked" in ran.complaint
    assert not handoff(emitted).exists()


def test_after_a_failed_check_it_refuses(
    emitted: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(command, "current_check", lambda _: report(passed=False))
    told = run(capsys, "-C", emitted, "pack", "--json").json
    assert told["exit_code"] == 1
    assert told["disagreements"] == ["latch"]
    assert not handoff(emitted).exists()


def test_who_insists_gets_a_package_that_says_so(
    emitted: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    ran = run(capsys, "-C", emitted, "pack", "--unchecked")
    assert ran.exit_code == 0
    assert "NOT CHECKED" in ran.stdout
    assert "NOT CHECKED" in (handoff(emitted) / "latch_handoff" / "README.txt").read_text()
    assert run(capsys, "-C", emitted, "pack", "--unchecked", "--strict").exit_code != 0
    monkeypatch.setattr(command, "current_check", lambda _: report(passed=False))
    ran = run(capsys, "-C", emitted, "pack", "--unchecked")
    assert ran.exit_code == 0
    assert "THE CHECK FAILED" in ran.stdout


def test_a_passed_check_makes_a_package_that_passes(
    emitted: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(command, "current_check", lambda _: report())
    told = run(capsys, "-C", emitted, "pack", "--json").json
    cell = told["cells"]["latch"]
    assert cell["packed"] is cell["checked"] is told["ok"] is True
    archive = Path(cell["archive"])
    first = archive.read_bytes()
    assert run(capsys, "-C", emitted, "pack").exit_code == 0
    assert archive.read_bytes() == first
    texts = [file.read_text() for file in Path(cell["folder"]).rglob("*") if file.is_file()]
    assert not any("delay.csv" in text or str(emitted) in text for text in texts)
    code, said = started(Path(cell["folder"]), "./run.sh")
    assert code == 0, said
    assert "PASS" in said


def test_the_edition_of_the_standard(
    emitted: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(command, "current_check", lambda _: report())
    assert run(capsys, "-C", emitted, "pack", "--ipxact", "2014").exit_code == 0
    text = (handoff(emitted) / "latch_handoff" / "ipxact" / "latch.xml").read_text()
    assert "1685-2014" in text
    assert run(capsys, "-C", emitted, "pack", "--ipxact", "2099").exit_code == 2
