"""How the trip point's shift in favour of the previous decision fades with the reset."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from behavgen.model import ComparatorModel, Condition, CurvePoints
from behavgen.reference import Reference
from behavgen.report.axes import PlotAxis, spanning
from behavgen.report.charts import Chart, Dots, draw_chart, swatch
from behavgen.report.conditions import reference_keywords, shared_words
from behavgen.report.curves import Curve, curves, rms, worst
from behavgen.report.figure import Figure, LegendEntry
from behavgen.report.numbers import percent_text, si_text
from behavgen.report.overlay import drawn_curves, overlay_legend, overlay_panels, spotlights

__all__ = ["memory_figure"]

Floats = npt.NDArray[np.float64]

_LINE_POINTS = 81
_ENDS = ("remembers most", "remembers least")


def memory_figure(model: ComparatorModel, reference: Reference, middle: Condition) -> Figure | None:
    """Return table and model over the reset time, errors under them; None without either."""
    members = curves(model, reference, "memory")
    if model.memory is None or not members:
        return None
    bounds = [p for p in model.points if p.quantity == "memory_at_least" and p.x]
    x_low, x_high = spanning(*(c.x for c in members), *(p.x for p in bounds))
    drawn = [_drawn(c, reference, max(x_low, 0.0), x_high) for c in drawn_curves(members)]
    chosen = spotlights(drawn, middle, [float(c.model_y.max()) for c in drawn], _ENDS)
    x = PlotAxis(label="Reset before the decision", unit="s", low=max(x_low, 0.0), high=x_high)
    low, high = spanning(*(c.y for c in drawn), *(p.y for p in bounds), logarithmic=True)
    y = PlotAxis(label="Shift of the trip point", unit="V", low=low, high=high, logarithmic=True)
    top, errors = overlay_panels(drawn, chosen, x, y, "Model against table")
    top = replace(top, layers=(*top.layers, *_bound_dots(bounds)))
    cap = si_text(model.memory.cap_v, "V")
    chart = Chart(
        name="memory", title="Shift of the trip point over the reset time",
        description=f"{len(drawn)} conditions: markers are table rows, lines the emitted model, "
        f"which never shifts by more than {cap}.",
        panels=(top, errors),
    )  # fmt: skip
    legend = overlay_legend(drawn, chosen)
    if bounds:
        sample = swatch("ink", "triangle", line=False)
        legend += (LegendEntry(sample=sample, text="the table says only: at least so much"),)
    return Figure(svg=draw_chart(chart), caption=_caption(members, cap), legend=legend)


def _drawn(curve: Curve, reference: Reference, low: float, high: float) -> Curve:
    """Return a curve whose line spans the whole axis, so that the cap is seen."""
    line_x: Floats = np.linspace(low, high, _LINE_POINTS)
    line_y = reference.memory_shift(line_x, **reference_keywords(curve.condition))
    return replace(curve, line_x=line_x, line_y=line_y)


def _bound_dots(bounds: list[CurvePoints]) -> tuple[Dots, ...]:
    if not bounds:
        return ()
    x, y = (np.concatenate([np.array(getattr(p, name)) for p in bounds]) for name in "xy")
    return (Dots(x=x, y=y, marker="triangle", style="ink"),)


def _caption(members: tuple[Curve, ...], cap: str) -> str:
    text = (
        "By how much the previous decision moves the trip point in its own favour, over the time "
        "from the reset edge to the decision edge. Markers: table rows; lines: the emitted model, "
        f"cut at {cap}, the largest shift that the table vouches for. Below: model against table, "
        f"{percent_text(rms(members))} rms, {percent_text(worst(members))} at worst."
    )
    shared = shared_words([c.condition for c in members])
    return f"{text} All at {shared}." if shared else text
