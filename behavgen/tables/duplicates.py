"""Rows alike in every declared column: most likely one measurement counted twice."""

from __future__ import annotations

import functools
import operator
from collections.abc import Sequence

import polars as pl

from behavgen.tables.faults import TableFaults
from behavgen.tables.parts import Part
from behavgen.tables.readers import LINE

__all__ = ["check_duplicates"]

_FILE = "@file"
_HASH = "@hash"


def check_duplicates(parts: Sequence[Part], faults: TableFaults) -> None:
    """Note every row that repeats an earlier one, in whatever file of the same form.

    Rows in the order of a sweep repeat none. In others hashes find the candidates,
    since nearly always there are none; equality decides.

    Parameters
    ----------
    parts : sequence of Part
        All of one quantity and one form.
    faults : TableFaults
        Takes what is wrong.
    """
    if len(parts) == 1 and _only_grows(parts[0].frame):
        return
    names = sorted({name for part in parts for name in (*part.frame.columns, *part.fixed)})
    names.remove(LINE)
    frames = [_widened(part, names) for part in parts]
    hashes = pl.concat([frame.select(_hash(names)).collect(engine="streaming") for frame in frames])
    if hashes[_HASH].n_unique() == hashes.height:
        return
    suspect = hashes[_HASH].is_duplicated()
    offset = 0
    rows = []
    for index, (frame, part) in enumerate(zip(frames, parts, strict=True)):
        here = suspect.slice(offset, part.frame.height)
        rows.append(frame.with_columns(pl.lit(index).alias(_FILE)).collect().filter(here))
        offset += part.frame.height
    _note_repeats(pl.concat(rows), names, parts, faults)


def _only_grows(frame: pl.DataFrame) -> bool:
    """Tell whether each row comes after the one before it, compared column by column."""
    grows = pl.lit(value=False)
    for name in reversed([name for name in frame.columns if name != LINE]):
        here, before = pl.col(name), pl.col(name).shift(1)
        grows = (here > before) | ((here == before) & grows)
    test = grows.fill_null(value=False).slice(1).all()
    return bool(frame.lazy().select(test).collect().item())


def _widened(part: Part, names: Sequence[str]) -> pl.LazyFrame:
    """Return a part with all columns that any part has, constant ones included."""
    columns = [
        pl.col(name) if name in part.frame.columns else pl.lit(part.fixed.get(name)).alias(name)
        for name in names
    ]
    return part.frame.lazy().select(LINE, *columns)


def _hash(names: Sequence[str]) -> pl.Expr:
    hashes = (pl.col(name).hash(seed) for seed, name in enumerate(names))
    return functools.reduce(operator.add, hashes).alias(_HASH)


def _note_repeats(
    rows: pl.DataFrame, names: Sequence[str], parts: Sequence[Part], faults: TableFaults
) -> None:
    first = rows.group_by(names, maintain_order=True).agg(
        pl.col(LINE).first().alias("first"), pl.col(_FILE).first().alias("first_file")
    )
    later = rows.join(first, on=names, nulls_equal=True, maintain_order="left").filter(
        (pl.col(LINE) != pl.col("first")) | (pl.col(_FILE) != pl.col("first_file"))
    )
    for index, part in enumerate(parts):
        here = later.filter(pl.col(_FILE) == index)
        repeats = (
            (line, f"repeats row {line_before} of {parts[file_before].source.file}")
            for line, line_before, file_before in here.select(
                LINE, "first", "first_file"
            ).iter_rows()
        )
        allowed = "each measurement once; a column that tells the two apart may be missing"
        faults.add_rows(part.source.file, "", repeats, here.height, allowed)
