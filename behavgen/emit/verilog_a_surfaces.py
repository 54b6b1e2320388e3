"""Surfaces as Verilog-A statements: a polynomial for each process, in nested form.

Verilog-A, as free compilers take it, has neither arrays nor array parameters:
coefficients stand in the statements.
"""

from __future__ import annotations

import re
import textwrap
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.emit.literals import comment_text, real_literal
from behavgen.emit.surface_text import horner_text
from behavgen.formulas.polynomial import dense_coefficients
from behavgen.model import Axis, Process, Range, Surface, Variant

__all__ = ["Statements", "declaration", "surface_statements", "wrapped"]

_WIDTH = 90
_TIE = "\0"
_COORDINATES = {"temperature_k": "x_temperature", "vdd_v": "x_supply", "vcm_v": "x_common"}
_VARIABLES = {"temperature_k": "temperature_k", "vdd_v": "supply_v", "vcm_v": "vcm_v"}
_SHAPES = {
    "plain": "{}",
    "reciprocal": "1.0 / {}",
    "reciprocal_square": "1.0 / pow({}, 2.0)",
    "reciprocal_fourth": "1.0 / pow({}, 4.0)",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Statements:
    """Statements that give values to variables.

    Parameters
    ----------
    variables : tuple of str
        The values, in order.
    coordinates : tuple of str
        Further variables that the statements need.
    conditions : frozenset of str
        Conditions that the values depend on, as in `Axis.condition`.
    lines : tuple of str
        At most 92 columns wide.
    """

    variables: tuple[str, ...]
    coordinates: tuple[str, ...]
    conditions: frozenset[str]
    lines: tuple[str, ...]


def declaration(names: Iterable[str]) -> tuple[str, ...]:
    """Return lines that declare real variables; none for no names."""
    text = ", ".join(names)
    return wrapped(f"real {text};") if text else ()


def wrapped(statement: str) -> tuple[str, ...]:
    """Break a statement into lines of at most 90 columns, after commas and before + and -."""
    tied = re.sub(r" ([*/]) ", rf"{_TIE}\1{_TIE}", statement)
    tied = re.sub(r"([-+=]) ", rf"\1{_TIE}", tied)
    lines = textwrap.wrap(
        tied, _WIDTH, subsequent_indent="  ", break_long_words=False, break_on_hyphens=False
    )
    return tuple(line.replace(_TIE, " ") for line in lines)


def surface_statements(
    surfaces: Mapping[str, Surface], processes: tuple[Process, ...]
) -> Statements:
    """Return statements that evaluate surfaces at the present condition.

    Parameters
    ----------
    surfaces : mapping
        Name of a variable and the surface that gives it its value, in order.
    processes : tuple of Process
        Those of the model; the parameter PROCESS picks one by its code.
    """
    branches = [list(_branch(surfaces, process)) for process in processes]
    if all(branch == branches[0] for branch in branches):
        lines = branches[0]
    else:
        lines = list(_choice(processes, branches))
    conditions = {axis.condition for surface in surfaces.values() for axis in surface.axes}
    return Statements(
        variables=tuple(surfaces),
        coordinates=tuple(text for name, text in _COORDINATES.items() if name in conditions),
        conditions=frozenset(conditions),
        lines=tuple(lines),
    )


def _choice(processes: tuple[Process, ...], branches: list[list[str]]) -> Iterator[str]:
    """Choose by if and else: a compiler in wide use breaks down on some case statements."""
    for process, branch in zip(processes, branches, strict=True):
        first, last = process is processes[0], process is processes[-1]
        test = "" if last else f"if (PROCESS == {process.code}) "
        yield f"{'' if first else 'end else '}{test}begin  // {comment_text(process.name)}"
        yield from (f"  {line}" for line in branch)
    yield "end"


def _branch(surfaces: Mapping[str, Surface], process: Process) -> Iterator[str]:
    present: tuple[str, ...] = ()
    for name, surface in surfaces.items():
        variant = surface.variant(process.name)
        coordinates = tuple(_coordinate(axis, variant) for axis in surface.axes)
        if coordinates and coordinates != present:
            for coordinate in coordinates:
                yield from wrapped(coordinate)
            present = coordinates
        polynomial = _polynomial(
            dense_coefficients(surface.exponents, variant.coefficients),
            tuple(_COORDINATES[axis.condition] for axis in surface.axes),
        )
        value = f"exp({polynomial})" if surface.transform == "log" else polynomial
        yield from wrapped(f"{name} = {value};")


def _coordinate(axis: Axis, variant: Variant) -> str:
    span: Range = getattr(variant.box, axis.condition)
    limits = f"{real_literal(span.low)}, {real_literal(span.high)}"
    clamped = f"clamp({_VARIABLES[axis.condition]}, {limits})"
    shaped = _SHAPES[axis.shape].format(clamped)
    centre, half_range = real_literal(axis.centre), real_literal(axis.half_range)
    return f"{_COORDINATES[axis.condition]} = ({shaped} - {centre}) / {half_range};"


def _polynomial(dense: npt.NDArray[np.float64], coordinates: tuple[str, ...]) -> str:
    """Write a polynomial by Horner's rule, nested with the last coordinate outermost."""
    if not coordinates:
        return real_literal(float(dense))
    inner = {
        power: _polynomial(dense[..., power], coordinates[:-1])
        for power in range(dense.shape[-1])
        if dense[..., power].any()
    }
    highest = max(inner, default=0)
    if highest > 0 and " " in inner[highest]:
        inner[highest] = f"({inner[highest]})"
    return horner_text(inner, coordinates[-1])
