"""The metastable window: how wide the unresolved input interval is after a time."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from behavgen.bands import Bands
from behavgen.model import ComparatorModel, Condition
from behavgen.reference import Reference
from behavgen.report.axes import PlotAxis, spanning
from behavgen.report.charts import Band, Chart, Line, Panel, draw_chart
from behavgen.report.conditions import condition_words, reference_keywords, shared_words
from behavgen.report.curves import Curve, drawn_overdrives, rms, worst
from behavgen.report.figure import Figure
from behavgen.report.numbers import percent_text
from behavgen.report.overlay import (
    CurveBand,
    band_legend,
    drawn_curves,
    overlay_legend,
    overlay_panels,
    spotlights,
)

Floats = npt.NDArray[np.float64]

__all__ = ["window_figure", "window_from_delay"]


def window_figure(
    members: Sequence[Curve], middle: Condition, bands: Bands | None = None
) -> Figure:
    """Return table and model over the resolve time, with the errors in time under them.

    With `bands` the conditions that stand out have their intervals.
    """
    drawn = drawn_curves(members)
    chosen = spotlights(drawn, middle, [float(c.x.max()) for c in drawn])
    x = _time_axis(*(c.x for c in drawn))
    y = _window_axis(*(c.y for c in drawn), *(c.line_y for c in drawn))
    chart = Chart(
        name="window", title="Unresolved window over resolve time",
        description=f"{len(drawn)} conditions: markers are table rows, lines the emitted model.",
        panels=overlay_panels(drawn, chosen, x, y, "Model against table, in time",
                              _curve_band(bands)),
    )  # fmt: skip
    caption = (
        "Width of the input interval that is still unresolved at a time after the decision edge: "
        "table rows and twice the overdrive whose delay in the emitted model is that time. "
        "Below: by how much the model reaches each window too late; "
        f"{percent_text(rms(members))} rms, {percent_text(worst(members))} at worst."
    )
    shared = shared_words([c.condition for c in members])
    caption += f" All at {shared}." if shared else ""
    legend = overlay_legend(drawn, chosen) + ((band_legend(bands.level),) if bands else ())
    return Figure(svg=draw_chart(chart), caption=caption, legend=legend)


def _curve_band(bands: Bands | None) -> CurveBand | None:
    if bands is None:
        return None
    return lambda curve: bands.window(curve.line_x, **reference_keywords(curve.condition))


def window_from_delay(
    model: ComparatorModel, reference: Reference, middle: Condition, bands: Bands | None = None
) -> Figure:
    """Return the window that the delay alone implies, at the middle of the range."""
    overdrive = drawn_overdrives(model)[::-1]
    time_s = reference.delay(overdrive)
    x, y = _time_axis(time_s), _window_axis(2.0 * overdrive)
    where = condition_words(middle)
    interval = bands.window(time_s) if bands else None
    under = (Band(x=time_s, low=interval.low, high=interval.high),) if interval else ()
    chart = Chart(
        name="window", title="Unresolved window over resolve time, from the delay alone",
        description="No window table; the line is the emitted delay read the other way.",
        panels=(Panel(x=x, y=y, layers=(*under, Line(x=time_s, y=2.0 * overdrive)), height=250.0),),
    )  # fmt: skip
    caption = "No window table was given. The line is the emitted delay read the other way"
    return Figure(svg=draw_chart(chart), caption=f"{caption}{', at ' + where if where else ''}.",
                  legend=(band_legend(bands.level),) if bands else ())  # fmt: skip


def _time_axis(*times_s: Floats) -> PlotAxis:
    low, high = spanning(*times_s)
    return PlotAxis(label="Time after the decision edge", unit="s", low=low, high=high)


def _window_axis(*windows_v: Floats) -> PlotAxis:
    low, high = spanning(*windows_v, logarithmic=True)
    return PlotAxis(label="Unresolved window", unit="V", low=low, high=high, logarithmic=True)
