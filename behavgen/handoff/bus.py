"""A row of comparators on one clock and one supply."""

from __future__ import annotations

from behavgen.emit.templating import render
from behavgen.handoff.packed_file import PackedFile
from behavgen.handoff.ports import Port, connections, ports, settings
from behavgen.handoff.standing import Standing
from behavgen.handoff.symbol import SymbolPin
from behavgen.model import ComparatorModel

__all__ = ["bus_file"]


def bus_file(model: ComparatorModel, standing: Standing) -> PackedFile:
    """Return the module with COUNT comparators."""
    cell = model.cell
    text = render(
        "handoff/bus.sv",
        cell=cell.name,
        remarks=standing.remarks,
        precision=cell.time_precision,
        settings=settings(model),
        pins=[_pin(port) for port in ports(cell)],
        inp=cell.pins.inp,
        inn=cell.pins.inn,
        connections=connections(cell, {port.role: _net(port) for port in ports(cell)}),
    )
    return PackedFile(path=f"models/{cell.name}_bus.sv", text=text)


def _pin(port: Port) -> SymbolPin:
    kinds = {"inp": "logic [64*COUNT-1:0]", "inn": "logic [64*COUNT-1:0]"}
    kind = kinds.get(port.role, "logic [COUNT-1:0]" if port.direction == "output" else port.kind)
    meaning = f"words of $realtobits: {port.meaning}" if port.role in kinds else port.meaning
    return SymbolPin(
        name=port.name, role=port.role,
        declaration=f"{port.direction:<6} {kind} {port.name}", meaning=meaning,
    )  # fmt: skip


def _net(port: Port) -> str:
    if port.role in ("inp", "inn"):
        return f"$bitstoreal({port.role}_word_inside)"
    return f"{port.name}[k]" if port.direction == "output" else port.name
