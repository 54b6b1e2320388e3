"""Files -> raw frames: CSV, Parquet and Excel behind one face.

A raw frame is lazy, holds the cells as the file has them, and numbers its rows
by the line (or spreadsheet row) on which they stand, the header being line 1.
"""

from __future__ import annotations

import hashlib
import warnings
from collections.abc import Callable, Collection, Mapping, Sequence
from dataclasses import dataclass
from glob import has_magic
from pathlib import Path
from types import MappingProxyType
from typing import Protocol

import polars as pl

from behavgen.files import files_named
from behavgen.nearest import did_you_mean
from behavgen.tables.csv_lines import (
    LINE,
    CsvHeader,
    OddLines,
    check_encoding,
    judge_lines,
    read_csv_header,
)
from behavgen.tables.faults import TableFaults
from behavgen.tables.spreadsheet import read_first_sheet

__all__ = ["LINE", "Collected", "RawTable", "collect", "find_files", "open_table", "sha256_of"]

_KINDS = (".csv", ".parquet", ".xlsx")


class Scan(Protocol):
    """Opens a file anew, lazily."""

    def __call__(self, *, numbers: Collection[int] = (), ragged: bool = False) -> pl.LazyFrame:
        """Return column ``"0"``, ``"1"``, ... for each header, and `LINE`.

        Parameters
        ----------
        numbers : collection of int
            Columns to read as Float64, null where a cell is no plain number;
            all others come as text.
        ragged : bool
            Accept rows longer than the header, and cut them.
        """
        ...


@dataclass(frozen=True, slots=True, kw_only=True)
class RawTable:
    """One file, opened.

    Parameters
    ----------
    path : Path
        The file.
    shown : str
        Its name relative to the project, for messages.
    headers : tuple of str
        Column headers in the order of the file.
    scan : callable
        Gives its cells as a lazy frame.
    csv_header : CsvHeader or None
        Set for CSV files, whose rows may be too short or too long.
    """

    path: Path
    shown: str
    headers: tuple[str, ...]
    scan: Scan
    csv_header: CsvHeader | None = None


def find_files(folder: Path, pattern: str, faults: TableFaults) -> tuple[Path, ...]:
    """Return the files that a path or glob names, sorted, or note that there are none."""
    files = files_named(folder, pattern)
    if files:
        return files
    if has_magic(pattern):
        faults.add(pattern, "no file matches", f"a pattern relative to {folder.name}/")
        return ()
    literal = folder / pattern
    around = literal.parent
    siblings = sorted(item.name for item in around.iterdir()) if around.is_dir() else []
    hint = did_you_mean(literal.name, siblings)
    kind = "is a folder" if literal.is_dir() else f"no such file{hint}"
    faults.add(pattern, kind, "a path or glob relative to the project file")
    return ()


def sha256_of(path: Path) -> str:
    """Return the hash of a file's bytes."""
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()


def open_table(path: Path, shown: str, faults: TableFaults) -> RawTable | None:
    """Open one file, or note why it cannot be.

    Parameters
    ----------
    path : Path
        The file.
    shown : str
        Its name for messages.
    faults : TableFaults
        Takes what is wrong.
    """
    kind = path.suffix.lower()
    before = len(faults)
    try:
        if kind == ".csv":
            table = _open_csv(path, shown, faults)
        elif kind == ".parquet":
            table = _open_parquet(path, shown, faults)
        elif kind == ".xlsx":
            table = _open_excel(path, shown, faults)
        else:
            faults.add(shown, f"'{path.suffix}' files are not read", f"one of {', '.join(_KINDS)}")
            return None
    except OSError as error:
        faults.add(shown, f"cannot be read: {error.strerror or error}")
        return None
    if table is None or len(faults) > before:
        return None
    return table if _headers_differ(table, faults) else None


def _headers_differ(table: RawTable, faults: TableFaults) -> bool:
    named = [header for header in table.headers if header]
    twice = sorted({header for header in named if named.count(header) > 1})
    for header in twice:
        faults.add(
            table.shown,
            f"{named.count(header)} columns have this header",
            "headers that differ",
            row=table.csv_header.line if table.csv_header else 1,
            column=header,
        )
    return not twice


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Collected:
    """Results of queries, and what was found if every line of the file had to be judged."""

    frames: list[pl.DataFrame]
    judged: OddLines | None = None


def collect(
    table: RawTable,
    plan: Callable[[pl.LazyFrame], Sequence[pl.LazyFrame]],
    faults: TableFaults,
    *,
    numbers: Collection[int] = (),
    ragged: bool = False,
) -> Collected | None:
    """Run queries on a raw table in one pass over the file.

    Parameters
    ----------
    table : RawTable
        The opened file.
    plan : callable
        Takes the raw frame, returns the queries.
    faults : TableFaults
        Takes what is wrong with the file as a whole, such as rows of a wrong length.
    numbers : collection of int
        Columns to read as numbers.
    ragged : bool
        Set when an earlier pass has judged the lines already.

    Returns
    -------
    Collected or None
        One result for each query; None when the file cannot be read.
    """
    try:
        return Collected(frames=_run(plan(table.scan(numbers=numbers, ragged=ragged))))
    except pl.exceptions.PolarsError as error:
        reason = str(error).splitlines()[0]
    if table.csv_header is None:
        faults.add(table.shown, f"cannot be read: {reason}")
        return None
    if not check_encoding(table.path, table.shown, faults):
        return None
    judged = judge_lines(table.path, table.shown, table.csv_header, faults)
    try:
        frames = _run(plan(table.scan(numbers=numbers, ragged=True)))
    except pl.exceptions.PolarsError:
        if not judged.wrong:
            faults.add(table.shown, f"cannot be read as CSV: {reason}")
        return None
    return Collected(frames=frames, judged=judged)


def _run(queries: Sequence[pl.LazyFrame]) -> list[pl.DataFrame]:
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # about malformed lines, which become faults with a place
        return pl.collect_all(queries, engine="streaming")


def _open_csv(path: Path, shown: str, faults: TableFaults) -> RawTable | None:
    header = read_csv_header(path, shown, faults)
    if header is None:
        return None
    names = _scan_csv(path, header).collect_schema().names()
    if len(names) != len(header.names) + 1:
        faults.add(shown, "the header cannot be split into columns", "plain names and commas")
        return None

    def scan(*, numbers: Collection[int] = (), ragged: bool = False) -> pl.LazyFrame:
        kinds = {names[index + 1]: pl.Float64 for index in numbers}
        return _numbered(_scan_csv(path, header, kinds=kinds, ragged=ragged))

    return RawTable(path=path, shown=shown, headers=header.names, scan=scan, csv_header=header)


def _scan_csv(
    path: Path,
    header: CsvHeader,
    *,
    kinds: Mapping[str, type[pl.DataType]] = MappingProxyType({}),
    ragged: bool = False,
) -> pl.LazyFrame:
    return pl.scan_csv(
        path,
        skip_lines=header.line - 1,
        infer_schema=False,
        schema_overrides=dict(kinds),
        ignore_errors=bool(kinds),
        truncate_ragged_lines=ragged,
        row_index_name=LINE,
        row_index_offset=header.line + 1,
        glob=False,
    )


def _open_parquet(path: Path, shown: str, faults: TableFaults) -> RawTable | None:
    try:
        whole = pl.scan_parquet(path, row_index_name=LINE, row_index_offset=2, glob=False)
        schema = whole.collect_schema()
    except pl.exceptions.PolarsError as error:
        faults.add(shown, f"cannot be read as Parquet: {str(error).splitlines()[0]}")
        return None
    headers = tuple(name for name in schema if name != LINE)
    for name in headers:
        if not _holds_cells(schema[name]):
            faults.add(shown, f"column of type {schema[name]}", "numbers or text", column=name)
    return RawTable(path=path, shown=shown, headers=headers, scan=_typed(_numbered(whole)))


def _holds_cells(kind: pl.DataType) -> bool:
    return kind.is_numeric() or kind in (pl.String, pl.Boolean, pl.Null, pl.Categorical, pl.Enum)


def _typed(frame: pl.LazyFrame) -> Scan:
    """Return the scan of a frame whose cells already have types."""
    names = [name for name in frame.collect_schema().names() if name != LINE]

    def scan(*, numbers: Collection[int] = (), ragged: bool = False) -> pl.LazyFrame:  # noqa: ARG001
        return frame.with_columns(
            pl.col(name).cast(pl.Float64 if int(name) in numbers else pl.String, strict=False)
            for name in names
        )

    return scan


def _numbered(scanned: pl.LazyFrame) -> pl.LazyFrame:
    """Name columns by position: headers may hold anything."""
    names = [name for name in scanned.collect_schema().names() if name != LINE]
    return scanned.rename({name: str(index) for index, name in enumerate(names)})


def _open_excel(path: Path, shown: str, faults: TableFaults) -> RawTable | None:
    sheet = read_first_sheet(path, shown, faults)
    if sheet is None:
        return None
    rows = sheet.rows
    cells = {
        str(index): pl.Series([row[index] for row in rows], dtype=pl.String)
        for index in range(len(sheet.headers))
    }
    numbered = pl.LazyFrame(cells).with_row_index(LINE, offset=sheet.first_row)
    kept = numbered.filter(~pl.all_horizontal(pl.exclude(LINE).is_null()))
    return RawTable(path=path, shown=shown, headers=sheet.headers, scan=_typed(kept))
