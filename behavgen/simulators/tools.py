"""All simulators and compilers that the project can use: found or not, and how to get them."""

from __future__ import annotations

import importlib.metadata
from collections.abc import Callable
from dataclasses import dataclass

from behavgen.errors import ToolError
from behavgen.simulators import evas, icarus, openvaf, slang, vacask, verible, verilator

__all__ = ["Tool", "list_tools"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Tool:
    """One external tool.

    Parameters
    ----------
    name : str
    purpose : str
        What it is used for, in words.
    needed : bool
        Whether a command of the project cannot work without it.
    version : str
        As it states it; "" when it is missing or too old.
    problem : str
        What is wrong; "" when it is there.
    how_to_get : str
        What to run to get it.
    """

    name: str
    purpose: str
    needed: bool
    version: str
    problem: str
    how_to_get: str

    @property
    def found(self) -> bool:
        """Whether it can be used."""
        return not self.problem


def list_tools() -> tuple[Tool, ...]:
    """Return all tools, those that commands need first."""
    return (
        _tool("Icarus Verilog", "simulates the check", lambda: icarus.find_icarus().version,
              icarus.HOW_TO_GET, needed=True),
        _tool("cocotb", "drives the check's benches inside the simulator", _cocotb_version,
              "install it with: pip install cocotb", needed=True),
        _tool("Verilator", "lints SystemVerilog, simulates fast with two states",
              lambda: verilator.find_verilator().version, verilator.HOW_TO_GET),
        _tool("slang", "judges SystemVerilog by the standard", slang.slang_version,
              slang.HOW_TO_GET),
        _tool("Verible", "holds SystemVerilog against style rules",
              lambda: verible.find_verible().version, verible.HOW_TO_GET),
        _tool("OpenVAF-Reloaded", "compiles Verilog-A", lambda: openvaf.find_openvaf().version,
              openvaf.HOW_TO_GET),
        _tool("VACASK", "simulates compiled Verilog-A", lambda: vacask.find_vacask().version,
              openvaf.HOW_TO_GET),
        _tool("evas-sim", "executes event-driven Verilog-A", lambda: evas.find_evas().version,
              evas.HOW_TO_GET),
    )  # fmt: skip


def _tool(
    name: str, purpose: str, version: Callable[[], str], how_to_get: str, *, needed: bool = False
) -> Tool:
    stated = problem = ""
    try:
        stated = version()
    except ToolError as error:
        problem = error.faults[0].what
    return Tool(
        name=name, purpose=purpose, needed=needed, version=stated, problem=problem,
        how_to_get=how_to_get,
    )  # fmt: skip


def _cocotb_version() -> str:
    try:
        return f"cocotb {importlib.metadata.version('cocotb')}"
    except importlib.metadata.PackageNotFoundError:
        raise ToolError("the Python package cocotb is missing") from None
