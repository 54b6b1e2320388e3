"""The first sheet of an Excel file as texts."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

from python_calamine import CalamineError, load_workbook

from behavgen.tables.faults import TableFaults

__all__ = ["Sheet", "read_first_sheet"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """Headers, the rows below them, and the spreadsheet's number of the first of these."""

    headers: tuple[str, ...]
    rows: Sequence[Sequence[str | None]]
    first_row: int


def read_first_sheet(path: Path, shown: str, faults: TableFaults) -> Sheet | None:
    """Return the first sheet, or note why it cannot be read.

    Parameters
    ----------
    path, shown, faults
        The file, its name for messages, and where faults go.
    """
    try:
        with load_workbook(path) as book:
            rows = book.get_sheet_by_index(0).to_python(skip_empty_area=False)
    except CalamineError as error:
        faults.add(shown, f"cannot be read as an Excel file: {error}", "an .xlsx file")
        return None
    texts = [[_cell_text(cell) for cell in row] for row in rows]
    first = next((number for number, row in enumerate(texts) if any(row)), None)
    if first is None:
        faults.add(shown, "empty first sheet", "a header row and one row for each measurement")
        return None
    headers = tuple((header or "").strip() for header in texts[first])
    return Sheet(headers=headers, rows=texts[first + 1 :], first_row=first + 2)


def _cell_text(cell: object) -> str | None:
    """Return a spreadsheet cell as text: 27.0 is written 27, an empty cell is None."""
    if cell is None or cell == "":
        return None
    if isinstance(cell, bool):
        return str(int(cell))
    if isinstance(cell, float):
        return str(int(cell)) if cell.is_integer() and abs(cell) < 1e15 else repr(cell)
    return str(cell)
