"""From conditions to the coordinates of polynomials, as SystemVerilog statements.

Each condition is clamped to the box of the quantity's own variant, then mapped
to the polynomial's coordinate. Quantities with the same axis and the same
boxes share a coordinate.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from behavgen.emit.literals import real_literal
from behavgen.emit.surface_text import ProcessValue, process_value
from behavgen.model import Axis, Process, Range, Surface

__all__ = ["Coordinate", "coordinate_names", "coordinates", "span_text"]

_STEMS = {"temperature_k": "x_t", "vdd_v": "x_v", "vcm_v": "x_c"}
_SHAPES = {
    "plain": "{}",
    "reciprocal": "1.0 / {}",
    "reciprocal_square": "1.0 / ({0} * {0})",
    "reciprocal_fourth": "1.0 / (({0} * {0}) * ({0} * {0}))",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Coordinate:
    """The coordinate of one axis for one set of boxes.

    Parameters
    ----------
    name : str
        Its variable.
    axis : Axis
    ranges : tuple of Range
        What the condition is clamped to, one a process.
    """

    name: str
    axis: Axis
    ranges: tuple[Range, ...]

    @property
    def process_values(self) -> tuple[ProcessValue, ...]:
        """Bounds that the process sets."""
        return span_text(self.name, self.ranges)[2]

    @property
    def statements(self) -> tuple[str, str]:
        """Clamp the quantised condition and map it; what is not a number goes to the low end."""
        low, high, _ = span_text(self.name, self.ranges)
        value, axis = self.axis.condition, self.axis
        shaped = _SHAPES[axis.shape].format("clamped")
        if axis.centre:
            sign = "+" if axis.centre < 0.0 else "-"
            shaped = f"({shaped} {sign} {real_literal(abs(axis.centre))})"
        return (
            f"clamped = {value} > {low} ? ({value} < {high} ? {value} : {high}) : {low};",
            f"{self.name} = {shaped} / {real_literal(axis.half_range)};",
        )


def span_text(stem: str, ranges: tuple[Range, ...]) -> tuple[str, str, tuple[ProcessValue, ...]]:
    """Return how to write the ends of a range that the process may set, and what that declares."""
    low, lows = process_value(f"{stem}_low", (span.low for span in ranges))
    high, highs = process_value(f"{stem}_high", (span.high for span in ranges))
    return low, high, (*lows, *highs)


def coordinates(
    surfaces: Mapping[str, Surface], processes: tuple[Process, ...]
) -> tuple[Coordinate, ...]:
    """Return all coordinates that surfaces need, named after the first quantity that needs them.

    Parameters
    ----------
    surfaces : mapping
        Name of a quantity and its surface.
    processes : tuple of Process
        Those of the model, in its order.
    """
    found: dict[tuple[Axis, tuple[Range, ...]], Coordinate] = {}
    for quantity, surface in surfaces.items():
        for axis in surface.axes:
            ranges = _ranges(surface, axis, processes)
            if (axis, ranges) in found:
                continue
            stem = _STEMS[axis.condition]
            taken = any(known.condition == axis.condition for known, _ in found)
            name = f"{stem}_{quantity}" if taken else stem
            found[axis, ranges] = Coordinate(name=name, axis=axis, ranges=ranges)
    return tuple(found.values())


def coordinate_names(
    surface: Surface, processes: tuple[Process, ...], known: tuple[Coordinate, ...]
) -> Mapping[Axis, str]:
    """Return the variable of each of a surface's axes."""
    names = {(coordinate.axis, coordinate.ranges): coordinate.name for coordinate in known}
    return {axis: names[axis, _ranges(surface, axis, processes)] for axis in surface.axes}


def _ranges(surface: Surface, axis: Axis, processes: tuple[Process, ...]) -> tuple[Range, ...]:
    return tuple(
        getattr(surface.variant(process.name).box, axis.condition) for process in processes
    )
