"""Ports of the emitted Verilog-A modules."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from behavgen.model import Cell

__all__ = ["Output", "Port", "outputs", "ports", "supply"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Port:
    """One port with its direction and its meaning in words."""

    name: str
    direction: str
    meaning: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Output:
    """An output pin and the variable that holds its level over the supply, 0 to 1."""

    pin: str
    level: str


def ports(cell: Cell) -> Iterator[Port]:
    """Yield the ports in the order in which both modules have them."""
    pins = cell.pins
    candidates = (
        (pins.inp, "input", "input, positive"),
        (pins.inn, "input", "input, negative"),
        (pins.clk, "input", f"clock, decides at its {cell.decides_on} edge"),
        (pins.enable, "input", "off unless above half the supply"),
        (pins.outp, "output", "decision"),
        (pins.outn, "output", "its complement"),
        (pins.vdd, "inout", "supply"),
        (pins.vss, "inout", "ground that all levels refer to"),
    )
    for name, direction, meaning in candidates:
        if name is not None:
            yield Port(name=name, direction=direction, meaning=meaning)


def outputs(cell: Cell) -> Iterator[Output]:
    """Yield the output pins that there are."""
    yield Output(pin=cell.pins.outp, level="level_p")
    if cell.pins.outn is not None:
        yield Output(pin=cell.pins.outn, level="level_n")


def supply(cell: Cell) -> str:
    """Return the expression for the supply in V."""
    return f"V({cell.pins.vdd}, {cell.pins.vss})" if cell.pins.vdd else "SUPPLY_V"
