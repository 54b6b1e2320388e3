"""Axes of charts: from physical values to places, and the ticks between."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.report.numbers import PREFIX, SIGMA, si_text, typographic

__all__ = ["PlotAxis", "Tick", "axis_title", "spanning", "symmetric", "ticks"]

Floats = npt.NDArray[np.float64]

_UNPREFIXED = ("", "1", "%", SIGMA)


@dataclass(frozen=True, slots=True, kw_only=True)
class PlotAxis:
    """What one axis shows and from where to where.

    Parameters
    ----------
    label : str
    unit : str
        SI unit, or ``"1"``, ``"%"``, sigma, which take no prefix.
    low, high : float
        Ends of the axis; positive where it is logarithmic.
    logarithmic : bool
    most_ticks : int
        Upper bound on labelled ticks.
    """

    label: str
    unit: str
    low: float
    high: float
    logarithmic: bool = False
    most_ticks: int = 6

    def place(self, values: npt.ArrayLike) -> Floats:
        """Return places along the axis, 0 at its low end and 1 at its high end."""
        array = np.asarray(values, dtype=float)
        if self.logarithmic:
            array = np.log(np.maximum(array, 1e-300))
            low, high = math.log(self.low), math.log(self.high)
        else:
            low, high = self.low, self.high
        place: Floats = (array - low) / (high - low)
        return place


@dataclass(frozen=True, slots=True, kw_only=True)
class Tick:
    """A mark on an axis; minor ticks have no label."""

    value: float
    label: str


def spanning(
    *values: npt.ArrayLike, logarithmic: bool = False, padding: float = 0.04
) -> tuple[float, float]:
    """Return ends of an axis that shows all finite values with some room around them."""
    array = np.concatenate([np.ravel(np.asarray(v, dtype=float)) for v in values])
    array = array[np.isfinite(array) & ((array > 0.0) | (not logarithmic))]
    if len(array) == 0:
        return (1.0, 10.0) if logarithmic else (0.0, 1.0)
    low, high = float(array.min()), float(array.max())
    if logarithmic:
        room = max((high / low) ** padding, 1.05)
        return low / room, high * room
    room = padding * (high - low) or 0.05 * abs(high) or 1.0
    return low - room, high + room


def symmetric(*values: npt.ArrayLike) -> tuple[float, float]:
    """Return ends of an axis around zero, for residuals."""
    low, high = spanning(*values, padding=0.0)
    reach = 1.15 * max(abs(low), abs(high))
    return -reach, reach


def ticks(axis: PlotAxis) -> tuple[Tick, ...]:
    """Return labelled and minor ticks inside the axis."""
    return _log_ticks(axis) if axis.logarithmic else _linear_ticks(axis)


def axis_title(axis: PlotAxis) -> str:
    """Return label and unit; a logarithmic axis has its units at the ticks."""
    if axis.logarithmic or axis.unit in ("", "1"):
        return axis.label
    return f"{axis.label} ({PREFIX[_axis_power(axis)]}{axis.unit})"


def _axis_power(axis: PlotAxis) -> int:
    if axis.unit in _UNPREFIXED:
        return 0
    largest = max(abs(axis.low), abs(axis.high))
    power = 3 * math.floor(math.log10(largest) / 3) if largest > 0.0 else 0
    return min(max(power, min(PREFIX)), max(PREFIX))


def _linear_ticks(axis: PlotAxis) -> tuple[Tick, ...]:
    scale = 10.0 ** _axis_power(axis)
    low, high = axis.low / scale, axis.high / scale
    step = _round_step((high - low) / axis.most_ticks)
    decimals = max(0, -math.floor(math.log10(step) + 1e-9))
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    return tuple(
        Tick(value=k * step * scale, label=typographic(f"{k * step + 0.0:.{decimals}f}"))
        for k in range(first, last + 1)
    )


def _round_step(raw: float) -> float:
    """Return the next 1, 2 or 5 times a power of ten."""
    decade = 10.0 ** math.floor(math.log10(raw))
    return next(f * decade for f in (1.0, 2.0, 5.0, 10.0) if f * decade >= raw * (1.0 - 1e-9))


def _log_ticks(axis: PlotAxis) -> tuple[Tick, ...]:
    first, last = math.floor(math.log10(axis.low)), math.ceil(math.log10(axis.high))
    stride = max(1, math.ceil(math.log10(axis.high / axis.low) / axis.most_ticks))
    labelled = (1, 2, 5) if axis.high / axis.low < 30.0 else (1,)
    found = []
    for power in range(first, last + 1):
        for factor in range(1, 10):
            value = float(f"{factor}e{power}")
            if not axis.low * (1.0 - 1e-9) <= value <= axis.high * (1.0 + 1e-9):
                continue
            shown = factor in labelled and power % stride == 0
            if stride > 1 and factor > 1:
                continue
            found.append(Tick(value=value, label=si_text(value, axis.unit) if shown else ""))
    return tuple(found)
