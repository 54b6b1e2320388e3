"""The tables of one cell, read from their files: the way from settings to arrays."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from pathlib import Path

import polars as pl

from behavgen.project import CellSettings, Project, TableSettings
from behavgen.quantities import QUANTITIES
from behavgen.tables.assemble import ASSEMBLERS
from behavgen.tables.cells import Cells, read_cells, values_present
from behavgen.tables.characterisation import Characterisation, TableSource
from behavgen.tables.conditions import (
    check_processes,
    processes_in_order,
    with_corner_resolved,
)
from behavgen.tables.duplicates import check_duplicates
from behavgen.tables.faults import TableFaults
from behavgen.tables.headers import Layout, lay_out
from behavgen.tables.parts import Part
from behavgen.tables.plausible import plausible_notices, zero_overdrive_dropped
from behavgen.tables.readers import LINE, RawTable, find_files, open_table, sha256_of

__all__ = ["read_cell"]


def read_cell(project: Project, cell: CellSettings) -> Characterisation:
    """Read all tables of a cell.

    Raises
    ------
    TableError
        With every fault of every table.
    """
    faults = TableFaults()
    notices: list[str] = []
    parts: dict[str, list[Part]] = {}
    for settings in cell.tables:
        read = _read_entry(project, cell, settings, notices, faults)
        parts.setdefault(settings.quantity, []).extend(read)
    for quantity in parts.values():
        for form in {part.form.name: part.form for part in quantity}.values():
            if not form.counted:
                check_duplicates([part for part in quantity if part.form == form], faults)
    faults.raise_if_any()
    return _characterisation(cell, parts, notices)


def _characterisation(
    cell: CellSettings, parts: dict[str, list[Part]], notices: Iterable[str]
) -> Characterisation:
    everything = [part for quantity in parts.values() for part in quantity]
    processes = processes_in_order(everything, cell.process_codes)
    unused = [name for name in cell.process_codes if name not in processes]
    sources = tuple(part.source for part in everything)
    del everything  # so that each quantity's frames can go once they are arrays
    tables = {
        field: table
        for quantity in [*parts]
        for field, table in ASSEMBLERS[quantity](parts.pop(quantity)).items()
    }
    return Characterisation(
        cell=cell.name,
        processes=processes,
        settings=cell,
        sources=sources,
        notices=(
            *notices,
            *(f"process {name} is declared, but no table names it" for name in unused),
        ),
        **tables,
    )


def _read_entry(
    project: Project,
    cell: CellSettings,
    settings: TableSettings,
    notices: list[str],
    faults: TableFaults,
) -> list[Part]:
    """Return the rows of all files that one entry of the project names."""
    folder = project.file.parent
    parts = []
    dropped_all: list[tuple[RawTable, Layout]] = []
    for path in find_files(folder, settings.file, faults):
        table = open_table(path, _shown(path, folder), faults)
        layout = lay_out(settings, table.headers, table.shown, faults) if table else None
        if table is None or layout is None:
            continue
        cells = read_cells(
            table,
            layout,
            ordered=QUANTITIES[settings.quantity].ordered,
            failed=settings.failed,
            faults=faults,
        )
        if cells is None:
            continue
        notices += layout.notices
        if cells.rows and cells.filtered_rows == cells.rows:
            dropped_all.append((table, layout))
            continue
        _check_some_rows(cells, table, faults)
        part = _part(table, layout, cells, settings)
        part = with_corner_resolved(part, project.corners, faults)
        check_processes(part, tuple(cell.process_codes), faults)
        notices += plausible_notices(part)
        parts.append(zero_overdrive_dropped(part, notices))
    if dropped_all and not parts:
        _note_empty_filter(dropped_all, settings, faults)
    return parts


def _part(table: RawTable, layout: Layout, cells: Cells, settings: TableSettings) -> Part:
    frame = cells.frame
    source = TableSource(
        quantity=settings.quantity,
        file=table.shown,
        sha256=sha256_of(table.path),
        rows=frame.height,
        failed_rows=cells.failed_rows,
        measured=settings.measured,
        provenance=settings.provenance,
    )
    return Part(
        form=layout.form,
        frame=_counted(frame, layout.form.counted) if layout.form.counted else frame,
        fixed=layout.fixed,
        headers={bound.column.name: bound.header for bound in layout.columns},
        source=source,
    )


def _counted(frame: pl.DataFrame, outcome: str) -> pl.DataFrame:
    """Count single outcomes: rows alike in everything else become one."""
    keys = [name for name in frame.columns if name not in (LINE, outcome)]
    counted = (
        frame.lazy()
        .group_by(keys)
        .agg(
            pl.col(LINE).min(),
            pl.len().cast(pl.Float64).alias("trials"),
            pl.col(outcome).sum().alias("ones"),
        )
    )
    return counted.collect(engine="streaming").sort(LINE)


def _check_some_rows(cells: Cells, table: RawTable, faults: TableFaults) -> None:
    if not cells.rows:
        faults.add(table.shown, "a header and no rows", "one row for each measurement")
    elif cells.failed_rows and cells.frame.is_empty():
        faults.add(table.shown, "every row is a failed run", "at least one row with results")


def _note_empty_filter(
    emptied: Sequence[tuple[RawTable, Layout]], settings: TableSettings, faults: TableFaults
) -> None:
    """Say which values there are, for a filter that keeps no row of any file."""
    shown = emptied[0][0].shown if len(emptied) == 1 else settings.file
    for index, wanted in emptied[0][1].filters.items():
        header = emptied[0][0].headers[index]
        found: dict[str, None] = {}
        for table, _ in emptied:
            found.update(dict.fromkeys(values_present(table, index, faults)))
        listed = [*found][:_LISTED_VALUES]
        more = f" and {len(found) - len(listed)} more" if len(found) > len(listed) else ""
        asked = ", ".join(f"'{value}'" for value in wanted)
        faults.add(
            shown,
            f"no row is left where this is {asked}",
            f"values present: {', '.join(listed) or 'none'}{more}",
            column=header,
        )


_LISTED_VALUES = 12


def _shown(path: Path, folder: Path) -> str:
    return path.relative_to(folder).as_posix() if path.is_relative_to(folder) else path.as_posix()
