"""Corners by name -> their conditions, and which processes a cell knows."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterable, Mapping, Sequence

import polars as pl

from behavgen.nearest import did_you_mean
from behavgen.project import Corner
from behavgen.quantities import CORNER
from behavgen.tables.faults import TableFaults
from behavgen.tables.parts import Part
from behavgen.tables.readers import LINE

__all__ = ["check_processes", "processes_in_order", "with_corner_resolved"]

_SAME = 1e-9  # relative: what a corner and a column say about one condition must agree


def with_corner_resolved(part: Part, corners: Sequence[Corner], faults: TableFaults) -> Part:
    """Replace a corner, in a column or fixed, by the conditions that it stands for.

    Parameters
    ----------
    part : Part
        Rows of one file.
    corners : sequence of Corner
        Those of the project.
    faults : TableFaults
        Takes unknown corners, and conditions of which corner and column disagree.
    """
    known = {corner.name: _conditions(corner) for corner in corners}
    if CORNER.name in part.fixed:
        given = known[str(part.fixed[CORNER.name])]
        frame = part.frame.with_columns(
            pl.lit(value).alias(f"@{name}") for name, value in given.items()
        )
    elif CORNER.name in part.frame.columns:
        if not _check_corners(part, known, faults):
            return part
        frame = part.frame.with_columns(
            _from_corner(name, known).alias(f"@{name}")
            for name in _conditions_of_any(known.values())
        ).drop(CORNER.name)
    else:
        return part
    fixed = {name: value for name, value in part.fixed.items() if name != CORNER.name}
    return _merged(dataclasses.replace(part, frame=frame, fixed=fixed), faults)


def check_processes(part: Part, allowed: Sequence[str], faults: TableFaults) -> None:
    """Note every process that the project does not list, if it lists any."""
    if not allowed or "process" not in part.frame.columns:
        return
    strange = part.frame.filter(~pl.col("process").is_in([*allowed]))
    rows = (
        (line, f"no process '{name}'{did_you_mean(name, allowed)}")
        for line, name in strange.select(LINE, "process").iter_rows()
    )
    header = part.headers.get("process") or part.headers.get(CORNER.name, "process")
    faults.add_rows(
        part.source.file, header, rows, strange.height, f"processes: {', '.join(allowed)}"
    )


def processes_in_order(parts: Iterable[Part], declared: Mapping[str, int]) -> tuple[str, ...]:
    """Return the processes that tables name: by declared code, else as they first appear.

    Where no table names any, what they say holds for all declared processes.
    """
    seen: dict[str, None] = {}
    for part in parts:
        if "process" in part.fixed:
            seen.setdefault(str(part.fixed["process"]))
        elif "process" in part.frame.columns:
            seen.update(dict.fromkeys(part.frame["process"].unique(maintain_order=True)))
    if not declared:
        return tuple(seen)
    by_code = sorted(declared, key=lambda name: declared[name])
    return tuple(name for name in by_code if name in seen or not seen)


def _conditions(corner: Corner) -> dict[str, str | float]:
    """Return what a corner fixes, under our column names."""
    given = {
        "process": corner.process,
        "vdd": corner.vdd_v,
        "temp": corner.temperature_k,
        "vcm": corner.vcm_v,
    }
    return {name: value for name, value in given.items() if value is not None}


def _conditions_of_any(corners: Iterable[Mapping[str, str | float]]) -> list[str]:
    return list(dict.fromkeys(name for corner in corners for name in corner))


def _from_corner(name: str, known: Mapping[str, Mapping[str, str | float]]) -> pl.Expr:
    meaning = {corner: given[name] for corner, given in known.items() if name in given}
    kind = pl.String if name == "process" else pl.Float64
    return pl.col(CORNER.name).replace_strict(
        [*meaning], [*meaning.values()], default=None, return_dtype=kind
    )


def _check_corners(part: Part, known: Mapping[str, object], faults: TableFaults) -> bool:
    strange = part.frame.filter(~pl.col(CORNER.name).is_in([*known]))
    rows = (
        (line, f"no corner '{name}'{did_you_mean(name, known)}")
        for line, name in strange.select(LINE, CORNER.name).iter_rows()
    )
    allowed = f"corners: {', '.join(known)}" if known else "describe it under [corners.NAME]"
    header = part.headers[CORNER.name]
    faults.add_rows(part.source.file, header, rows, strange.height, allowed)
    return strange.is_empty()


def _merged(part: Part, faults: TableFaults) -> Part:
    """Let a corner's conditions (``@vdd``) and what the table says (``vdd``) fill each other."""
    frame, fixed = part.frame, dict(part.fixed)
    for given in [name for name in frame.columns if name.startswith("@") and name != LINE]:
        name = given.removeprefix("@")
        if name in fixed:
            frame = frame.with_columns(pl.lit(fixed.pop(name)).alias(name))
        if name not in frame.columns:
            frame = frame.rename({given: name})
            _check_complete(part, frame, name, faults)
            continue
        same = (
            pl.col(given) == pl.col(name)
            if name == "process"
            else (pl.col(given) - pl.col(name)).abs() <= _SAME * pl.col(name).abs()
        )
        unlike = frame.filter(~same.fill_null(value=True))
        rows = (
            (line, f"the corner says {ours}, the table {theirs}")
            for line, ours, theirs in unlike.select(LINE, given, name).iter_rows()
        )
        header = part.headers.get(name, name)
        faults.add_rows(part.source.file, header, rows, unlike.height, "one and the same (SI)")
        frame = frame.with_columns(pl.coalesce(given, name).alias(name)).drop(given)
    return dataclasses.replace(part, frame=frame, fixed=fixed)


def _check_complete(part: Part, frame: pl.DataFrame, name: str, faults: TableFaults) -> None:
    """Note rows whose corner leaves open what other corners of the table fix."""
    open_rows = frame.filter(pl.col(name).is_null())[LINE]
    rows = ((line, f"the corner of this row does not fix {name}, others do") for line in open_rows)
    faults.add_rows(
        part.source.file,
        part.headers.get(CORNER.name, CORNER.name),
        rows,
        open_rows.len(),
        f"{name} in all corners of the table or in none",
    )
