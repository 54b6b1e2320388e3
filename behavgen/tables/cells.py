"""Raw cells -> numbers in SI, and a fault for every cell that is none.

Nearly all rows of nearly all tables are plain: their cells are numbers within
their limits. One streaming pass over the file takes these out. What is left
(SI prefixes, failed runs, empty cells, faults) is looked at in memory.
"""

from __future__ import annotations

import contextlib
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
from behavgen.units import UnitError, as_number, parse_si

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
    rules = _rules_that_apply(ordered, layout)
    tokens = frozenset(token.strip().lower() for token in failed)
    scanned = _scan_plain(table, layout, rules, tokens, faults)
    if scanned is None:
        return None
    odd = scanned.judged or _odd_lines(table, scanned.open_ended, faults)
    other = scanned.other.filter(~scanned.other.is_in([*odd.blank, *odd.wrong]))
    texts = _texts_of(table, layout, other, faults, ragged=scanned.judged is not None)
    texts, failed_rows = without_failed(texts, tokens)
    read = read_texts(texts, layout, rules, table.shown, faults)
    return Cells(
        frame=scanned.plain if read.is_empty() else pl.concat([scanned.plain, read]).sort(LINE),
        failed_rows=failed_rows,
        rows=scanned.rows - len(odd.blank),
        filtered_rows=scanned.rows - scanned.plain.height - scanned.other.len(),
    )


def values_present(table: RawTable, index: int, faults: TableFaults) -> list[str]:
    """Return the distinct cells of a column, for the message on a filter that matches nothing."""
    cell = pl.col(str(index)).str.strip_chars()
    found = collect(table, lambda raw: [raw.select(cell.unique().sort())], faults)
    return [text for text in found.frames[0].to_series().to_list() if text] if found else []


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Scanned:
    """What one pass over a file gives: plain rows, and the lines of others and of open ends."""

    plain: pl.DataFrame
    other: pl.Series
    open_ended: pl.Series
    rows: int
    judged: OddLines | None


def _scan_plain(
    table: RawTable,
    layout: Layout,
    rules: Sequence[tuple[str, str]],
    tokens: frozenset[str],
    faults: TableFaults,
) -> _Scanned | None:
    """Read the rows that need no second look, in SI."""
    numbers = {
        bound.index for bound in layout.columns if not bound.column.is_text and not bound.unit.power
    }
    names = [bound.column.name for bound in layout.columns]
    last = pl.col(str(len(table.headers) - 1))

    def plan(raw: pl.LazyFrame) -> list[pl.LazyFrame]:
        kept = raw.filter(_kept(layout.filters)) if layout.filters else raw
        judged = kept.with_columns(_in_si(bound) for bound in layout.columns).with_columns(
            _is_plain(layout, rules, tokens).alias(_PLAIN)
        )
        return [
            judged.filter(_PLAIN).select(LINE, *names),
            # The others and the open ends in one: every further query costs a pass.
            judged.filter(~pl.col(_PLAIN) | last.is_null()).select(
                LINE, _PLAIN, last.is_null().alias(_OPEN)
            ),
            *([raw.select(pl.len())] if layout.filters else []),
        ]

    collected = collect(table, plan, faults, numbers=numbers - layout.filters.keys())
    if collected is None:
        return None
    plain, notable, *counted = collected.frames
    other, open_ended = notable.filter(~pl.col(_PLAIN)), notable.filter(_OPEN)
    rows = counted[0].item() if counted else plain.height + other.height
    return _Scanned(
        plain=plain,
        other=other[LINE],
        open_ended=open_ended[LINE],
        rows=rows,
        judged=collected.judged,
    )


_PLAIN = "@plain"
_OPEN = "@open"


def _texts_of(
    table: RawTable, layout: Layout, lines: pl.Series, faults: TableFaults, *, ragged: bool
) -> pl.DataFrame:
    """Return the cells of some lines as stripped texts, null where empty."""
    names = [bound.column.name for bound in layout.columns]
    nothing = pl.DataFrame(schema={LINE: lines.dtype} | dict.fromkeys(names, pl.String))
    if lines.is_empty():
        return nothing
    cells = []
    for bound in layout.columns:
        text = pl.col(str(bound.index)).str.strip_chars()
        cells.append(pl.when(text != "").then(text).alias(bound.column.name))
    wanted = pl.col(LINE).is_in(lines.implode())
    found = collect(
        table, lambda raw: [raw.filter(wanted).select(LINE, *cells)], faults, ragged=ragged
    )
    return found.frames[0] if found else nothing


def _rules_that_apply(ordered: Sequence[tuple[str, str]], layout: Layout) -> list[tuple[str, str]]:
    names = {bound.column.name for bound in layout.columns}
    return [pair for pair in ordered if {*pair} <= names | layout.fixed.keys() and {*pair} & names]


def _odd_lines(table: RawTable, lines: pl.Series, faults: TableFaults) -> OddLines:
    """Look at the lines whose last cell is missing: they may be empty or too short."""
    if table.csv_header is None or lines.is_empty():
        return OddLines(blank=(), wrong=())
    return judge_lines(table.path, table.shown, table.csv_header, faults, only=lines)


def _kept(filters: Mapping[int, tuple[str | float, ...]]) -> pl.Expr:
    """Keep the rows whose cells equal a wanted value, as text or as a number."""
    tests = []
    for index, values in filters.items():
        cell = pl.col(str(index)).str.strip_chars()
        test = cell.is_in([str(value).strip() for value in values])
        if numbers := [number for value in values if (number := as_number(value)) is not None]:
            test |= cell.cast(pl.Float64, strict=False).is_in(numbers)
        tests.append(test.fill_null(value=False))
    return functools.reduce(operator.and_, tests)


def _in_si(bound: BoundColumn) -> pl.Expr:
    """Return the cell as a number in SI, null where it is no plain number; or as a name.

    A number in another unit is scaled as text, by an exponent: scaling the float would
    round once more, and 612.3 mV here and 0.6123 V there would be two conditions.
    """
    cell = pl.col(str(bound.index))
    if bound.column.is_text:
        return cell.str.strip_chars().alias(bound.column.name)
    if bound.unit.power:
        cell = pl.concat_str(cell, pl.lit(f"e{bound.unit.power}"))
    number = cell.cast(pl.Float64, strict=False)
    return (number + bound.unit.shift).alias(bound.column.name)


def _sentinels(bound: BoundColumn, tokens: Iterable[str]) -> Iterable[float]:
    """Yield the tokens for failed runs that are numbers, such as 1e30."""
    for token in tokens:
        with contextlib.suppress(UnitError):
            yield parse_si(token, bound.column.unit, bound.unit)


def _is_plain(layout: Layout, rules: Iterable[tuple[str, str]], tokens: Iterable[str]) -> pl.Expr:
    """Tell whether a row needs no second look, from its columns in SI."""
    tests = []
    for bound in layout.columns:
        value = pl.col(bound.column.name)
        if bound.column.is_text:
            tests.append(value != "")
            continue
        tests += [value.is_finite(), ~breaks_limits(bound.column, value)]
        tests += [value != sentinel for sentinel in _sentinels(bound, tokens)]
    operands = {bound.column.name: pl.col(bound.column.name) for bound in layout.columns}
    tests += [~breaks_order(pair, operands, layout.fixed) for pair in rules]
    return pl.all_horizontal(test.fill_null(value=False) for test in tests)
