"""Values that are possible but unlikely: worth a look, no fault."""

from __future__ import annotations

import dataclasses

import polars as pl

from behavgen.quantities import Column, columns_of
from behavgen.tables.parts import Part
from behavgen.units import format_celsius, format_si

__all__ = ["plausible_notices", "zero_overdrive_dropped"]

_ANYTHING = (0.0, float("inf"))
_RESOLUTION = 1e-15  # relative; a difference this small is rounding of the file's numbers


def plausible_notices(part: Part) -> list[str]:
    """Return a word on every column with numbers of an unusual size."""
    known = columns_of(part.source.quantity)
    judged = {
        name: known[name]
        for name in part.frame.columns
        if name in known and not known[name].is_text and known[name].usual != _ANYTHING
    }
    if not judged:
        return []
    counting = part.frame.lazy().select(_is_odd(c).sum() for c in judged.values())
    counts = counting.collect(engine="streaming").row(0, named=True)
    notices = []
    for name, column in judged.items():
        if counts[name]:
            odd = part.frame[name].abs().filter(part.frame.select(_is_odd(column)).to_series())
            notices.append(
                f"{part.source.file} column '{part.headers.get(name, name)}' of unusual size in "
                f"{counts[name]} of {part.frame.height} rows, {_range(odd, column)}; "
                "is the unit right?"
            )
    return notices


def _is_odd(column: Column) -> pl.Expr:
    low, high = column.usual
    size = pl.col(column.name).abs()
    return ((size > high) | ((size < low) & (size > 0.0))).alias(column.name)


def zero_overdrive_dropped(part: Part, notices: list[str]) -> Part:
    """Leave out delays at no overdrive: noise alone sets them, so they follow no law."""
    if part.source.quantity != "delay":
        return part
    fixed = {name: pl.lit(value) for name, value in part.fixed.items()}
    columns = {name: pl.col(name) for name in part.frame.columns} | fixed
    if "overdrive" in columns:
        zero = columns["overdrive"] == 0.0
    else:
        offset = columns.get("offset", pl.lit(0.0))
        level = columns["vdiff"]
        zero = (level - offset).abs() <= _RESOLUTION * level.abs()
    resolved_by_chance = zero & columns["delay"].is_not_null()
    kept = part.frame.filter(~resolved_by_chance)
    dropped = part.frame.height - kept.height
    if not dropped:
        return part
    notices.append(
        f"{part.source.file} rows at zero overdrive not used: {dropped}; noise alone decides there"
    )
    source = dataclasses.replace(part.source, rows=kept.height)
    return dataclasses.replace(part, frame=kept, source=source)


def _range(values: pl.Series, column: Column) -> str:
    ends = dict.fromkeys((_shown(values.min(), column), _shown(values.max(), column)))
    return "..".join(ends)


def _shown(value: object, column: Column) -> str:
    number = float(str(value))
    return format_celsius(number) if column.unit == "K" else format_si(number, column.unit)
