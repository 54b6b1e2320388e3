"""How the input's weight lies around the decision edge, and where the model samples."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from behavgen.model import ComparatorModel, CurvePoints
from behavgen.operating_point import evaluate, operating_point
from behavgen.report.axes import PlotAxis, spanning
from behavgen.report.charts import Chart, Dots, Layer, Line, Panel, draw_chart
from behavgen.report.conditions import (
    condition_words,
    reference_keywords,
    shared_words,
    varying_fields,
)
from behavgen.report.figure import (
    Figure,
    LegendEntry,
    series_legend,
    series_marker,
    series_style,
)
from behavgen.report.numbers import si_text

__all__ = ["aperture_figure"]

_MOST_SERIES = 6


def aperture_figure(model: ComparatorModel) -> Figure | None:
    """Return weights after a step over its time with the sampling instants; None without."""
    found = [p for p in model.points if p.quantity == "aperture" and p.x]
    if model.aperture is None or not found:
        return None
    shown = found[:_MOST_SERIES]
    centres = [_emitted_s(model, points)[0] for points in shown]
    low, high = spanning(*(p.x for p in shown), centres)
    x = PlotAxis(label="Step after the decision edge", unit="s", low=low, high=high)
    low, high = spanning([0.0, 1.0], *(p.y for p in shown))
    y = PlotAxis(label="Share of the input's weight after the step", unit="1", low=low, high=high)
    layers = [
        layer
        for i, points in enumerate(shown)
        for layer in _layers(i, points, centres[i], (y.low, y.high))
    ]
    chart = Chart(
        name="aperture", title="Weight of the input around the decision edge",
        description=f"{len(shown)} conditions: markers are table rows, upright lines where the "
        "emitted model samples its input.",
        panels=(Panel(x=x, y=y, layers=tuple(layers), height=230.0, zero_line=True),),
    )  # fmt: skip
    return Figure(svg=draw_chart(chart), caption=_caption(found, shown),
                  legend=_legend(model, shown))  # fmt: skip


def _emitted_s(model: ComparatorModel, points: CurvePoints) -> tuple[float, float]:
    """Return when the emitted model samples, and over what width the table weighs, s."""
    assert model.aperture is not None
    point = operating_point(model, (), reference_keywords(points.condition))
    centre, width = (
        float(evaluate(surface, point)[0])
        for surface in (model.aperture.centre, model.aperture.width)
    )
    return max(centre, 0.0), width


def _layers(
    number: int, points: CurvePoints, centre_s: float, ends: tuple[float, float]
) -> tuple[Layer, ...]:
    style, title = series_style(number), condition_words(points.condition)
    upright = Line(x=np.full(2, centre_s), y=np.array(ends), style=style, title=title)
    marker = series_marker(number)
    x, y = np.array(points.x), np.array(points.y)
    return (upright, Dots(x=x, y=y, marker=marker, style=style, title=title))


def _legend(model: ComparatorModel, shown: Sequence[CurvePoints]) -> tuple[LegendEntry, ...]:
    names = varying_fields([p.condition for p in shown])
    entries = []
    for i, points in enumerate(shown):
        centre_s, width_s = _emitted_s(model, points)
        sampled = f"sampled at {si_text(centre_s, 's')}, width {si_text(width_s, 's')}"
        words = condition_words(points.condition, names)
        entries.append(series_legend(i, f"{words}: {sampled}" if words else sampled))
    return tuple(entries)


def _caption(found: Sequence[CurvePoints], shown: Sequence[CurvePoints]) -> str:
    text = (
        "Share of the input's weight that lies after a step, over the time of the step. Upright "
        "lines: the mean of the weight, where the emitted model samples its input, at the edge "
        "where it lies before it. The width is that from 90 % to 10 %; it is reported and has no "
        "influence on decisions."
    )
    if len(shown) < len(found):
        text += f" Of {len(found)} conditions the first {len(shown)} are drawn."
    shared = shared_words([p.condition for p in found])
    return f"{text} All at {shared}." if shared else text
