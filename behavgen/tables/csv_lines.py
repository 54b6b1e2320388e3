"""A CSV file as plain lines: its header, and which lines are not what the header promises.

polars reads the cells; it neither says on which line a row is too long nor
notices one that is too short. That is found here, on the raw lines, and only
when there is reason to look.
"""

from __future__ import annotations

import csv
from dataclasses import dataclass
from pathlib import Path

import polars as pl

from behavgen.tables.faults import TableFaults

__all__ = ["LINE", "CsvHeader", "OddLines", "check_encoding", "judge_lines", "read_csv_header"]

LINE = "line\n"
"""Name of a raw frame's column of line numbers; no header can read like this."""

_FIRST_BYTES = 1 << 20
_SEPARATORS = {";": "semicolons", "\t": "tabs", "|": "bars"}


@dataclass(frozen=True, slots=True, kw_only=True)
class CsvHeader:
    """Column headers and the 1-based line on which they stand."""

    names: tuple[str, ...]
    line: int


def read_csv_header(path: Path, shown: str, faults: TableFaults) -> CsvHeader | None:
    """Return the header of a CSV file, or note why there is none.

    Parameters
    ----------
    path : Path
        The file.
    shown : str
        Its name for messages.
    faults : TableFaults
        Takes what is wrong.
    """
    with path.open("rb") as file:
        start = file.read(_FIRST_BYTES)
    if not start.strip(b"\xef\xbb\xbf \t\r\n"):
        faults.add(shown, "empty file", "a header line and one row for each measurement")
        return None
    if start[:2] in (b"\xff\xfe", b"\xfe\xff") or b"\x00" in start[:4096]:
        faults.add(shown, "not UTF-8 text", "save the file as CSV in UTF-8")
        return None
    lines = start.split(b"\n")
    line = next(number for number, text in enumerate(lines) if text.strip(b"\xef\xbb\xbf \t\r"))
    try:
        header = lines[line].decode("utf-8-sig" if line == 0 else "utf-8").rstrip("\r")
    except UnicodeDecodeError as error:
        byte = error.object[error.start]
        what = f"byte 0x{byte:02x} in the header is not UTF-8"
        faults.add(shown, what, "save the file as UTF-8", row=line + 1)
        return None
    if "\r" in header:
        faults.add(shown, "lines end with a bare carriage return", "save it with line feeds")
        return None
    return _split_header(header, line + 1, shown, faults)


def _split_header(text: str, line: int, shown: str, faults: TableFaults) -> CsvHeader | None:
    names = tuple(name.strip() for name in next(csv.reader([text])))
    if len(names) == 1:
        for separator, word in _SEPARATORS.items():
            if separator in text:
                faults.add(
                    shown,
                    f"columns seem to be separated by {word}",
                    "save it with commas between columns and points in decimals (1.5, not 1,5)",
                    row=line,
                )
                return None
    return CsvHeader(names=names, line=line)


@dataclass(frozen=True, slots=True, kw_only=True)
class OddLines:
    """Lines that hold no row: empty ones, and ones with too few or too many fields."""

    blank: tuple[int, ...]
    wrong: tuple[int, ...]


def judge_lines(
    path: Path,
    shown: str,
    header: CsvHeader,
    faults: TableFaults,
    only: pl.Series | None = None,
) -> OddLines:
    """Find empty lines, and note every row that has more or fewer fields than the header.

    Fields without content beyond the last column are fine.

    Parameters
    ----------
    path, shown, header, faults
        The file, its name for messages, its header, and where faults go.
    only : polars.Series of int, optional
        Lines to look at instead of all.
    """
    raw = _raw_lines(path, header)
    if only is not None:
        raw = raw.filter(pl.col(LINE).is_in(only.implode()))
    expected = len(header.names)
    separators = pl.col("raw").str.count_matches(",", literal=True)
    quoted = pl.col("raw").str.contains('"', literal=True)
    is_blank = pl.col("raw").str.strip_chars(" \t\r,").fill_null("") == ""
    odd = raw.filter(is_blank | (separators != expected - 1) | quoted).with_columns(blank=is_blank)
    suspects = odd.collect()
    rows = suspects.filter(~pl.col("blank")).select(LINE, "raw").rows()
    unclosed = [(line, "an unclosed quote") for line, text in rows if text.count('"') % 2]
    closed = ((line, text) for line, text in rows if text.count('"') % 2 == 0)
    wrong = [(line, what) for line, text in closed if (what := _length_fault(text, expected))]
    faults.add_rows(shown, "", unclosed, len(unclosed), "quotes in pairs on each line")
    allowed = f"as many as the header on line {header.line} has"
    faults.add_rows(shown, "", wrong, len(wrong), allowed)
    return OddLines(
        blank=tuple(suspects.filter("blank")[LINE].to_list()),
        wrong=tuple(line for line, _ in (*unclosed, *wrong)),
    )


def check_encoding(path: Path, shown: str, faults: TableFaults) -> bool:
    """Note the first line that is not UTF-8, if there is one."""
    with path.open("rb") as file:
        for number, line in enumerate(file, start=1):
            try:
                line.decode("utf-8")
            except UnicodeDecodeError as error:
                byte = line[error.start]
                faults.add(
                    shown, f"byte 0x{byte:02x} is not UTF-8", "save the file as UTF-8", row=number
                )
                return False
    return True


def _raw_lines(path: Path, header: CsvHeader) -> pl.LazyFrame:
    lines = pl.scan_csv(
        path,
        has_header=True,
        separator="\x01",  # in no text file: every line is one field
        quote_char=None,
        skip_lines=header.line - 1,
        infer_schema=False,
        truncate_ragged_lines=True,
        encoding="utf8-lossy",
        row_index_name=LINE,
        row_index_offset=header.line + 1,
        glob=False,
    )
    (name,) = (name for name in lines.collect_schema().names() if name != LINE)
    return lines.rename({name: "raw"})


def _length_fault(line: str, expected: int) -> str:
    fields = next(csv.reader([line]))
    while len(fields) > expected and not fields[-1].strip():
        fields.pop()
    if len(fields) == expected:
        return ""
    return f"{len(fields)} field{'s' if len(fields) != 1 else ''} instead of {expected}"
