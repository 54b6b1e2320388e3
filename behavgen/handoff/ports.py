"""Ports and parameters of the emitted SystemVerilog module, as those who instantiate it need them.

The interface is the same for every cell and does not move; what stands here is
derived from the cell's pins and the shared parameter list, not from the emitted text.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from behavgen.emit.literals import bits_literal, comment_text, real_literal
from behavgen.emit.module_parameters import ModuleParameter, module_parameters
from behavgen.model import Cell, ComparatorModel

__all__ = ["Port", "Setting", "connections", "parameter_type", "ports", "settings"]

_TYPES = {"real": "real", "integer": "int", "word": "bit [63:0]"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Port:
    """One port of the module.

    Parameters
    ----------
    role : str
        Its name before any renaming, as in `Pins`.
    name, direction, kind, meaning : str
        `kind` is ``"real"`` or ``"logic"``.
    """

    role: str
    name: str
    direction: str
    kind: str
    meaning: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Setting:
    """One parameter with its SystemVerilog type and default."""

    name: str
    type: str
    default: str
    meaning: str


def ports(cell: Cell) -> tuple[Port, ...]:
    """Return the ports in the order in which the module has them."""
    candidates = (
        ("inp", "input", "real", "input, positive, V"),
        ("inn", "input", "real", "input, negative, V"),
        ("clk", "input", "logic", f"clock, decides on its {cell.decides_on} edge"),
        ("outp", "output", "logic", "decision"),
        ("outn", "output", "logic", "complement of the decision"),
        ("vdd", "input", "real", "supply, V"),
        ("unresolved", "output", "logic", "1 after a decision that did not resolve in time"),
        ("enable", "input", "logic", "off unless it is 1"),
    )
    named = ((getattr(cell.pins, role), role, *rest) for role, *rest in candidates)
    return tuple(
        Port(role=role, name=name, direction=direction, kind=kind, meaning=meaning)
        for name, role, direction, kind, meaning in named
        if name is not None
    )


def settings(model: ComparatorModel) -> tuple[Setting, ...]:
    """Return all parameters with their defaults, in the order in which modules declare them."""
    return tuple(
        Setting(
            name=one.name,
            type=parameter_type(one),
            default=_default(one),
            meaning=comment_text(", ".join(part for part in (one.unit, one.note) if part)),
        )
        for one in module_parameters(model)
    )


def connections(cell: Cell, nets: Mapping[str, str]) -> tuple[tuple[str, str], ...]:
    """Return (port, net) for each port whose role has a net, "" for one left open."""
    return tuple((port.name, nets.get(port.role, "")) for port in ports(cell))


def parameter_type(parameter: ModuleParameter) -> str:
    """Return the SystemVerilog type of a parameter."""
    return _TYPES[parameter.kind]


def _default(parameter: ModuleParameter) -> str:
    if parameter.kind == "real":
        return real_literal(parameter.default)
    if parameter.kind == "word":
        return "64'd0" if parameter.default == 0 else bits_literal(int(parameter.default))
    return str(int(parameter.default))
