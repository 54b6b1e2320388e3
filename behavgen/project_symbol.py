"""What a project file says of a cell's schematic symbol -> `SymbolSettings`, with all faults."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping
from typing import Any

from behavgen.identifiers import identifier_fault, pin_fault
from behavgen.nearest import did_you_mean
from behavgen.project import SymbolSettings
from behavgen.project_rules import ProjectFaults
from behavgen.project_schema import SymbolPart, checked
from behavgen.toml_lines import KeyPath

__all__ = ["SYMBOL_ROLES", "read_symbol"]

SYMBOL_ROLES = (
    "inp", "inn", "clk", "outp", "outn", "unresolved", "enable", "vdd", "vss", "open",
)  # fmt: skip
"""What a pin of a symbol can be: a pin of the emitted module, a supply, a ground, or nothing."""

_SHARED = ("vdd", "vss", "open")
_NEEDED = ("inp", "inn", "clk", "outp")
_TAKEN_SUFFIXES = (
    "_bus", "_bench", "_player", "_shells", "_properties", "_event", "_nettype", "_nettype_core",
)  # fmt: skip
"""How other modules about the cell end, whose names begin with the cell's."""
_INSIDE = "_inside"
"""How the names end that the symbol's module uses itself."""


def read_symbol(
    content: Mapping[str, Any],
    path: KeyPath,
    pins: Mapping[str, str | None],
    cell: str,
    faults: ProjectFaults,
) -> SymbolSettings | None:
    """Return the symbol of a cell.

    Parameters
    ----------
    content : mapping
        The table ``[cells.NAME.symbol]``.
    path : tuple
        Keys that lead to it.
    pins : mapping
        The emitted module's pins: role to name, None where left out.
    cell : str
        The cell's name.
    faults : ProjectFaults
        Where faults are noted.

    Returns
    -------
    SymbolSettings or None
        None when nothing of it can be used.
    """

    def add(key: KeyPath, what: str, allowed: str) -> None:
        faults.add((*path, *key), what, allowed)

    part = checked(SymbolPart, content, add)
    if part is None:
        return None
    name = part.name or f"{cell}_symbol"
    if reason := identifier_fault(name):
        add(("name",), reason, "")
    if name == cell or name.removeprefix(cell) in _TAKEN_SUFFIXES:
        add(("name",), f"'{name}' is the name of another module", "a name of its own")
    _check_pins(part.pins, (*path, "pins"), pins, faults)
    return SymbolSettings(name=name, pins=tuple(part.pins.items()), supply_v=part.supply)


def _check_pins(
    wanted: Mapping[str, str],
    path: KeyPath,
    pins: Mapping[str, str | None],
    faults: ProjectFaults,
) -> None:
    for name, role in wanted.items():
        where = (*path, name)
        if reason := pin_fault(name):
            faults.add(where, reason)
        if name.endswith(_INSIDE) or name == "SUPPLY_V":
            faults.add(where, f"'{name}' is taken inside the module", "another name")
        if role not in SYMBOL_ROLES:
            hint = did_you_mean(role, SYMBOL_ROLES)
            faults.add(where, f"no role '{role}'{hint}", f"one of {', '.join(SYMBOL_ROLES)}")
        elif role not in _SHARED and pins.get(role) is None:
            faults.add(where, f"the cell has no pin '{role}'", "'open', or add it to `pins`")
    counts = Counter(wanted.values())
    for role in SYMBOL_ROLES:
        if counts[role] > 1 and role not in _SHARED:
            faults.add(path, f"{counts[role]} pins are '{role}'", "one")
    needed = (*_NEEDED, "enable") if pins.get("enable") else _NEEDED
    missing = [role for role in needed if not counts[role]]
    if missing:
        faults.add(path, f"no pin is {', '.join(missing)}", "each of them once")
