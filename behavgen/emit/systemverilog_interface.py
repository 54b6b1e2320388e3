"""Head, parameters and ports of the SystemVerilog module, as finished lines."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Sequence

from behavgen.emit.literals import bits_literal, comment_text, real_literal
from behavgen.emit.module_parameters import ModuleParameter, module_parameters
from behavgen.emit.provenance import header_lines, header_sections
from behavgen.model import Cell, ComparatorModel

__all__ = ["WIDTH", "head", "parameter_lines", "port_lines"]

WIDTH = 100
"""Columns of an emitted line."""

_TYPES = {"real": "real", "integer": "int", "word": "bit [63:0]"}


def head(model: ComparatorModel, *, what: str = "") -> tuple[str, ...]:
    """Return the comment at the top of the file; `what` says more of what it is."""
    cell = model.cell
    title = comment_text(f"{cell.name}: {cell.description or 'clocked comparator'}")
    purpose = (
        "Behavioural model of a clocked comparator for event-driven simulation with real numbers. "
        f"It decides on the {cell.decides_on} edge of {cell.pins.clk}. "
        "It states its own time unit; "
        "IEEE 1800-2017, 3.14.2, then wants one for every other module of a design too."
    )
    lines = [title, "", *textwrap.wrap(purpose, WIDTH - 3), ""]
    lines += [*textwrap.wrap(what, WIDTH - 3), ""] if what else []
    lines += header_lines(header_sections(model, left_out=_left_out(model)), WIDTH - 3)
    return tuple(f"// {line}".rstrip() for line in lines)


def _left_out(model: ComparatorModel) -> tuple[str, ...]:
    """Return effects without equations: pins carry no current, and some need delays."""
    return ("kickback", *(("aperture", "reset") if model.delay is None else ()))


def parameter_lines(model: ComparatorModel) -> tuple[str, ...]:
    """Return the parameter declarations, aligned, each with unit, range and meaning."""
    parameters = module_parameters(model)
    declared = [
        (f"parameter {_TYPES[p.kind]}", p.name, f"= {_default(p)}", _meaning(p)) for p in parameters
    ]
    return _aligned(declared)


def port_lines(cell: Cell, *, analogue: str = "real") -> tuple[str, ...]:
    """Return the port declarations, aligned; `analogue` is the type of inputs and supply."""
    pins, resting = cell.pins, _resting(cell)
    ports = [
        ("input", analogue, pins.inp, "V, taken at the decision edge"),
        ("input", analogue, pins.inn, "V"),
        ("input", "logic", pins.clk, f"decides on its {cell.decides_on} edge"),
        ("output", "logic", pins.outp, f"the decision; {resting}"),
        ("output", "logic", pins.outn, f"its complement; {resting}"),
        ("input", analogue, pins.vdd, "V"),
        ("output", "logic", pins.unresolved,
         "1 from the end of an unresolved decision to the next ready"),
        ("input", "logic", pins.enable, "off unless it is 1"),
    ]  # fmt: skip
    present = [(direction, kind, name, comment) for direction, kind, name, comment in ports if name]
    return _aligned(present)


def _aligned(rows: Sequence[tuple[str, str, str, str]]) -> tuple[str, ...]:
    """Align three columns and a comment; separate by commas."""
    first, second = (max(len(row[column]) for row in rows) for column in (0, 1))
    third = max(len(row[2]) for row in rows) + 1
    lines: list[str] = []
    for number, (one, two, three, comment) in enumerate(rows, start=1):
        comma = "," if number < len(rows) else ""
        code = f"{one:<{first}} {two:<{second}} {three + comma:<{third}}"
        lines += _with_comment(code, comment)
    return tuple(lines)


def _with_comment(code: str, comment: str) -> Iterable[str]:
    room = WIDTH - 2 - len(code) - 5
    first, *more = textwrap.wrap(comment, room) or [""]
    yield f"{code}  // {first}".rstrip() if first else code.rstrip()
    for line in more:
        yield f"{' ' * len(code)}  // {line}"


def _default(parameter: ModuleParameter) -> str:
    if parameter.kind == "real":
        return real_literal(parameter.default)
    if parameter.kind == "word":
        return "64'd0" if parameter.default == 0 else bits_literal(int(parameter.default))
    return str(int(parameter.default))


def _meaning(parameter: ModuleParameter) -> str:
    """Write ``unit, meaning: legal codes``."""
    if not parameter.effective:
        return f"does nothing: {parameter.reason}"
    what = f"{parameter.unit}, {parameter.description}" if parameter.unit else parameter.description
    return comment_text(f"{what}: {parameter.allowed}" if parameter.codes else what)


def _resting(cell: Cell) -> str:
    states = {
        "high": "1 in reset",
        "low": "0 in reset",
        "mid": "x in reset",
        "hold": "held in reset",
    }
    return states[cell.in_reset]
