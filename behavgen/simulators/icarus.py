"""Icarus Verilog: find it, compile with it, simulate with it."""

from __future__ import annotations

import re
import shutil
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from behavgen.errors import Fault, ToolError
from behavgen.simulators.process import Finished, first_line, run_logged

__all__ = ["HOW_TO_GET", "OLDEST_MAJOR", "Icarus", "find_icarus"]

OLDEST_MAJOR = 11
HOW_TO_GET = (
    "install Icarus Verilog 11 or newer: apt-get install iverilog (Debian, Ubuntu), "
    "dnf install iverilog (Fedora), brew install icarus-verilog (macOS)"
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Icarus:
    """An installed Icarus Verilog.

    Parameters
    ----------
    iverilog, vvp : Path
        Compiler and simulator.
    version : str
        As the compiler states it, e.g. ``"Icarus Verilog 12.0 (stable)"``.
    """

    iverilog: Path
    vvp: Path
    version: str

    def compile(
        self,
        sources: Sequence[Path],
        *,
        top: str,
        output: Path,
        log: Path,
        macros: Mapping[str, str] | None = None,
    ) -> Finished:
        """Compile SystemVerilog sources, in this order, with all warnings."""
        command: list[str | Path] = [self.iverilog, "-g2012", "-Wall", "-s", top, "-o", output]
        command += [f"-D{name}={value}" for name, value in (macros or {}).items()]
        return run_logged([*command, *sources], log=log, folder=output.parent)

    def simulate(
        self,
        compiled: Path,
        *,
        log: Path,
        plusargs: Sequence[str] = (),
        library: str = "",
        environment: Mapping[str, str] | None = None,
        waveforms: bool = False,
        timeout_s: float = 300.0,
    ) -> Finished:
        """Simulate in the folder of the compiled file.

        Parameters
        ----------
        compiled : Path
        log : Path
        plusargs : sequence of str
            Without the leading plus sign.
        library : str
            Path of a VPI library to load; "": none.
        environment : mapping or None
            None: that of this process.
        waveforms : bool
            Let the simulated text write a VCD file.
        timeout_s : float
        """
        dumps = "-vcd" if waveforms else "-none"
        load = ("-m", library) if library else ()
        command = [self.vvp, "-n", *load, compiled, dumps, *(f"+{arg}" for arg in plusargs)]
        return run_logged(
            command, log=log, folder=compiled.parent, environment=environment, timeout_s=timeout_s
        )


def find_icarus() -> Icarus:
    """Return the Icarus Verilog on the PATH.

    Raises
    ------
    ToolError
        When it is missing or too old; says how to get it.
    """
    iverilog, vvp = shutil.which("iverilog"), shutil.which("vvp")
    if iverilog is None or vvp is None:
        missing = "iverilog" if iverilog is None else "vvp"
        raise ToolError(Fault(what=f"{missing} is not on the PATH", allowed=HOW_TO_GET))
    stated = first_line([iverilog, "-V"])
    found = re.search(r"version (\d+)\.", stated)
    if found is None or int(found[1]) < OLDEST_MAJOR:
        what = f"{iverilog} states the version {stated!r}"
        raise ToolError(Fault(what=what, allowed=HOW_TO_GET))
    version = stated.replace("version ", "").removesuffix("()").strip()
    return Icarus(iverilog=Path(iverilog), vvp=Path(vvp), version=version)
