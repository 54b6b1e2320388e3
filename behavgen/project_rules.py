"""What a well-shaped project file must still obey: names, units, conditions.

Every rule adds to the faults found so far instead of stopping at the first.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from behavgen.errors import Fault
from behavgen.identifiers import identifier_fault, pin_fault
from behavgen.nearest import did_you_mean
from behavgen.quantities import QUANTITIES, Column, column_named, columns_of
from behavgen.toml_lines import KeyPath, line_of
from behavgen.units import UnitError, find_unit, parse_si

if TYPE_CHECKING:
    from behavgen.project import TableSettings
    from behavgen.project_schema import DefaultsPart, TablePart

__all__ = [
    "DEFAULT_PINS",
    "OTHER_MODULES",
    "ProjectFaults",
    "check_cell_names",
    "check_defaults",
    "check_measured",
    "check_process_codes",
    "check_table",
    "condition_value",
    "named_pins",
]

DEFAULT_PINS: Mapping[str, str | None] = {
    "inp": "inp",
    "inn": "inn",
    "clk": "clk",
    "outp": "outp",
    "outn": "outn",
    "vdd": "vdd",
    "unresolved": "unresolved",
    "enable": None,
    "vss": "vss",
}
"""Pin names of the emitted modules; None: not there unless asked for."""

OTHER_MODULES = ("_event", "_nettype", "_nettype_core")
"""Endings of the modules that are written for a cell beside the one of its own name."""

_OPTIONAL_PINS = ("vdd", "outn", "unresolved", "enable")
_LARGEST_CODE = 2**31 - 1  # Verilog-A integers have 32 bits


@dataclass(slots=True, kw_only=True)
class ProjectFaults:
    """Faults of one project file, each with its key and line."""

    file: str
    lines: dict[KeyPath, int]
    found: list[Fault] = field(default_factory=list)

    def add(self, path: KeyPath, what: str, allowed: str = "") -> None:
        """Note one fault at a key of the file."""
        self.found.append(
            Fault(
                file=self.file,
                row=line_of(path, self.lines),
                column=dotted(path),
                what=what,
                allowed=allowed,
            )
        )


def dotted(path: KeyPath) -> str:
    """Write a key path as users would: ``cells.latch.tables[0].file``."""
    text = ""
    for part in path:
        text += f"[{part}]" if isinstance(part, int) else f".{part}"
    return text.removeprefix(".")


def check_cell_names(names: Iterable[str], faults: ProjectFaults) -> None:
    """Judge names that become a module and a folder."""
    seen: dict[str, str] = {}
    for name in names:
        if reason := identifier_fault(name):
            faults.add(("cells", name), reason)
        twin = seen.setdefault(name.lower(), name)
        if twin != name:
            faults.add(
                ("cells", name),
                f"differs from '{twin}' in capitals only",
                "names that stay apart where file names ignore capitals",
            )
    _check_modules_differ(seen, faults)


def _check_modules_differ(names: Mapping[str, str], faults: ProjectFaults) -> None:
    """Refuse a cell that has the name of another module of a cell beside it."""
    for lower, name in names.items():
        for ending in OTHER_MODULES:
            if (owner := names.get(lower.removesuffix(ending))) and lower.endswith(ending):
                faults.add(
                    ("cells", name),
                    f"is also the name of a module that is written for the cell '{owner}'",
                    f"a name that is not '{owner}' with one of {', '.join(OTHER_MODULES)}",
                )


def check_process_codes(codes: Mapping[str, int], path: KeyPath, faults: ProjectFaults) -> None:
    """See that process codes are distinct and fit into 32 bits."""
    owner: dict[int, str] = {}
    for name, code in codes.items():
        if not name.strip():
            faults.add((*path, name), "empty process name", "a name")
        if not 0 <= code <= _LARGEST_CODE:
            faults.add((*path, name), f"code {code}", f"a whole number from 0 to {_LARGEST_CODE}")
        elif owner.setdefault(code, name) != name:
            faults.add(
                (*path, name), f"code {code} is that of '{owner[code]}' too", "a code of its own"
            )


def named_pins(
    wanted: Mapping[str, str | bool], path: KeyPath, faults: ProjectFaults
) -> dict[str, str | None]:
    """Return every pin's name in the emitted modules, None where it is left out."""
    pins = dict(DEFAULT_PINS)
    for pin, name in wanted.items():
        where = (*path, pin)
        if pin not in DEFAULT_PINS:
            known = ", ".join(DEFAULT_PINS)
            faults.add(where, f"no pin '{pin}'{did_you_mean(pin, DEFAULT_PINS)}", f"pins: {known}")
        elif name is False and pin not in _OPTIONAL_PINS:
            faults.add(
                where, f"'{pin}' cannot be left out", f"only {', '.join(_OPTIONAL_PINS)} can"
            )
        elif isinstance(name, bool):
            pins[pin] = pin if name else None
        else:
            pins[pin] = name
            if reason := pin_fault(name):
                faults.add(where, reason)
    _check_pins_differ(pins, wanted, path, faults)
    return pins


def _check_pins_differ(
    pins: Mapping[str, str | None],
    wanted: Collection[str],
    path: KeyPath,
    faults: ProjectFaults,
) -> None:
    """See that no two pins are alike, and blame one that the user has named."""
    owner: dict[str, str] = {}
    for pin in sorted(pins, key=lambda pin: pin in wanted):
        name = pins[pin]
        if name is not None and owner.setdefault(name, pin) != pin:
            allowed = "a name of its own for each pin"
            faults.add((*path, pin), f"'{name}' names '{owner[name]}' too", allowed)


def check_defaults(part: DefaultsPart, path: KeyPath, faults: ProjectFaults) -> None:
    """Judge shared settings, which may name any column of any quantity."""
    for kind, names in (("columns", part.columns), ("units", part.units), ("at", part.at)):
        for name in names:
            if column_named(name) is None:
                known = sorted({known for quantity in QUANTITIES for known in columns_of(quantity)})
                faults.add(
                    (*path, kind, name),
                    f"no quantity has a column '{name}'{did_you_mean(name, known)}",
                    f"columns: {', '.join(known)}",
                )
    _check_units(part.units, path, faults)
    _check_failed(part.failed, path, faults)


def check_table(
    part: TablePart,
    *,
    processes: Iterable[str],
    corners: Iterable[str],
    path: KeyPath,
    faults: ProjectFaults,
) -> bool:
    """Judge a table's settings by its quantity, its cell and the project's corners.

    Returns whether the quantity is known, so that the table can be built at all.
    """
    if part.quantity not in QUANTITIES:
        faults.add(
            (*path, "quantity"),
            f"no quantity '{part.quantity}'{did_you_mean(part.quantity, QUANTITIES)}",
            f"quantities: {', '.join(QUANTITIES)}",
        )
        return False
    known = columns_of(part.quantity)
    for kind, names in (("columns", part.columns), ("units", part.units), ("at", part.at)):
        for name in names:
            if name not in known:
                faults.add(
                    (*path, kind, name),
                    f"{part.quantity} has no column '{name}'{did_you_mean(name, known)}",
                    f"columns: {', '.join(known)}",
                )
    for name in part.columns.keys() & part.at.keys():
        faults.add((*path, "at", name), f"'{name}' is in `columns` too", "one of the two")
    _check_units(part.units, path, faults)
    _check_failed(part.failed, path, faults)
    _check_at(part, processes, corners, path, faults)
    return True


def check_measured(tables: Iterable[TableSettings], path: KeyPath, faults: ProjectFaults) -> None:
    """See that delays and windows, one curve read two ways, are measured alike."""
    first: TableSettings | None = None
    for index, table in enumerate(tables):
        if table.quantity not in ("delay", "window") or not table.measured:
            continue
        if first is None:
            first = table
        elif table.measured != first.measured:
            faults.add(
                (*path, index, "measured"),
                f"'{table.measured}' differs from '{first.measured}' in {first.file}",
                "the same words for all delay and window tables of a cell",
            )


def condition_value(column: Column, value: str | float, units: Mapping[str, str]) -> str | float:
    """Return a value fixed by `at` in SI, or as text for a column of names.

    Raises
    ------
    UnitError
        When it is not a number, or not one that this column may hold.
    """
    if column.is_text:
        return str(value).strip()
    unit = find_unit(units[column.name], column.unit) if column.name in units else None
    number = parse_si(str(value), column.unit, unit)
    if not column.accepts(number):
        raise UnitError(f"{value}; {column.allowed}")
    return number


def _check_at(
    part: TablePart,
    processes: Iterable[str],
    corners: Iterable[str],
    path: KeyPath,
    faults: ProjectFaults,
) -> None:
    known = columns_of(part.quantity)
    allowed = {"process": tuple(processes), "corner": tuple(corners)}
    for name, value in part.at.items():
        where = (*path, "at", name)
        if names := allowed.get(name, ()):
            if str(value) not in names:
                hint = did_you_mean(str(value), names)
                faults.add(where, f"no {name} '{value}'{hint}", f"one of {', '.join(names)}")
        elif name == "corner":
            faults.add(where, f"no corner '{value}'", f"describe it under [corners.{value}]")
        elif column := known.get(name):
            try:
                condition_value(column, value, part.units)
            except (UnitError, KeyError) as error:
                faults.add(where, str(error))


def _check_units(units: Mapping[str, str], path: KeyPath, faults: ProjectFaults) -> None:
    for name, text in units.items():
        column = column_named(name)
        if column is None:
            continue
        if column.is_text:
            faults.add((*path, "units", name), f"'{name}' holds names", "no unit")
            continue
        try:
            find_unit(text, column.unit)
        except UnitError as error:
            faults.add((*path, "units", name), str(error))


def _check_failed(failed: list[str] | None, path: KeyPath, faults: ProjectFaults) -> None:
    for index, token in enumerate(failed or ()):
        if not token.strip():
            faults.add(
                (*path, "failed", index),
                "an empty text cannot mark a failed run",
                "what the cell of a failed run holds, such as 'failed'",
            )
