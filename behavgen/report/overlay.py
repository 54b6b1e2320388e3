"""All conditions of a quantity in one chart, a few of them in the spotlight.

Up to four conditions are drawn in full. Of more, the one that fits worst, the
slowest, the fastest and the one nearest the middle of the range stand out and
the others stay in the background, so that thirty conditions remain legible.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.bands import Band as Interval
from behavgen.model import Condition
from behavgen.report.axes import PlotAxis, symmetric
from behavgen.report.charts import Band, Dots, Layer, Line, Panel, swatch
from behavgen.report.conditions import condition_words, varying_fields
from behavgen.report.curves import Curve, worst
from behavgen.report.figure import LegendEntry, series_legend, series_marker, series_style
from behavgen.report.numbers import percent_text

__all__ = [
    "MOST_DRAWN",
    "CurveBand",
    "Spotlight",
    "band_legend",
    "drawn_curves",
    "overlay_legend",
    "overlay_panels",
    "spotlights",
]

Floats = npt.NDArray[np.float64]

MOST_DRAWN = 48
"""More conditions than this in one chart are neither legible nor small."""
_MOST_IN_FULL = 4

CurveBand = Callable[[Curve], Interval]
"""Returns the interval of the emitted model along a curve's line."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Spotlight:
    """A condition that stands out and why; no role when all are drawn in full."""

    role: str
    curve: Curve


def drawn_curves(members: Sequence[Curve]) -> tuple[Curve, ...]:
    """Return the conditions to draw: all, or those that fit worst."""
    if len(members) <= MOST_DRAWN:
        return tuple(members)
    return tuple(sorted(members, key=_badness, reverse=True)[:MOST_DRAWN])


def spotlights(
    members: Sequence[Curve],
    middle: Condition,
    slowness: Sequence[float],
    ends: tuple[str, str] = ("slowest", "fastest"),
) -> tuple[Spotlight, ...]:
    """Return the conditions that stand out.

    Parameters
    ----------
    members : sequence of Curve
    middle : Condition
        Middle of the characterised range.
    slowness : sequence of float
        One number a member; the larger, the slower.
    ends : tuple of str
        What to call the largest and the smallest of these.
    """
    if len(members) <= _MOST_IN_FULL:
        return tuple(Spotlight(role="", curve=c) for c in members)
    index = range(len(members))
    distances = _distances([c.condition for c in members], middle)
    wanted = (
        ("fits worst", max(index, key=lambda i: _badness(members[i]))),
        (ends[0], max(index, key=lambda i: slowness[i])),
        (ends[1], min(index, key=lambda i: slowness[i])),
        ("nearest the middle", min(index, key=lambda i: distances[i])),
    )
    chosen: dict[int, list[str]] = {}
    for role, i in wanted:
        chosen.setdefault(i, []).append(role)
    return tuple(Spotlight(role=", ".join(r), curve=members[i]) for i, r in chosen.items())


def overlay_panels(
    members: Sequence[Curve],
    chosen: Sequence[Spotlight],
    x: PlotAxis,
    y: PlotAxis,
    error_label: str,
    band: CurveBand | None = None,
) -> tuple[Panel, Panel]:
    """Return the panel of the quantity and the panel of the model's errors in per cent.

    With `band` the interval of each condition that stands out lies under its curve.
    """
    front = {id(s.curve) for s in chosen}
    back = [c for c in members if id(c) not in front]
    low, high = symmetric(*(100.0 * c.error for c in members))
    error = PlotAxis(label=error_label, unit="%", low=low, high=high, most_ticks=5)
    under = [_band_layer(s.curve, band) for s in chosen] if band else []
    return (
        Panel(x=x, y=y, layers=(*under, *_curve_layers(back, chosen)), height=280.0),
        Panel(x=x, y=error, layers=_residual_layers(back, chosen), height=104.0, zero_line=True),
    )


def overlay_legend(
    members: Sequence[Curve], chosen: Sequence[Spotlight]
) -> tuple[LegendEntry, ...]:
    """Return what the markers and lines stand for, each with its worst error."""
    names = varying_fields([c.condition for c in members])
    entries = [series_legend(i, _legend_text(s, names)) for i, s in enumerate(chosen)]
    others = len(members) - len(chosen)
    if others:
        sample = swatch("faint", "speck")
        entries.append(LegendEntry(sample=sample, text=f"the other {others} conditions"))
    return tuple(entries)


def band_legend(level: float) -> LegendEntry:
    """Return what the shading stands for."""
    text = f"where the model's curve may lie, {percent_text(level)}"
    return LegendEntry(sample=swatch("band-sample"), text=text)


def _band_layer(curve: Curve, band: CurveBand) -> Band:
    interval = band(curve)
    return Band(x=curve.line_x, low=interval.low, high=interval.high)


def _legend_text(spotlight: Spotlight, names: tuple[str, ...]) -> str:
    words = condition_words(spotlight.curve.condition, names)
    error = worst([spotlight.curve])
    parts = [
        f"{spotlight.role}:" if spotlight.role and words else spotlight.role,
        words or ("" if spotlight.role else "table and model"),
        f"(up to {percent_text(error)} off)" if np.isfinite(error) else "",
    ]
    return " ".join(part for part in parts if part)


def _curve_layers(back: Sequence[Curve], chosen: Sequence[Spotlight]) -> tuple[Layer, ...]:
    layers: list[Layer] = []
    for curve in back:
        title = condition_words(curve.condition)
        layers.append(Line(x=curve.line_x, y=curve.line_y, style="faint", title=title))
    layers.extend(_background_dots(back, [c.y for c in back]))
    for i, spotlight in enumerate(chosen):
        curve, style = spotlight.curve, series_style(i)
        title = condition_words(curve.condition)
        layers.append(Line(x=curve.line_x, y=curve.line_y, style=style, title=title))
        layers.append(Dots(x=curve.x, y=curve.y, marker=series_marker(i), style=style, title=title))
    return tuple(layers)


def _residual_layers(back: Sequence[Curve], chosen: Sequence[Spotlight]) -> tuple[Layer, ...]:
    layers: list[Layer] = list(_background_dots(back, [100.0 * c.error for c in back]))
    for i, spotlight in enumerate(chosen):
        curve, title = spotlight.curve, condition_words(spotlight.curve.condition)
        layers.append(Dots(x=curve.x, y=100.0 * curve.error, marker=series_marker(i),
                           style=series_style(i), title=title))  # fmt: skip
    return tuple(layers)


def _background_dots(back: Sequence[Curve], values: Sequence[Floats]) -> tuple[Dots, ...]:
    if not back:
        return ()
    x, y = np.concatenate([c.x for c in back]), np.concatenate(values)
    near = np.lexsort((y, x))  # neighbours after each other make a shorter drawing
    return (Dots(x=x[near], y=y[near], marker="speck", style="faint"),)


def _badness(curve: Curve) -> float:
    error = worst([curve])
    return error if np.isfinite(error) else -1.0


def _distances(conditions: Sequence[Condition], middle: Condition) -> list[float]:
    """Return distances from the middle, each condition in units of its spread."""
    total = np.zeros(len(conditions))
    for name in ("vdd_v", "temperature_k", "vcm_v"):
        centre = getattr(middle, name)
        values = [getattr(c, name) for c in conditions]
        if centre is None or None in values:
            continue
        spread = max(values) - min(values)
        total += np.abs(np.array(values) - centre) / spread if spread > 0.0 else 0.0
    total += [float(bool(middle.process) and c.process != middle.process) for c in conditions]
    return [float(v) for v in total]
