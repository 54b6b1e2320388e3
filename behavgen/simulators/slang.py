"""slang: elaborate SystemVerilog and say what the standard holds against it."""

from __future__ import annotations

import importlib.metadata
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from behavgen.errors import Fault, ToolError

__all__ = ["HOW_TO_GET", "Diagnosis", "elaborate", "slang_version"]

HOW_TO_GET = "install it with: pip install pyslang"


@dataclass(frozen=True, slots=True, kw_only=True)
class Diagnosis:
    """What slang says of some sources.

    Parameters
    ----------
    errors, warnings : int
    text : str
        All of it, with places in the sources; empty when there is nothing to say.
    """

    errors: int
    warnings: int
    text: str


def slang_version() -> str:
    """Return e.g. ``"slang 12.1.0"``.

    Raises
    ------
    ToolError
        When it is missing; says how to get it.
    """
    try:
        return f"slang {importlib.metadata.version('pyslang')}"
    except importlib.metadata.PackageNotFoundError:
        fault = Fault(what="the Python package pyslang is missing", allowed=HOW_TO_GET)
        raise ToolError(fault) from None


def elaborate(
    sources: Sequence[Path], *, top: str, macros: Mapping[str, str] | None = None
) -> Diagnosis:
    """Parse and elaborate sources (IEEE 1800-2023) with all warnings on.

    Parameters
    ----------
    sources : sequence of Path
    top : str
        Name of the top module.
    macros : mapping or None
        Preprocessor macros and their texts.

    Raises
    ------
    ToolError
        When slang is missing.
    """
    slang_version()
    import pyslang  # noqa: PLC0415  a whole compiler; only where it is used

    namespace = getattr(pyslang, "driver", pyslang)  # moved there after version 9
    driver = namespace.Driver()
    driver.addStandardArgs()
    options = [f"-D{name}={value}" for name, value in (macros or {}).items()]
    words = ("slang", "-Weverything", "--top", top, *options, *map(str, sources))
    line = " ".join(f'"{word}"' for word in words)
    read = driver.parseCommandLine(line, namespace.CommandLineOptions()) and driver.processOptions()
    if not (read and driver.parseAllSources()):
        return Diagnosis(errors=1, warnings=0, text="the sources cannot be read")
    found = list(driver.createCompilation().getAllDiagnostics())
    errors = sum(one.isError() for one in found)
    text = pyslang.DiagnosticEngine.reportAll(driver.sourceManager, found) if found else ""
    return Diagnosis(errors=errors, warnings=len(found) - errors, text=text)
