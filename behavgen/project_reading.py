"""What a parsed project file says -> Project, with defaults merged and all faults found."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from behavgen.errors import ProjectError
from behavgen.limits import DriftLimit, Limit
from behavgen.nearest import did_you_mean
from behavgen.project import (
    FAILED_TOKENS,
    CellSettings,
    Corner,
    Project,
    TableSettings,
)
from behavgen.project_limits import LimitReader
from behavgen.project_rules import (
    ProjectFaults,
    check_cell_names,
    check_defaults,
    check_measured,
    check_process_codes,
    check_table,
    named_pins,
)
from behavgen.project_schema import (
    AnyPart,
    CellPart,
    CornerPart,
    DefaultsPart,
    ProjectPart,
    TablePart,
    checked,
)
from behavgen.project_symbol import read_symbol
from behavgen.provenance import Provenance
from behavgen.quantities import columns_of
from behavgen.toml_lines import KeyPath, key_lines, line_of

__all__ = ["read_project"]

_TOP = ("project", "defaults", "cells", "corners", "limits", "drift")


@dataclass(frozen=True, slots=True, kw_only=True)
class _Shared:
    """What the tables of all cells draw on."""

    defaults: DefaultsPart
    corners: tuple[Corner, ...]


def read_project(file: Path, text: str, content: Mapping[str, Any]) -> Project:
    """Build the project from its parsed file.

    Parameters
    ----------
    file : Path
        The project file.
    text : str
        Its text, to find lines in.
    content : mapping
        What tomllib made of it.

    Raises
    ------
    ProjectError
        With every fault found.
    """
    faults = ProjectFaults(file=file.name, lines=key_lines(text))
    for key in content.keys() - set(_TOP):
        faults.add((key,), f"unknown key '{key}'{did_you_mean(key, _TOP)}", ", ".join(_TOP))
    project = _part(ProjectPart, _table(content, ("project",), faults), ("project",), faults)
    defaults = _part(DefaultsPart, _table(content, ("defaults",), faults), ("defaults",), faults)
    if defaults is not None:
        check_defaults(defaults, ("defaults",), faults)
    corners = _corners(_table(content, ("corners",), faults), faults)
    shared = _Shared(defaults=defaults or DefaultsPart(), corners=corners)
    cells = _cells(content, shared, faults)
    limits, drift_limits = _limits(content, shared.corners, faults)
    if faults.found or project is None:
        raise ProjectError(*sorted(faults.found, key=lambda fault: fault.row or 0))
    return Project(
        file=file,
        out=file.parent / project.out,
        baseline=file.parent / project.baseline,
        cells=cells,
        corners=corners,
        limits=limits,
        drift_limits=drift_limits,
        vendor=project.vendor,
    )


def _limits(
    content: Mapping[str, Any], corners: Iterable[Corner], faults: ProjectFaults
) -> tuple[tuple[Limit, ...], tuple[DriftLimit, ...]]:
    """Return the bounds and drift limits of all cells, then those of each."""
    reader = LimitReader(corners={corner.name: corner for corner in corners}, faults=faults)
    limits, drift_limits = [*reader.limits(content, ())], [*reader.drift(content, ())]
    cells = content.get("cells")
    for name, cell in cells.items() if isinstance(cells, dict) else ():
        if isinstance(cell, dict):
            processes, path = cell.get("processes"), ("cells", name)
            known = processes if isinstance(processes, dict) else ()
            limits += reader.limits(cell, path, cell=name, processes=known)
            drift_limits += reader.drift(cell, path, cell=name)
    return tuple(limits), tuple(drift_limits)


def _cells(
    content: Mapping[str, Any],
    shared: _Shared,
    faults: ProjectFaults,
) -> tuple[CellSettings, ...]:
    described = _table(content, ("cells",), faults)
    if not content.get("cells"):
        faults.add(("cells",), "no cell", "describe at least one under [cells.NAME]")
    check_cell_names(described, faults)
    built = (
        _cell(name, _table(described, ("cells", name), faults), shared, faults)
        for name in described
    )
    return tuple(cell for cell in built if cell is not None)


def _cell(
    name: str,
    content: Mapping[str, Any],
    shared: _Shared,
    faults: ProjectFaults,
) -> CellSettings | None:
    path = ("cells", name)
    part = _part(CellPart, content, path, faults)
    processes = part.processes if part else {}
    tables = _tables(content, path, shared, processes, faults)
    if not content.get("tables"):
        faults.add(
            path, f"cell '{name}' has no tables", f"add at least one [[cells.{name}.tables]]"
        )
    if part is None:
        return None
    check_process_codes(processes, (*path, "processes"), faults)
    if len(tables) == len(part.tables):
        check_measured(tables, (*path, "tables"), faults)
    pins = named_pins(part.pins, (*path, "pins"), faults)
    symbol = (*path, "symbol")
    return CellSettings(
        name=name,
        description=part.description,
        decides_on=part.decides_on,
        in_reset=part.in_reset,
        when_unresolved=part.when_unresolved,
        process_codes=processes,
        reset_delay_s=part.reset_delay,
        supply_off_v=part.supply_off,
        time_precision=part.time_precision,
        pins=pins,
        tables=tables,
        symbol=read_symbol(part.symbol, symbol, pins, name, faults) if part.symbol else None,
    )


def _tables(
    content: Mapping[str, Any],
    path: KeyPath,
    shared: _Shared,
    processes: Iterable[str],
    faults: ProjectFaults,
) -> tuple[TableSettings, ...]:
    entries = content.get("tables")
    tables = []
    for index, entry in enumerate(entries if isinstance(entries, list) else ()):
        here = (*path, "tables", index)
        if not isinstance(entry, dict):
            continue  # the shape of the cell has said so
        part = _part(TablePart, entry, here, faults)
        if part is not None and check_table(
            part,
            processes=processes,
            corners=[corner.name for corner in shared.corners],
            path=here,
            faults=faults,
        ):
            tables.append(_merged(part, shared.defaults, line_of(here, faults.lines) or 0))
    return tuple(tables)


def _merged(part: TablePart, defaults: DefaultsPart, line: int) -> TableSettings:
    """Return a table's settings with the shared ones filled in: its own entries win."""
    known = columns_of(part.quantity)
    own = part.columns.keys() | part.at.keys()
    columns = {name: header for name, header in defaults.columns.items() if name not in own}
    at = {name: value for name, value in defaults.at.items() if name not in own}
    columns = {name: header for name, header in columns.items() if name in known}
    at = {name: value for name, value in at.items() if name in known}
    units = {name: unit for name, unit in defaults.units.items() if name in known}
    failed = part.failed if part.failed is not None else defaults.failed
    measured = part.measured if part.measured is not None else defaults.measured
    return TableSettings(
        quantity=part.quantity,
        file=part.file,
        columns={**columns, **part.columns},
        units={**units, **part.units},
        where={**defaults.where, **part.where},
        at={**at, **part.at},
        failed=tuple(failed) if failed is not None else FAILED_TOKENS,
        measured=measured or "",
        default_columns=frozenset(columns),
        default_at=frozenset(at),
        provenance=_provenance(part, defaults),
        line=line,
    )


def _provenance(part: TablePart, defaults: DefaultsPart) -> Provenance:
    def said(name: str) -> str:
        return getattr(part, name) or getattr(defaults, name) or ""

    return Provenance(
        stage=said("stage"), kit=said("kit"), netlist_hash=said("netlist_hash"), date=said("date")
    )


def _corners(content: Mapping[str, Any], faults: ProjectFaults) -> tuple[Corner, ...]:
    corners = []
    for name in content:
        path = ("corners", name)
        part = _part(CornerPart, _table(content, path, faults), path, faults)
        if part is not None:
            corners.append(
                Corner(
                    name=name,
                    process=part.process,
                    temperature_k=part.temp,
                    vdd_v=part.vdd,
                    vcm_v=part.vcm,
                )
            )
    return tuple(corners)


def _table(content: Mapping[str, Any], path: KeyPath, faults: ProjectFaults) -> Mapping[str, Any]:
    """Return the TOML table under the last key of `path`, empty when it is none."""
    value = content.get(str(path[-1]), {})
    if isinstance(value, dict):
        return value
    faults.add(path, f"{value!r}", f"a table is needed, as in [{'.'.join(map(str, path))}]")
    return {}


def _part(
    part: type[AnyPart], content: Mapping[str, Any], path: KeyPath, faults: ProjectFaults
) -> AnyPart | None:
    def add(key: KeyPath, what: str, allowed: str) -> None:
        faults.add((*path, *key), what, allowed)

    return checked(part, content, add)
