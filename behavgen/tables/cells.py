"""Raw cells -> numbers in SI, and a fault for every cell that is none.

Nearly all rows of nearly all tables are plain: their cells are numbers within
their limits. One streaming pass over the file takes these out. What is left
(SI prefixes, failed runs, empty cells, faults) is looked at in memory.
"""

from __future__ import annotations

import functools
import math
import operator
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from behavgen.quantities import Column
from behavgen.tables.csv_lines import OddLines, judge_lines
from behavgen.tables.faults import TableFaults
from behavgen.tables.headers import BoundColumn, Layout
from behavgen.tables.readers import LINE, RawTable, collect
from behavgen.units import CELL_PATTERN, UnitError, cell_suffixes, parse_si

if TYPE_CHECKING:
    import polars as pl

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
    import polars as pl  # noqa: PLC0415  (slow to load)

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
    rest, failed_rows = _without_failed(rest, tokens)
    read = _read_texts(rest, layout.columns, table.shown, faults)
    _check_limits(read, rest, layout.columns, table.shown, faults)
    _check_order(read, rules, layout, table.shown, faults)
    frame = good if read.is_empty() else pl.concat([good, read]).sort(LINE)
    return Cells(
        frame=frame,
        failed_rows=failed_rows,
        rows=counts["all"].item() - len(odd.blank),
        filtered_rows=counts["all"].item() - counts["kept"].item(),
    )


def values_present(table: RawTable, index: int, faults: TableFaults) -> list[str]:
    """Return the distinct cells of a column, for the message on a filter that matches nothing."""
    import polars as pl  # noqa: PLC0415  (slow to load)

    cell = pl.col(str(index)).cast(pl.String).str.strip_chars()
    found = collect(table, lambda raw: [raw.select(cell.unique().sort())], faults)
    return [text for text in found[0].to_series().to_list() if text] if found else []


def _has_odd_types(table: RawTable, layout: Layout, faults: TableFaults) -> bool:
    """Note columns of a typed file that hold neither numbers nor text, such as dates."""
    import polars as pl  # noqa: PLC0415  (slow to load)

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
    import polars as pl  # noqa: PLC0415  (slow to load)

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
    import polars as pl  # noqa: PLC0415  (slow to load)

    cell = pl.col(str(bound.index))
    if bound.column.is_text:
        return cell.cast(pl.String).str.strip_chars().alias(bound.column.name)
    return bound.unit.to_si(cell.cast(pl.Float64, strict=False)).alias(bound.column.name)


def _text(bound: BoundColumn) -> pl.Expr:
    """Return the cell as stripped text, null where it is empty."""
    import polars as pl  # noqa: PLC0415  (slow to load)

    text = pl.col(str(bound.index)).cast(pl.String).str.strip_chars()
    return pl.when(text != "").then(text).alias(bound.column.name)


def _is_plain(layout: Layout, rules: Iterable[tuple[str, str]], tokens: Iterable[str]) -> pl.Expr:
    """Tell whether a row needs no second look."""
    import polars as pl  # noqa: PLC0415  (slow to load)

    tests = []
    sentinels = [number for token in tokens if (number := _as_number(token)) is not None]
    for bound in layout.columns:
        cell, value = pl.col(str(bound.index)), _value(bound)
        if bound.column.is_text:
            tests.append((value != "").fill_null(value=False))
            continue
        test = value.is_finite() & ~_breaks_limits(bound.column, value)
        for sentinel in sentinels:
            test &= cell.cast(pl.Float64, strict=False) != sentinel
        tests.append(test.fill_null(cell.is_null() if bound.column.may_be_empty else False))
    operands = {bound.column.name: _value(bound) for bound in layout.columns}
    tests += [
        (~_breaks_order(pair, operands, layout.fixed)).fill_null(value=True) for pair in rules
    ]
    return functools.reduce(operator.and_, tests)


def _breaks_limits(column: Column, value: pl.Expr) -> pl.Expr:
    broken = (value <= column.above) if math.isfinite(column.above) else (value < column.at_least)
    if math.isfinite(column.at_most):
        broken |= value > column.at_most
    if column.whole:
        broken |= value != value.floor()
    return broken


def _breaks_order(
    pair: tuple[str, str], operands: Mapping[str, pl.Expr], fixed: Mapping[str, str | float]
) -> pl.Expr:
    import polars as pl  # noqa: PLC0415  (slow to load)

    lesser, greater = (
        operands[name] if name in operands else pl.lit(float(fixed[name])) for name in pair
    )
    return lesser > greater


def _without_failed(rest: pl.DataFrame, tokens: Iterable[str]) -> tuple[pl.DataFrame, int]:
    """Drop rows in which any cell marks a failed run."""
    import polars as pl  # noqa: PLC0415  (slow to load)

    cells = pl.exclude(LINE).str.to_lowercase().is_in([*tokens]).fill_null(value=False)
    kept = rest.filter(~pl.any_horizontal(cells))
    return kept, rest.height - kept.height


def _read_texts(
    rest: pl.DataFrame, columns: Iterable[BoundColumn], shown: str, faults: TableFaults
) -> pl.DataFrame:
    """Turn texts into our columns, noting each that says nothing usable."""
    import polars as pl  # noqa: PLC0415  (slow to load)

    read = rest.select(
        LINE,
        *(
            pl.col(bound.column.name) if bound.column.is_text else _parsed(bound)
            for bound in columns
        ),
    )
    for bound in columns:
        name, column = bound.column.name, bound.column
        bad = rest[name].is_not_null() & read[name].is_null()
        lines = rest.filter(bad).select(LINE, name)
        what = ((line, _reason(text, bound)) for line, text in lines.iter_rows())
        faults.add_rows(shown, bound.header, what, lines.height, column.allowed)
        if not column.may_be_empty:
            empty = rest.filter(rest[name].is_null())[LINE]
            what = ((line, "empty cell") for line in empty)
            faults.add_rows(shown, bound.header, what, empty.len(), column.allowed)
    return read


def _parsed(bound: BoundColumn) -> pl.Expr:
    """Return a text such as ``12.5p`` as a number in SI, null where it is none."""
    import polars as pl  # noqa: PLC0415  (slow to load)

    name = bound.column.name
    parts = pl.col(name).str.extract_groups(CELL_PATTERN).struct
    suffixes = cell_suffixes(bound.column.unit, bound.unit)
    power = _looked_up(parts.field("3"), {text: unit.power for text, unit in suffixes.items()})
    shift = _looked_up(parts.field("3"), {text: unit.shift for text, unit in suffixes.items()})
    exponent = parts.field("2").cast(pl.Int64).fill_null(0) + power
    number = pl.concat_str(parts.field("1"), pl.lit("e"), exponent.cast(pl.String))
    value = number.cast(pl.Float64, strict=False) + shift
    return pl.when(value.is_finite()).then(value).alias(name)


def _looked_up(text: pl.Expr, meaning: Mapping[str, int] | Mapping[str, float]) -> pl.Expr:
    import polars as pl  # noqa: PLC0415  (slow to load)

    kind = pl.Int64 if all(isinstance(value, int) for value in meaning.values()) else pl.Float64
    return text.replace_strict([*meaning], [*meaning.values()], default=None, return_dtype=kind)


def _reason(text: str, bound: BoundColumn) -> str:
    try:
        parse_si(text, bound.column.unit, bound.unit)
    except UnitError as error:
        return str(error).partition("; ")[0]
    return f"'{text}' is not a number"


def _check_limits(
    read: pl.DataFrame,
    rest: pl.DataFrame,
    columns: Iterable[BoundColumn],
    shown: str,
    faults: TableFaults,
) -> None:
    import polars as pl  # noqa: PLC0415  (slow to load)

    for bound in columns:
        if bound.column.is_text:
            continue
        name = bound.column.name
        broken = read.select(_breaks_limits(bound.column, pl.col(name)).fill_null(value=False))
        lines = rest.filter(broken.to_series()).select(LINE, name)
        what = ((line, f"'{text}'") for line, text in lines.iter_rows())
        faults.add_rows(shown, bound.header, what, lines.height, bound.column.allowed)


def _check_order(
    read: pl.DataFrame,
    rules: Iterable[tuple[str, str]],
    layout: Layout,
    shown: str,
    faults: TableFaults,
) -> None:
    import polars as pl  # noqa: PLC0415  (slow to load)

    headers = {bound.column.name: bound.header for bound in layout.columns}
    operands = {name: pl.col(name) for name in headers}
    for pair in rules:
        lesser, greater = (headers.get(name, name) for name in pair)
        values = [operands[n] if n in operands else pl.lit(layout.fixed[n]) for n in pair]
        broken = read.filter(_breaks_order(pair, operands, layout.fixed)).select(
            pl.col(LINE), values[0].alias("lesser"), values[1].alias("greater")
        )
        what = (
            (line, f"{low:g} is above {high:g} in {greater}")
            for line, low, high in broken.iter_rows()
        )
        faults.add_rows(shown, lesser, what, broken.height, f"at most {greater} of the same row")
