"""A first project file: guessed from the headers of tables, or a small example to fill in."""

from __future__ import annotations

import json
import os
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from behavgen.identifiers import identifier_fault
from behavgen.quantities import CONDITIONS, QUANTITIES, columns_of
from behavgen.tables.guess import Guess, guess_quantity
from behavgen.units import unit_of_header

__all__ = ["starter_project"]

_CELL_NAME = "comparator"
_GUESSED = "  # guessed"

_HEAD = """\
# behavgen project: which tables describe which comparator.
# All paths are relative to this file. Run "behavgen tables" to see what is understood.

[project]
out = "build"  # where results go
"""

_CELL = """
[cells.{name}]  # also the name of the emitted module{name_note}
description = ""  # a few words for data sheets
decides_on = "rising"{mark}; clock edge that decides: "rising" or "falling"
in_reset = "high"{mark}; outputs between decisions: "high", "low", "mid" or "hold"
when_unresolved = "x"  # an undecided output: "x", a "coin" toss, or "hold"
"""

_EXAMPLE_TABLE = """
# One entry for each table, in any order; what no table tells is not modelled.
[[cells.comparator.tables]]
quantity = "delay"  # {quantities}
file = "delay.csv"  # .csv, .parquet or .xlsx; "run_*.csv" takes several
columns.overdrive = "vod_mV"  # our name = the file's header; its unit is read from it
columns.delay = "delay_ps"
columns.vdd = "vdd_V"  # conditions, where the table has them: vdd, temp, vcm, process
columns.temp = "temp_C"
at.vcm = 0.6  # a condition that is the same in the whole file
measured = "clock 50 % to outputs separated by half the supply"

# Such a delay.csv might begin like this (invented numbers):
#
#   vod_mV,vdd_V,temp_C,delay_ps
#   0.1,1.0,27,310
#   1,1.0,27,240
#   10,1.0,27,170
#
# Other settings of a table:
#   where.circuit = "A2"          keep only the rows with this value in the column "circuit"
#   units.delay = "ps"            the unit, where the header does not carry it
#   failed = ["failed", "nan"]    cells that mark a failed run: such rows are dropped and counted
"""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Candidate:
    """One file of a starter: its path as written, its headers, and what they seem to mean."""

    path: str
    headers: tuple[str, ...]
    guess: Guess | None


def starter_project(files: Sequence[Path], folder: Path) -> str:
    """Return the text of a first project file.

    Parameters
    ----------
    files : sequence of Path
        Tables to guess from; none: a small example to fill in.
    folder : Path
        Where the project file will stand; paths in it are relative to that.

    Returns
    -------
    str
        TOML; every guess is marked.

    Raises
    ------
    TableError
        With every file whose headers cannot be read.
    """
    if not files:
        quantities = ", ".join(QUANTITIES)
        cell = _CELL.format(name=_CELL_NAME, name_note="", mark="  #").replace("#;", "#")
        return _HEAD + cell + _EXAMPLE_TABLE.format(quantities=quantities)
    candidates = _candidates(files, folder)
    shared = _shared_conditions(candidates)
    name = _cell_name(files)
    cell = _CELL.format(name=name, name_note=";" + _GUESSED[3:], mark=_GUESSED)
    entries = [_entry(name, candidate, shared) for candidate in candidates]
    return "\n".join([_HEAD + _defaults(shared) + cell, *entries])


def _candidates(files: Sequence[Path], folder: Path) -> list[_Candidate]:
    from behavgen.tables.faults import TableFaults  # noqa: PLC0415
    from behavgen.tables.readers import open_table  # noqa: PLC0415  (polars loads slowly)

    faults = TableFaults()
    candidates = []
    for file in files:
        path = _relative(file, folder)
        if not file.is_file():
            faults.add(path, "no such file")
        elif table := open_table(file, path, faults):
            guess = guess_quantity(table.headers)
            candidates.append(_Candidate(path=path, headers=table.headers, guess=guess))
    faults.raise_if_any()
    return candidates


def _shared_conditions(candidates: Sequence[_Candidate]) -> dict[str, str]:
    """Return the conditions that have the same header in all files that have them at all."""
    headers: dict[str, set[str]] = {}
    for candidate in candidates:
        columns = candidate.guess.columns if candidate.guess else {}
        for condition in CONDITIONS:
            if condition.name in columns:
                headers.setdefault(condition.name, set()).add(columns[condition.name])
    return {name: found.pop() for name, found in headers.items() if len(found) == 1}


def _cell_name(files: Sequence[Path]) -> str:
    folder = files[0].resolve().parent.name
    return _CELL_NAME if identifier_fault(folder) else folder


def _defaults(shared: Mapping[str, str]) -> str:
    if not shared:
        return ""
    lines = [f"columns.{name} = {_text(header)}{_GUESSED}" for name, header in shared.items()]
    return "\n".join(["", "[defaults]  # shared by all tables that have these columns", *lines, ""])


def _entry(cell: str, candidate: _Candidate, shared: Mapping[str, str]) -> str:
    if candidate.guess is None:
        return (
            f"# {candidate.path} was not understood. Its headers: {', '.join(candidate.headers)}\n"
            f"# [[cells.{cell}.tables]]\n"
            f'# quantity = ""  # one of {", ".join(QUANTITIES)}\n'
            f"# file = {_text(candidate.path)}\n"
        )
    guess = candidate.guess
    lines = [
        f"[[cells.{cell}.tables]]",
        f"quantity = {_text(guess.quantity)}{_GUESSED}",
        f"file = {_text(candidate.path)}",
        *(
            f"columns.{name} = {_text(header)}{_GUESSED}{_unit_note(guess.quantity, name, header)}"
            for name, header in guess.columns.items()
            if shared.get(name) != header
        ),
    ]
    if unused := [header for header in candidate.headers if header not in guess.columns.values()]:
        lines.append(f"# not used: {', '.join(unused)}")
    if guess.quantity in ("delay", "window"):
        lines.append(
            'measured = ""  # from where to where, in your words; alike for delay and window'
        )
    return "\n".join([*lines, ""])


def _unit_note(quantity: str, name: str, header: str) -> str:
    """Say which unit is assumed where a header carries none."""
    column = columns_of(quantity)[name]
    if column.is_text or column.unit == "1" or unit_of_header(header, column.unit) is not None:
        return ""
    assumed = "degC" if column.unit == "K" else column.unit
    return f' in {assumed}; else say units.{name} = "..."'


def _relative(file: Path, folder: Path) -> str:
    return Path(os.path.relpath(file.resolve(), folder.resolve())).as_posix()


def _text(value: str) -> str:
    """Write a TOML basic string; its escapes are those of JSON."""
    return json.dumps(value, ensure_ascii=False)
