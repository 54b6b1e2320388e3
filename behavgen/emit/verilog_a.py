"""ComparatorModel -> the continuous Verilog-A file.

The latch is a differential equation in the logarithm of its imbalance. There
regeneration is a straight line of slope ``1/tau`` from any overdrive on, so
that decades of overdrive cost neither accuracy nor time steps, and a balanced
input rests at the unstable zero. Where the line starts carries the delay law.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from behavgen.emit.emitted_file import EmittedFile
from behavgen.emit.literals import comment_text, real_literal, string_literal
from behavgen.emit.module_parameters import ModuleParameter, module_parameters
from behavgen.emit.provenance import HeaderSection, header_lines, header_sections
from behavgen.emit.templating import render
from behavgen.emit.verilog_a_surfaces import Statements, declaration, surface_statements
from behavgen.model import Cell, ComparatorModel, DelayEffect, Surface

__all__ = ["verilog_a"]

_SHARED_PARAMETERS = {
    "OFFSET_SHIFT_V", "NOISE_ON", "MEMORY_ON", "DELAY_ON", "TEMPERATURE_C", "PROCESS",
}  # fmt: skip
_LARGEST_Z = 10.0
_NO_SUPPLY_V = 1.0
_FLOOR_V = 1e-15


@dataclass(frozen=True, slots=True, kw_only=True)
class _Port:
    name: str
    direction: str
    meaning: str


@dataclass(frozen=True, slots=True, kw_only=True)
class _Parameter:
    attributes: str
    declaration: str


@dataclass(frozen=True, slots=True, kw_only=True)
class _Output:
    pin: str
    level: str


@dataclass(frozen=True, slots=True, kw_only=True)
class _Node:
    """Names of what the text says about a node of the delay law, and its overdrive."""

    number: int
    overdrive_v: str

    @property
    def delay(self) -> str:
        return f"delay_{self.number}_s"

    @property
    def slope(self) -> str:
        return f"slope_{self.number}_s"

    @property
    def log(self) -> str:
        return f"ln(NODE_{self.number}_V)"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Segment:
    left: _Node
    right: _Node

    @property
    def secant(self) -> str:
        return f"secant_{self.left.number}_s"

    @property
    def width(self) -> str:
        return f"({self.right.log} - {self.left.log})"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Slope:
    """The slope at a node: of the parabola, and the secants that limit it."""

    name: str
    parabola: str
    left: str
    right: str


def verilog_a(model: ComparatorModel) -> EmittedFile:
    """Return ``<cell>.va``; the same model gives the same bytes."""
    cell, pins = model.cell, model.cell.pins
    ...
