"""Raw cells -> numbers in SI, and a fault for every cell that is none.

Nearly all rows of nearly all tables are plain: their cells are numbers within
their limits. One streaming pass over the file takes these out. What is left
(SI prefixes, failed runs, empty cells, faults) is looked at in memory.
"""

from __future__ import annotations

import functools
import operator
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

import polars as pl

from behavgen.tables.cell_texts import read_texts, without_failed
from behavgen.tables.csv_lines import OddLines, judge_lines
from behavgen.tables.faults import TableFaults
from behavgen.tables.headers import BoundColumn, Layout
from behavgen.tables.limits import breaks_limits, breaks_order
from behavgen.tables.readers import LINE, RawTable, collect

__all__ = ["Cells", "read_cells", "values_present"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Cells:
    """The usable rows of one file.

    Parameters
    ----------
    frame : polars.DataFrame
        Our columns in SI (numbers as Float64, null where allowed to be empty;
        names as String) and `LINE`, in the order of the file.
    failed_rows : int
        Rows dropped because a cell marked a failed run.
    rows : int
        Rows of the file, empty lines aside.
    filtered_rows : int
        Rows that the filters dropped.
    """

    frame: pl.DataFrame
    failed_rows: int
    rows: int
    filtered_rows: int


def read_cells(
    table: RawTable,
    layout: Layout,
    *,
    ordered: Sequence[tuple[str, str]],
    failed: Sequence[str],
    faults: TableFaults,
) -> Cells | None:
    """Read one file's cells, noting every fault.

    Parameters
    ----------
    table : RawTable
        The opened file.
    layout : Layout
        Which of its columns are what.
    ordered : sequence of (str, str)
        Columns of which the first may not exceed the second.
    failed : sequence of str
        Cells that mark a failed run; capitals do not matter.
    faults : TableFaults
        Takes what is wrong.

    Returns
    -------
    Cells or None
        None when the file cannot be read at all.
    """
    if _has_odd_types(table, layout, faults):
        return None
    rules = _rules_that_apply(ordered, layout)
    tokens = frozenset(token.strip().lower() for token in failed)
    last = str(len(table.headers) - 1)

    def plan(raw: pl.LazyFrame) -> list[pl.LazyFrame]:
        kept = raw.filter(_kept(layout.filters))
        plain = _is_plain(layout, rules, tokens)
        return [
            kept.filter(plain).select(LINE, *(_value(bound) for bound in layout.columns)),
            kept.filter(~plain).select(LINE, *(_text(bound) for bound in layout.columns)),
            raw.filter(pl.col(last).is_null()).select(LINE),
            raw.select(all=pl.len(), kept=_kept(layout.filters).sum()),
        ]

    collected = collect(table, plan, faults)
    if collected is None:
        return None
    good, rest, open_ended, counts = collected
    odd = _odd_lines(table, open_ended[LINE], faults)
    rest = rest.filter(~pl.col(LINE).is_in([*odd.blank, *odd.wrong]))
    texts, failed_rows = without_failed(rest, tokens)
    read = read_texts(texts, layout, rules, table.shown, faults)
    frame = good if read.is_empty() else pl.concat([good, read]).sort(LINE)
    return Cells(
        frame=frame,
        failed_rows=failed_rows,
        rows=counts["all"].item() - len(odd.blank),
        filtered_rows=counts["all"].item() - counts["kept"].item(),
    )


def values_present(table: RawTable, index: int, faults: TableFaults) -> list[str]:
    """Return the distinct cells of a column, for the message on a filter that matches nothing."""
    cell = pl.col(str(index)).cast(pl.String).str.strip_chars()
    found = collect(table, lambda raw: [raw.select(cell.unique().sort())], faults)
    return [text for text in found[0].to_series().to_list() if text] if found else []


def _has_odd_types(table: RawTable, layout: Layout, faults: TableFaults) -> bool:
    """Note columns of a typed file that hold neither numbers nor text, such as dates."""
    before = len(faults)
    for bound in layout.columns:
        kind = table.frame.collect_schema()[str(bound.index)]
        if not (kind.is_numeric() or kind in (pl.String, pl.Boolean, pl.Null, pl.Categorical)):
            what, allowed = f"a column of type {kind}", bound.column.allowed
            faults.add(table.shown, what, allowed, column=bound.header)
    return len(faults) > before


def _rules_that_apply(ordered: Sequence[tuple[str, str]], layout: Layout) -> list[tuple[str, str]]:
    names = {bound.column.name for bound in layout.columns}
    return [pair for pair in ordered if {*pair} <= names | layout.fixed.keys() and {*pair} & names]


def _odd_lines(table: RawTable, lines: pl.Series, faults: TableFaults) -> OddLines:
    """Look at the lines whose last cell is missing: they may be empty or too short."""
    if table.csv_header is None or lines.is_empty():
        return OddLines(blank=(), wrong=())
    return judge_lines(table.path, table.shown, table.csv_header, faults, only=lines.to_list())


def _kept(filters: Mapping[int, tuple[str | float, ...]]) -> pl.Expr:
    """Keep the rows whose cells equal a wanted value, as text or as a number."""
    tests = [pl.lit(value=True)]
    for index, values in filters.items():
        cell = pl.col(str(index)).cast(pl.String).str.strip_chars()
        test = cell.is_in([str(value).strip() for value in values])
        if numbers := [number for value in values if (number := _as_number(value)) is not None]:
            test |= cell.cast(pl.Float64, strict=False).is_in(numbers)
        tests.append(test.fill_null(value=False))
    return functools.reduce(operator.and_, tests)


def _as_number(value: str | float) -> float | None:
    try:
        return float(value)
    except ValueError:
        return None


def _value(bound: BoundColumn) -> pl.Expr:
    """Return the cell as a number in SI, null where it is no plain number; or as a name."""
    cell = pl.col(str(bound.index))
    if bound.column.is_text:
        return cell.cast(pl.String).str.strip_chars().alias(bound.column.name)
    return bound.unit.to_si(cell.cast(pl.Float64, strict=False)).alias(bound.column.name)


def _text(bound: BoundColumn) -> pl.Expr:
    """Return the cell as stripped text, null where it is empty."""
    text = pl.col(str(bound.index)).cast(pl.String).str.strip_chars()
    return pl.when(text != "").then(text).alias(bound.column.name)


def _is_plain(layout: Layout, rules: Iterable[tuple[str, str]], tokens: Iterable[str]) -> pl.Expr:
    """Tell whether a row needs no second look."""
    tests = []
    sentinels = [number for token in tokens if (number := _as_number(token)) is not None]
    for bound in layout.columns:
        cell, value = pl.col(str(bound.index)), _value(bound)
        if bound.column.is_text:
            tests.append((value != "").fill_null(value=False))
            continue
        test = value.is_finite() & ~breaks_limits(bound.column, value)
        for sentinel in sentinels:
            test &= cell.cast(pl.Float64, strict=False) != sentinel
        tests.append(test.fill_null(cell.is_null() if bound.column.may_be_empty else False))
    operands = {bound.column.name: _value(bound) for bound in layout.columns}
    tests += [(~breaks_order(pair, operands, layout.fixed)).fill_null(value=True) for pair in rules]
    return functools.reduce(operator.and_, tests)
