"""The module behind the schematic symbol's own pins, with supplies as logic levels."""

from __future__ import annotations

from dataclasses import dataclass

from behavgen.emit.literals import comment_text, real_literal
from behavgen.emit.templating import render
from behavgen.handoff.packed_file import PackedFile
from behavgen.handoff.ports import connections, ports, settings
from behavgen.handoff.standing import Standing
from behavgen.model import Cell, ComparatorModel
from behavgen.project import SymbolSettings

__all__ = ["SymbolPin", "nominal_supply_v", "symbol_file", "symbol_of", "symbol_pins"]

_UNKNOWN_SUPPLY_V = 1.0
_OUTPUTS = ("outp", "outn", "unresolved")
_MEANINGS = {
    "vdd": "supply: 1 is on",
    "vss": "ground: 0",
    "open": "without function",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class SymbolPin:
    """One pin of the symbol: its declaration and what it means."""

    name: str
    role: str
    declaration: str
    meaning: str


def symbol_of(model: ComparatorModel, given: SymbolSettings | None) -> SymbolSettings:
    """Return the symbol given, or the cell's own pins in the order of the Verilog-A modules."""
    if given is not None:
        return given
    pins = model.cell.pins
    order = ("inp", "inn", "clk", "enable", "outp", "outn", "vdd", "vss")
    named = ((getattr(pins, role), role) for role in order)
    return SymbolSettings(
        name=f"{model.cell.name}_symbol",
        pins=tuple((name, role) for name, role in named if name is not None),
        supply_v=None,
    )


def symbol_pins(cell: Cell, symbol: SymbolSettings) -> tuple[SymbolPin, ...]:
    """Return the symbol's pins in its order."""
    meanings = {port.role: port.meaning for port in ports(cell)} | _MEANINGS
    return tuple(
        SymbolPin(
            name=name, role=role, declaration=f"{_kind(role)} {name}",
            meaning=comment_text(meanings.get(role, role)),
        )
        for name, role in symbol.pins
    )  # fmt: skip


def symbol_file(model: ComparatorModel, symbol: SymbolSettings, standing: Standing) -> PackedFile:
    """Return the module with the symbol's pins."""
    cell = model.cell
    named = {role: name for name, role in symbol.pins}
    nets = {role: named[role] for role in ("inp", "inn", "clk", "enable") if role in named}
    shown = {port.role: f"{port.role}_inside" for port in ports(cell) if port.role in _OUTPUTS}
    text = render(
        "handoff/symbol.sv",
        cell=cell.name,
        symbol=symbol,
        remarks=standing.remarks,
        precision=cell.time_precision,
        settings=settings(model),
        pins=symbol_pins(cell, symbol),
        powered=_powered(symbol),
        has_vdd=cell.pins.vdd is not None,
        supply=real_literal(nominal_supply_v(model, symbol)),
        wires=list(shown.values()),
        connections=connections(cell, nets | shown | {"vdd": "powered_inside ? SUPPLY_V : 0.0"}),
        outputs=[(named[role], wire) for role, wire in shown.items() if role in named],
    )
    return PackedFile(path=f"models/{symbol.name}.sv", text=text)


def nominal_supply_v(model: ComparatorModel, symbol: SymbolSettings) -> float:
    """Return the supply behind a logic 1: as given, else the middle of the range."""
    if symbol.supply_v is not None:
        return symbol.supply_v
    span = model.box.vdd_v
    return _UNKNOWN_SUPPLY_V if span is None else round(span.middle, 9)


def _kind(role: str) -> str:
    if role in ("inp", "inn"):
        return "input  real "
    if role == "open":
        return "inout  wire "
    return "output logic" if role in _OUTPUTS else "input  logic"


def _powered(symbol: SymbolSettings) -> str:
    levels = {"vdd": "1'b1", "vss": "1'b0"}
    tests = [f"{name} === {levels[role]}" for name, role in symbol.pins if role in levels]
    return " && ".join(tests) or "1'b1"
