"""Colour on request only, nothing lost to an encoding, and no fuss about a closed pipe."""

from __future__ import annotations

import io
import os
import subprocess
import sys
from pathlib import Path

import pytest

from behavgen.cli.parser import Options
from behavgen.cli.terminal import Terminal, aligned
from tests.small_project import PROJECT_TEXT, write_small_project


class Screen(io.StringIO):
    """A stream that says it is a terminal."""

    def isatty(self) -> bool:
        return True


def painted(monkeypatch: pytest.MonkeyPatch, color: str, screen: io.StringIO) -> bool:
    monkeypatch.setattr(sys, "stdout", screen)
    return "\033[" in Terminal(Options(color=color)).paint("OK", "good")


@pytest.mark.parametrize(
    ("color", "no_color", "on_a_terminal", "coloured"),
    [
        ("auto", "", True, True),
        ("auto", "", False, False),
        ("auto", "1", True, False),
        ("always", "1", False, True),
        ("never", "", True, False),
    ],
)
def test_colour(
    monkeypatch: pytest.MonkeyPatch,
    color: str,
    no_color: str,
    on_a_terminal: bool,
    coloured: bool,
) -> None:
    monkeypatch.setenv("NO_COLOR", no_color)
    monkeypatch.setenv("TERM", "xterm")
    screen = Screen() if on_a_terminal else io.StringIO()
    assert painted(monkeypatch, color, screen) is coloured


def test_a_dumb_terminal_gets_no_colour(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setenv("TERM", "dumb")
    assert not painted(monkeypatch, "auto", Screen())


def test_progress_is_for_terminals(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sys, "stderr", io.StringIO())
    with Terminal(Options()).progress("simulating") as progress:
        assert progress is None
    screen = Screen()
    monkeypatch.setattr(sys, "stderr", screen)
    with Terminal(Options()).progress("simulating") as progress:
        assert progress is not None
        progress("100 decisions")
    assert "simulating" in screen.getvalue()


@pytest.mark.parametrize("options", [Options(quiet=True), Options(json=True)])
def test_no_progress_where_quiet_was_asked_for(
    monkeypatch: pytest.MonkeyPatch, options: Options
) -> None:
    monkeypatch.setattr(sys, "stderr", Screen())
    with Terminal(options).progress("simulating") as progress:
        assert progress is None


def test_rows_are_aligned_without_trailing_blanks() -> None:
    rows = [("a", "long cell", "x"), ("bbb", "b"), ("c",)]
    assert aligned(rows) == ["  a    long cell  x", "  bbb  b", "  c"]


def environment(encoding: str) -> dict[str, str]:
    return {**os.environ, "PYTHONIOENCODING": encoding, "PYTHONUTF8": "0"}


def test_an_ascii_terminal_loses_no_result(tmp_path: Path) -> None:
    project = PROJECT_TEXT.replace("invented latch", "erfundene St\u00fcfe, 5 \u00b5V")
    folder = write_small_project(tmp_path, project=project)
    ran = subprocess.run(
        [sys.executable, "-m", "behavgen", "-C", str(folder), "fit"],
        check=False, capture_output=True, env=environment("ascii"),
    )  # fmt: skip
    assert ran.returncode == 0, ran.stderr
    assert b"latch   erfundene St\\xfcfe, 5 \\xb5V\n" in ran.stdout
    assert ran.stdout.isascii()


def test_a_reader_who_leaves_early_gets_no_complaint() -> None:
    """As in ``behavgen --help | head -1``, with more lines than a pipe holds."""
    script = (
        "import sys; from behavgen.cli.parser import Options; from behavgen.cli import terminal\n"
        "t = terminal.Terminal(Options())\n"
        "for _ in range(100000): t.say('a line of results')\n"
        "t.flush(); sys.exit(5)"
    )
    process = subprocess.Popen(
        [sys.executable, "-c", script], stdout=subprocess.PIPE, stderr=subprocess.PIPE
    )
    assert process.stdout is not None and process.stderr is not None
    process.stdout.readline()
    process.stdout.close()
    complaint = process.stderr.read()
    process.stderr.close()
    assert process.wait(timeout=30) == 5
    assert complaint == b""
