"""Cells that are no plain numbers: failed runs, SI prefixes, empty cells, faults."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

import polars as pl

from behavgen.tables.faults import TableFaults
from behavgen.tables.headers import BoundColumn, Layout
from behavgen.tables.limits import breaks_limits, breaks_order
from behavgen.tables.readers import LINE
from behavgen.units import CELL_PATTERN, UnitError, as_number, cell_suffixes, format_si, parse_si

__all__ = ["read_texts", "without_failed"]


def read_texts(
    texts: pl.DataFrame,
    layout: Layout,
    rules: Iterable[tuple[str, str]],
    shown: str,
    faults: TableFaults,
) -> pl.DataFrame:
    """Turn rows of texts into our columns in SI, noting every cell that breaks a rule.

    Parameters
    ----------
    texts : polars.DataFrame
        `LINE` and our columns as stripped texts, null where empty.
    layout : Layout
        What the columns are.
    rules : iterable of (str, str)
        Columns of which the first may not exceed the second.
    shown : str
        The file's name for messages.
    faults : TableFaults
        Takes what is wrong.
    """
    read = _read(texts, layout.columns, shown, faults)
    within = _within_limits(read, texts, layout.columns, shown, faults)
    _check_order(within, rules, layout, shown, faults)
    return within.filter(_without_fault(within, texts, layout.columns))


def _without_fault(
    within: pl.DataFrame, texts: pl.DataFrame, columns: Iterable[BoundColumn]
) -> pl.Series:
    """Tell the rows whose cells all say something, or are empty where they may be.

    Rows with a fault go no further: what is left of them could look like another row.
    """
    usable = pl.repeat(value=True, n=within.height, eager=True)
    for bound in columns:
        says = within[bound.column.name].is_not_null()
        if bound.column.may_be_empty:
            says |= texts[bound.column.name].is_null()
        usable &= says
    return usable


def without_failed(texts: pl.DataFrame, tokens: Iterable[str]) -> tuple[pl.DataFrame, int]:
    """Drop rows in which any cell marks a failed run, as text or as the same number."""
    cell = pl.exclude(LINE)
    marks = cell.str.to_lowercase().is_in([*tokens])
    if numbers := [number for token in tokens if (number := as_number(token)) is not None]:
        marks |= cell.cast(pl.Float64, strict=False).is_in(numbers)
    kept = texts.filter(~pl.any_horizontal(marks.fill_null(value=False)))
    return kept, texts.height - kept.height


def _read(
    texts: pl.DataFrame, columns: Iterable[BoundColumn], shown: str, faults: TableFaults
) -> pl.DataFrame:
    """Turn texts into our columns, noting each that says nothing usable."""
    read = texts.with_columns(
        _numbers(texts[bound.column.name], bound) for bound in columns if not bound.column.is_text
    )
    for bound in columns:
        name, column = bound.column.name, bound.column
        bad = texts[name].is_not_null() & read[name].is_null()
        lines = texts.filter(bad).select(LINE, name)
        has_digit = pl.col(name).str.contains("[0-9]")
        for kind, hint in (
            (lines.filter(has_digit), ""),
            (lines.filter(~has_digit), "; list it in `failed` if it marks failed runs"),
        ):
            what = ((line, _reason(text, bound)) for line, text in kind.iter_rows())
            faults.add_rows(shown, bound.header, what, kind.height, column.allowed + hint)
        if not column.may_be_empty:
            empty = texts.filter(texts[name].is_null())[LINE]
            what = ((line, "empty cell") for line in empty)
            faults.add_rows(shown, bound.header, what, empty.len(), column.allowed)
    return read


def _numbers(texts: pl.Series, bound: BoundColumn) -> pl.Series:
    """Return texts as numbers in SI, null where they are none; most are plain even here."""
    exponent = f"e{bound.unit.power}" if bound.unit.power else ""
    plain = (texts + exponent).cast(pl.Float64, strict=False) + bound.unit.shift
    plain = plain.set(~plain.is_finite(), None)
    others = (plain.is_null() & texts.is_not_null()).arg_true()
    for start in range(0, others.len(), _ROWS_AT_ONCE):
        rows = others.slice(start, _ROWS_AT_ONCE)
        plain = plain.scatter(rows, _suffixed_numbers(texts.gather(rows), bound))
    return plain


_ROWS_AT_ONCE = 200_000  # taking texts apart needs a multiple of their memory


def _suffixed_numbers(texts: pl.Series, bound: BoundColumn) -> pl.Series:
    """Return texts such as ``12.5p`` or ``1e3 mV`` as numbers in SI, null where they are none."""
    parts = texts.str.extract_groups(CELL_PATTERN).struct.unnest()
    suffixes = cell_suffixes(bound.column.unit, bound.unit)
    power = _looked_up(pl.col("3"), {text: unit.power for text, unit in suffixes.items()})
    shift = _looked_up(pl.col("3"), {text: unit.shift for text, unit in suffixes.items()})
    exponent = pl.col("2").cast(pl.Int64).fill_null(0) + power
    number = pl.concat_str(pl.col("1"), pl.lit("e"), exponent.cast(pl.String))
    value = number.cast(pl.Float64, strict=False) + shift
    return parts.select(pl.when(value.is_finite()).then(value)).to_series()


def _looked_up(text: pl.Expr, meaning: Mapping[str, int] | Mapping[str, float]) -> pl.Expr:
    kind = pl.Int64 if all(isinstance(value, int) for value in meaning.values()) else pl.Float64
    return text.replace_strict([*meaning], [*meaning.values()], default=None, return_dtype=kind)


def _reason(text: str, bound: BoundColumn) -> str:
    try:
        parse_si(text, bound.column.unit, bound.unit)
    except UnitError as error:
        return str(error).partition("; ")[0]
    return f"'{text}' is not a number"


def _within_limits(
    read: pl.DataFrame,
    texts: pl.DataFrame,
    columns: Iterable[BoundColumn],
    shown: str,
    faults: TableFaults,
) -> pl.DataFrame:
    """Blank every number beyond its column's limits, and note it."""
    for bound in columns:
        if bound.column.is_text:
            continue
        name = bound.column.name
        beyond = breaks_limits(bound.column, pl.col(name)).fill_null(value=False)
        lines = texts.filter(read.select(beyond).to_series()).select(LINE, name)
        what = ((line, f"'{text}'") for line, text in lines.iter_rows())
        faults.add_rows(shown, bound.header, what, lines.height, bound.column.allowed)
        read = read.with_columns(pl.when(~beyond).then(name).alias(name))
    return read


def _check_order(
    read: pl.DataFrame,
    rules: Iterable[tuple[str, str]],
    layout: Layout,
    shown: str,
    faults: TableFaults,
) -> None:
    headers = {bound.column.name: bound.header for bound in layout.columns}
    units = {bound.column.name: bound.column.unit for bound in layout.columns}
    operands = {name: pl.col(name) for name in headers}
    for pair in rules:
        lesser, greater = (headers.get(name, name) for name in pair)
        values = [operands[n] if n in operands else pl.lit(layout.fixed[n]) for n in pair]
        broken = read.filter(breaks_order(pair, operands, layout.fixed)).select(
            pl.col(LINE), values[0].alias("lesser"), values[1].alias("greater")
        )
        unit = next(units[name] for name in pair if name in units)
        what = (
            (line, f"{_shown(low, unit)} is above the {_shown(high, unit)} in {greater}")
            for line, low, high in broken.iter_rows()
        )
        faults.add_rows(shown, lesser, what, broken.height, f"at most {greater} of the same row")


def _shown(value: float, unit: str) -> str:
    return f"{value:g}" if unit == "1" else format_si(value, unit)
