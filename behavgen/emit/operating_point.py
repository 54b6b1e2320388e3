"""How conditions reach the surfaces in SystemVerilog: bounds, coordinates, statements.

Each condition is clamped to the box of the quantity's own variant and mapped
to the coordinate of the polynomial. Quantities with the same axis and the
same box share a coordinate.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from behavgen.emit.literals import real_literal
from behavgen.emit.surface_text import CONDITIONS, ProcessValue, process_value
from behavgen.model import Axis, Box, Process, Range, Surface

__all__ = ["QUANTISED", "Coordinate", "OperatingPoint", "Span"]

QUANTISED = {"temperature_k": "temperature_k", "vdd_v": "vdd_v", "vcm_v": "vcm_v"}
"""Variables that hold the quantised conditions."""

_STEMS = {"temperature_k": "x_t", "vdd_v": "x_v", "vcm_v": "x_c"}
_SHAPES = {"plain": "{}", "reciprocal": "1.0 / {}", "reciprocal_square": "1.0 / ({0} * {0})"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Span:
    """A range as the text writes it: literals, or variables that the process sets."""

    low: str
    high: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Coordinate:
    """A coordinate shared by the quantities with the same axis and box.

    Parameters
    ----------
    name : str
        Its variable.
    condition : str
        As in `Axis.condition`.
    statements : tuple of str
        Clamp and map.
    """

    name: str
    condition: str
    statements: tuple[str, ...]


@dataclass(slots=True, kw_only=True)
class OperatingPoint:
    """All coordinates and bounds of one model, collected surface by surface.

    Parameters
    ----------
    processes : tuple of Process
        Those of the model, in its order.
    """

    processes: tuple[Process, ...]
    coordinates: dict[object, Coordinate] = field(default_factory=dict)
    process_values: list[ProcessValue] = field(default_factory=list)
    _bounds: dict[object, Span] = field(default_factory=dict)

    def names(self, quantity: str, surface: Surface) -> Mapping[Axis, str]:
        """Return the variable of each of a surface's axes; new ones are named after the quantity."""
        boxes = [surface.variant(process.name).box for process in self.processes]
        return {axis: self._coordinate(quantity, axis, boxes).name for axis in surface.axes}

    def of(self, condition: str) -> tuple[Coordinate, ...]:
        """Return the coordinates of one condition."""
        return tuple(c for c in self.coordinates.values() if c.condition == condition)

    def span(self, stem: str, ranges: tuple[Range, ...]) -> Span:
        """Return how to write a range, one a process; variables are named after `stem`."""
        key = (stem.split("_")[1], ranges)
        if key not in self._bounds:
            low, low_values = process_value(f"{stem}_low", (r.low for r in ranges))
            high, high_values = process_value(f"{stem}_high", (r.high for r in ranges))
            self._bounds[key] = Span(low=low, high=high)
            self.process_values += [*low_values, *high_values]
        return self._bounds[key]

    def _coordinate(self, quantity: str, axis: Axis, boxes: list[Box]) -> Coordinate:
        ranges = tuple(getattr(box, axis.condition) for box in boxes)
        key = (axis, ranges)
        if key not in self.coordinates:
            stem = _STEMS[axis.condition]
            name = f"{stem}_{quantity}" if self.of(axis.condition) else stem
            span = self.span(name, ranges)
            self.coordinates[key] = Coordinate(
                name=name, condition=axis.condition, statements=_statements(name, axis, span)
            )
        return self.coordinates[key]


def _statements(name: str, axis: Axis, span: Span) -> tuple[str, ...]:
    value = QUANTISED[axis.condition]
    clamped = f"{value} > {span.low} ? ({value} < {span.high} ? {value} : {span.high}) : {span.low}"
    shaped = _SHAPES[axis.shape].format("clamped")
    if axis.centre:
        sign, centre = ("+", -axis.centre) if axis.centre < 0.0 else ("-", axis.centre)
        shaped = f"({shaped} {sign} {real_literal(centre)})"
    return (
        f"clamped = {clamped};",
        f"{name} = {shaped} / {real_literal(axis.half_range)};",
    )


assert set(QUANTISED) == set(CONDITIONS)
