"""Charts as SVG text: panels one above the other, with lines, bands and markers.

Colours and line weights are classes of the page's style sheet, so that a chart
follows the reader's light or dark theme and prints well. A marker is one
zero-length or closed stroke of a single path, which keeps a thousand table
points near ten kilobytes.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from html import escape

import numpy as np
import numpy.typing as npt

from behavgen.report.axes import PlotAxis, Tick, axis_title, ticks

__all__ = ["MARKERS", "Band", "Chart", "Dots", "Layer", "Line", "Panel", "draw_chart", "swatch"]

Floats = npt.NDArray[np.float64]

MARKERS = {
    "dot": (0.0, 0.0, "h0"),
    "square": (-2.5, -2.5, "h5v5h-5z"),
    "triangle": (0.0, -3.5, "l3 6h-6z"),
    "diamond": (0.0, -3.5, "l3.5 3.5-3.5 3.5-3.5-3.5z"),
    "cross": (-2.5, -2.5, "l5 5m0-5l-5 5m0-5"),
    "plus": (-3.0, 0.0, "h6m-3-3v6m-3-3"),
    "speck": (0.0, 0.0, "h0"),
}
"""Name to where the stroke starts, seen from the point, and how it goes on and back there."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Line:
    """A curve; `style` names the colour class, `title` is shown by a resting pointer."""

    x: Floats
    y: Floats
    style: str = "s0"
    title: str = ""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Dots:
    """Markers, with vertical error bars where `low` and `high` are given."""

    x: Floats
    y: Floats
    marker: str = "dot"
    style: str = "s0"
    low: Floats | None = None
    high: Floats | None = None
    title: str = ""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Band:
    """The area between two curves."""

    x: Floats
    low: Floats
    high: Floats
    style: str = "band"


Layer = Line | Dots | Band


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Panel:
    """One plot area; layers are drawn in order, the last on top."""

    x: PlotAxis
    y: PlotAxis
    layers: tuple[Layer, ...]
    height: float
    zero_line: bool = False


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Chart:
    """Panels that share their x axis.

    Parameters
    ----------
    name : str
        Unique in the page; letters, digits and dashes.
    title, description : str
        For readers who hear the page.
    width, left, bottom : float
        Of the whole drawing and of the margins for labels, in its own units.
    """

    name: str
    title: str
    description: str
    panels: tuple[Panel, ...]
    width: float = 480.0
    left: float = 54.0
    bottom: float = 46.0


_INVISIBLE = 0.12
"""Of a unit of the drawing."""
_RIGHT = 14.0
_ABOVE = 24.0


def draw_chart(chart: Chart) -> str:
    """Return the chart as one ``<svg>`` element."""
    top, parts = 0.0, []
    for panel in chart.panels:
        last = panel is chart.panels[-1]
        parts.append(_draw_panel(chart, panel, top + _ABOVE, with_x=last))
        top += _ABOVE + panel.height
    height = top + chart.bottom
    name = chart.name
    return (
        f'<svg class="chart" viewBox="0 0 {_n(chart.width)} {_n(height)}" role="img" '
        f'aria-labelledby="{name}-t {name}-d"><title id="{name}-t">{escape(chart.title)}</title>'
        f'<desc id="{name}-d">{escape(chart.description)}</desc>{"".join(parts)}</svg>'
    )


def swatch(style: str, marker: str = "", line: bool = True) -> str:
    """Return a small sample of a series for a legend."""
    parts = [f'<path class="line {style}" d="M1 7H27"/>'] if line else []
    if marker:
        d = _marks(marker, [14.0], [7.0])
        parts.append(f'<path class="{_marker_class(marker)} {style}" d="{d}"/>')
    return f'<svg class="swatch" viewBox="0 0 28 14" aria-hidden="true">{"".join(parts)}</svg>'


def _draw_panel(chart: Chart, panel: Panel, top: float, *, with_x: bool) -> str:
    width, height = chart.width - chart.left - _RIGHT, panel.height
    grid = _grid(panel, width, height)
    drawn = "".join(_draw_layer(panel, layer, width, height) for layer in panel.layers)
    frame = (
        f'<svg x="{_n(chart.left)}" y="{_n(top)}" width="{_n(width)}" height="{_n(height)}">'
        f"{grid}{drawn}</svg>"
    )
    labels = _y_labels(panel, chart.left, top)
    if with_x:
        labels += _x_labels(panel, chart.left, width, top + height)
    return frame + labels


def _grid(panel: Panel, width: float, height: float) -> str:
    across = [f"M{_n(x * width)} 0V{_n(height)}" for x in _labelled_places(panel.x)]
    along = [f"M0 {_n(height - y * height)}H{_n(width)}" for y in _labelled_places(panel.y)]
    text = f'<path class="grid" d="{"".join(across + along)}"/>'
    if panel.zero_line:
        zero = height - float(panel.y.place(0.0)) * height
        text += f'<path class="zero" d="M0 {_n(zero)}H{_n(width)}"/>'
    return text


def _labelled_places(axis: PlotAxis) -> Iterable[float]:
    return (float(axis.place(tick.value)) for tick in ticks(axis) if tick.label)


def _y_labels(panel: Panel, left: float, top: float) -> str:
    def text(tick: Tick) -> str:
        y = top + panel.height * (1.0 - float(panel.y.place(tick.value)))
        return _text("tick", left - 7, y + 4, tick.label)

    title = _text("axis", left, top - 9, axis_title(panel.y))
    return '<g class="y">' + title + "".join(text(t) for t in ticks(panel.y) if t.label) + "</g>"


def _x_labels(panel: Panel, left: float, width: float, base: float) -> str:
    marks, texts = [], []
    for tick in ticks(panel.x):
        x = left + width * float(panel.x.place(tick.value))
        marks.append(f"M{_n(x)} {_n(base)}v{5 if tick.label else 3}")
        if tick.label:
            texts.append(_text("tick", x, base + 18, tick.label))
    title = _text("axis", left + 0.5 * width, base + 37, axis_title(panel.x))
    axis = f'<path class="base" d="M{_n(left)} {_n(base)}h{_n(width)}{"".join(marks)}"/>'
    return f'<g class="x">{axis}{"".join(texts)}{title}</g>'


def _text(style: str, x: float, y: float, words: str) -> str:
    return f'<text class="{style}" x="{_n(x)}" y="{_n(y)}">{escape(words)}</text>'


def _draw_layer(panel: Panel, layer: Layer, width: float, height: float) -> str:
    if isinstance(layer, Band):
        return _draw_band(panel, layer, width, height)
    if isinstance(layer, Line):
        d = _polyline(*_pixels(panel, layer.x, layer.y, width, height))
        return _path(f"line {layer.style}", d, layer.title)
    return _draw_dots(panel, layer, width, height)


def _draw_band(panel: Panel, band: Band, width: float, height: float) -> str:
    low = _pixels(panel, band.x, band.low, width, height)
    high = _pixels(panel, band.x, band.high, width, height)
    x, y = np.concatenate([low[0], high[0][::-1]]), np.concatenate([low[1], high[1][::-1]])
    return _path(band.style, _polyline(x, y) + "z")


def _draw_dots(panel: Panel, dots: Dots, width: float, height: float) -> str:
    text = ""
    if dots.low is not None and dots.high is not None:
        x, low = _pixels(panel, dots.x, dots.low, width, height)
        _, high = _pixels(panel, dots.x, dots.high, width, height)
        bars = (f"M{_n(a)} {_n(b)}V{_n(c)}" for a, b, c in zip(x, low, high, strict=True))
        text = _path(f"bar {dots.style}", "".join(bars))
    x, y = _pixels(panel, dots.x, dots.y, width, height)
    style = f"{_marker_class(dots.marker)} {dots.style}"
    return text + _path(style, _marks(dots.marker, x, y), dots.title)


def _marks(marker: str, x: Iterable[float], y: Iterable[float]) -> str:
    """Draw markers one after the other, each by its step from the last in tenths of a unit."""
    across, along, stroke = MARKERS[marker]
    steps, last = [], (0, 0)
    for a, b in zip(x, y, strict=True):
        start = round(10 * (a + across)), round(10 * (b + along))
        dx, dy = _n(0.1 * (start[0] - last[0])), _n(0.1 * (start[1] - last[1]))
        steps.append(f"m{dx}{'' if dy.startswith('-') else ' '}{dy}{stroke}")
        last = start
    return "".join(steps)


def _marker_class(marker: str) -> str:
    return {"dot": "dot", "speck": "speck", "cross": "open", "plus": "open"}.get(marker, "solid")


def _pixels(
    panel: Panel, x: Floats, y: Floats, width: float, height: float
) -> tuple[Floats, Floats]:
    """Return places in the plot area of the finite points; far outside is just outside."""
    finite = np.isfinite(x) & np.isfinite(y)
    across = np.clip(panel.x.place(x[finite]), -0.5, 1.5) * width
    along = (1.0 - np.clip(panel.y.place(y[finite]), -0.5, 1.5)) * height
    return across, along


def _polyline(x: Floats, y: Floats) -> str:
    if len(x) == 0:
        return ""
    return "M" + "L".join(f"{_n(x[i])} {_n(y[i])}" for i in _corners(x, y))


def _corners(x: Floats, y: Floats) -> list[int]:
    """Return the points of a line without which it would look different."""
    kept = [0]
    for end in range(2, len(x)):
        start = kept[-1]
        dx, dy = x[end] - x[start], y[end] - y[start]
        inside = slice(start + 1, end)
        distance = dx * (y[inside] - y[start]) - dy * (x[inside] - x[start])
        if np.max(np.abs(distance)) > _INVISIBLE * np.hypot(dx, dy):
            kept.append(end - 1)
    return kept if len(x) == 1 else [*kept, len(x) - 1]


def _path(style: str, d: str, title: str = "") -> str:
    if not d:
        return ""
    inner = f"<title>{escape(title)}</title>" if title else ""
    return f'<path class="{style}" d="{d}">{inner}</path>'


def _n(value: float) -> str:
    """Write a place with a tenth of a unit."""
    text = f"{value:.1f}"
    text = text[:-2] if text.endswith(".0") else text
    return "0" if text == "-0" else text
