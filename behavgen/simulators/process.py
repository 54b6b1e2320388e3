"""Run one external program into a log file."""

from __future__ import annotations

import subprocess
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

__all__ = ["Finished", "first_line", "run_logged"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Finished:
    """A program that has ended.

    Parameters
    ----------
    code : int or None
        Exit code; None when it was ended because it ran for too long.
    log : Path
        What it printed.
    """

    code: int | None
    log: Path

    @property
    def text(self) -> str:
        """All that it printed."""
        return self.log.read_text(encoding="utf-8", errors="replace")

    def tail(self, lines: int = 8) -> str:
        """Return the last lines that it printed."""
        return "\n".join(self.text.splitlines()[-lines:])


def run_logged(
    command: Sequence[str | Path],
    *,
    log: Path,
    folder: Path,
    environment: Mapping[str, str] | None = None,
    timeout_s: float = 300.0,
) -> Finished:
    """Run a program in a folder; what it prints goes to the log.

    Parameters
    ----------
    command : sequence of str or Path
    log : Path
    folder : Path
        Working folder.
    environment : mapping or None
        None: that of this process.
    timeout_s : float
        The program is ended after that many seconds.
    """
    with log.open("wb") as stream:
        try:
            done = subprocess.run(
                [str(part) for part in command],
                cwd=folder, env=None if environment is None else dict(environment),
                stdin=subprocess.DEVNULL, stdout=stream, stderr=subprocess.STDOUT,
                timeout=timeout_s, check=False,
            )  # fmt: skip
        except subprocess.TimeoutExpired:
            return Finished(code=None, log=log)
    return Finished(code=done.returncode, log=log)


def first_line(command: Sequence[str | Path]) -> str:
    """Return the first line that a program prints on its standard output; "" if it cannot run."""
    try:
        done = subprocess.run(
            [str(part) for part in command],
            capture_output=True, stdin=subprocess.DEVNULL, timeout=60.0, check=False,
        )  # fmt: skip
    except (OSError, subprocess.TimeoutExpired):
        return ""
    lines = done.stdout.decode("utf-8", errors="replace").splitlines()
    return lines[0].strip() if lines else ""
