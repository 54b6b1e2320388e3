"""Runs a command in this process and keeps what it printed."""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from behavgen.__main__ import main

__all__ = ["Ran", "run"]


@dataclass(frozen=True)
class Ran:
    """A command that has ended."""

    exit_code: int
    stdout: str
    stderr: str

    @property
    def json(self) -> dict[str, Any]:
        """The one object on stdout."""
        found = json.loads(self.stdout)
        assert isinstance(found, dict)
        return found

    @property
    def complaint(self) -> str:
        """The one line on stderr."""
        (line,) = self.stderr.splitlines()
        return line


def run(capsys: pytest.CaptureFixture[str], *words: str | Path) -> Ran:
    """Run a command; none may show a traceback, whatever it is given."""
    capsys.readouterr()
    exit_code = main([str(word) for word in words])
    printed = capsys.readouterr()
    for text in printed:
        assert "Traceback" not in text
    return Ran(exit_code, printed.out, printed.err)
