"""evas-sim: find it, run event-driven Verilog-A with it, read what it found.

The Python package ``evas-sim`` executes cross, timer and transition, which free
compilers of Verilog-A refuse. It is no judge of a text: it takes undeclared nodes
and missing semicolons, and refuses attributes, currents, ``$finish`` and a second
``exclude``. It sees crossings only where the ``cross`` event itself names the pins, a timer's
new time only where the ``timer`` event stands after what sets it, and its circuits are at
27 degrees Celsius.
"""

from __future__ import annotations

import importlib.metadata
import importlib.util
import sys
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault, ToolError
from behavgen.simulators.process import run_logged

__all__ = ["HOW_TO_GET", "Evas", "find_evas"]

HOW_TO_GET = "install it with: pip install evas-sim"

Waves = Mapping[str, npt.NDArray[np.float64]]
"""Saved voltages and ``time`` by name, shape (points,) each."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Evas:
    """An installed evas-sim.

    Parameters
    ----------
    version : str
        E.g. ``"evas-sim 0.8.7"``.
    """

    version: str

    def run(self, deck: str, *, folder: Path, timeout_s: float = 300.0) -> Waves:
        """Run a deck with one transient analysis in a folder.

        Parameters
        ----------
        deck : str
            Netlist in the form that `evas-sim` reads; the ``save`` line names the voltages.
        folder : Path
            Holds the models that the deck includes.
        timeout_s : float

        Raises
        ------
        ToolError
            When it fails or takes too long; shows the end of its log.
        """
        source, results = folder / "deck.scs", folder / "results"
        source.write_text(deck, encoding="utf-8")
        command: list[str | Path] = [sys.executable, "-m", "evas", "simulate", source.name]
        command += ["-o", results.name]
        finished = run_logged(command, log=folder / "deck.log", folder=folder, timeout_s=timeout_s)
        if finished.code != 0:
            why = f"not done after {timeout_s:g} s" if finished.code is None else "failed"
            raise ToolError(Fault(file=str(source), what=f"evas-sim {why}\n{finished.tail()}"))
        return _read(results / "tran.csv")


def find_evas() -> Evas:
    """Return the simulator that is installed beside this program.

    Raises
    ------
    ToolError
        When there is none; says how to get it.
    """
    if importlib.util.find_spec("evas") is None:
        raise ToolError(Fault(what="the Python package evas-sim is missing", allowed=HOW_TO_GET))
    return Evas(version=f"evas-sim {importlib.metadata.version('evas-sim')}")


def _read(table: Path) -> Waves:
    with table.open(encoding="utf-8") as lines:
        names = lines.readline().strip().split(",")
        rows = np.loadtxt(lines, delimiter=",", ndmin=2)
    return dict(zip(names, np.ascontiguousarray(rows.T), strict=True))
