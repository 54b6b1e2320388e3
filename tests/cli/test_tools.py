"""Tools are looked for where programs are found; a needed one that is missing is said aloud."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.cli.commands import run


def fake_icarus(folder: Path, version: str) -> None:
    for name in ("iverilog", "vvp"):
        program = folder / name
        program.write_text(f"#!/bin/sh\necho 'Icarus Verilog version {version} (stable) ()'\n")
        program.chmod(0o755)


@pytest.fixture
def only_path(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The one folder in which programs are found."""
    monkeypatch.setenv("PATH", str(tmp_path))
    return tmp_path


def told_of(capsys: pytest.CaptureFixture[str], name: str) -> dict[str, object]:
    tools = run(capsys, "tools", "--json").json["tools"]
    found: dict[str, object] = next(tool for tool in tools if tool["name"] == name)
    return found


def test_a_simulator_that_is_there(only_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    fake_icarus(only_path, "12.0")
    ran = run(capsys, "tools")
    assert ran.exit_code == 0
    assert "12.0 (stable)" in ran.stdout
    assert ran.stdout.splitlines()[-1].startswith("OK  all that is needed is here")
    assert told_of(capsys, "Icarus Verilog")["found"] is True


def test_a_missing_simulator(only_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "tools")
    assert ran.exit_code == 4
    assert ran.stdout.count("apt-get install iverilog") == 1
    assert "apt-get install iverilog" in ran.complaint
    assert ran.stdout.splitlines()[-1].startswith("NOT OK  1 needed tool missing")
    assert told_of(capsys, "Icarus Verilog")["found"] is False


def test_a_simulator_that_is_too_old(only_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    fake_icarus(only_path, "10.3")
    ran = run(capsys, "tools")
    assert ran.exit_code == 4
    assert "10.3" in ran.complaint
    assert "11 or newer" in ran.complaint
