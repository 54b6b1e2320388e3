"""Delay over overdrive: one overview of all conditions, then small charts by condition."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from behavgen.bands import Bands
from behavgen.model import ComparatorModel, Condition
from behavgen.reference import Reference
from behavgen.report.axes import PlotAxis, spanning
from behavgen.report.charts import Band, Chart, Dots, Layer, Line, Panel, draw_chart
from behavgen.report.conditions import (
    FIELD_TITLES,
    FIELDS,
    condition_words,
    field_text,
    reference_keywords,
    shared_words,
    varying_fields,
)
from behavgen.report.curves import Curve, drawn_overdrives, rms, worst
from behavgen.report.figure import (
    Figure,
    Multiples,
    series_legend,
    series_marker,
    series_style,
)
from behavgen.report.numbers import percent_text, si_text
from behavgen.report.overlay import (
    CurveBand,
    band_legend,
    drawn_curves,
    overlay_legend,
    overlay_panels,
    spotlights,
)

__all__ = ["delay_alone", "delay_multiples", "delay_overview"]

_MOST_PANELS = 12
_MOST_SERIES = 6
_Panels = dict[tuple[object, ...], list[Curve]]


def delay_overview(
    members: Sequence[Curve], middle: Condition, bands: Bands | None = None
) -> Figure:
    """Return the chart of all conditions with the model's errors under it.

    With `bands` the conditions that stand out have their intervals.
    """
    drawn = drawn_curves(members)
    chosen = spotlights(drawn, middle, [float(c.model_y.max()) for c in drawn])
    x = _overdrive_axis(*_overdrive_span(drawn), most_ticks=7)
    low, high = spanning([0.0], *(c.y for c in drawn), *(c.line_y for c in drawn))
    y = PlotAxis(label="Delay", unit="s", low=max(low, 0.0), high=high)
    chart = Chart(
        name="delay",
        title="Delay over overdrive",
        description=f"{len(drawn)} conditions: markers are table rows, lines the emitted model; "
        f"below, the model's error in per cent, at most {percent_text(worst(drawn))}.",
        panels=overlay_panels(drawn, chosen, x, y, "Model against table", _curve_band(bands)),
    )
    legend = overlay_legend(drawn, chosen) + ((band_legend(bands.level),) if bands else ())
    return Figure(svg=draw_chart(chart), caption=_overview_caption(members, drawn), legend=legend)


def _curve_band(bands: Bands | None) -> CurveBand | None:
    if bands is None:
        return None
    return lambda curve: bands.delay(curve.line_x, **reference_keywords(curve.condition))


def _overview_caption(members: Sequence[Curve], drawn: Sequence[Curve]) -> str:
    rows = sum(len(c.x) for c in members)
    text = (
        f"Markers: table rows ({rows}); lines: the emitted model. Below: model against table, "
        f"{percent_text(rms(members))} rms, {percent_text(worst(members))} at worst."
    )
    if len(drawn) < len(members):
        text += f" Of {len(members)} conditions the {len(drawn)} that fit worst are drawn."
    shared = shared_words([c.condition for c in members])
    return f"{text} All at {shared}." if shared else text


def delay_alone(
    model: ComparatorModel, reference: Reference, middle: Condition, bands: Bands | None = None
) -> Figure:
    """Return the emitted delay at the middle of the range, for a model without table points."""
    overdrive_v = drawn_overdrives(model)
    delay_s = reference.delay(overdrive_v)
    low, high = spanning(overdrive_v, logarithmic=True)
    x = _overdrive_axis(low, high, most_ticks=7)
    y = PlotAxis(label="Delay", unit="s", low=0.0, high=spanning(delay_s)[1])
    interval = bands.delay(overdrive_v) if bands else None
    under = (Band(x=overdrive_v, low=interval.low, high=interval.high),) if interval else ()
    chart = Chart(
        name="delay", title="Delay over overdrive of the emitted model",
        description=f"At most {si_text(float(delay_s[0]), 's')}, at least "
        f"{si_text(float(delay_s[-1]), 's')}.",
        panels=(Panel(x=x, y=y, layers=(*under, Line(x=overdrive_v, y=delay_s)), height=250.0),),
    )  # fmt: skip
    where = condition_words(middle)
    caption = "The model file carries no table rows to compare with. The line is the emitted model"
    return Figure(svg=draw_chart(chart), caption=f"{caption}{', at ' + where if where else ''}.",
                  legend=(band_legend(bands.level),) if bands else ())  # fmt: skip


def delay_multiples(members: Sequence[Curve]) -> Multiples | None:
    """Return small charts, each for a few conditions; None when the overview shows it all."""
    conditions = [c.condition for c in members]
    names = varying_fields(conditions)
    if len(members) < 5 or not names:
        return None
    series = _series_field(conditions, names)
    panels = _grouped(members, tuple(name for name in names if name != series))
    shown = _worst_panels(panels)
    levels = _levels(conditions, series)[:_MOST_SERIES]
    axes = _small_axes(shown)
    alike = len({y.high for _, y in axes}) == 1
    figures = tuple(
        _small_figure(i, group, series, levels, axes[i]) for i, group in enumerate(shown)
    )
    legend = tuple(
        series_legend(i, f"{FIELD_TITLES[series]} {field_text(c, series)}")
        for i, c in enumerate(_samples(conditions, series, levels))
    )
    note = _note(len(panels), len(shown), alike=alike)
    return Multiples(figures=figures, legend=legend, note=note)


def _series_field(conditions: Sequence[Condition], names: Sequence[str]) -> str:
    """Return what tells the lines of a small chart apart: the supply if it may, else what fits."""
    counts = {name: len(_levels(conditions, name)) for name in names}
    fitting = [name for name in names if counts[name] <= _MOST_SERIES]
    if "vdd_v" in fitting:
        return "vdd_v"
    return max(fitting, key=lambda n: counts[n]) if fitting else min(names, key=lambda n: counts[n])


def _levels(conditions: Sequence[Condition], name: str) -> list[object]:
    found = dict.fromkeys(getattr(c, name) for c in conditions)
    if name == "process":
        return list(found)
    return sorted(found, key=lambda v: -np.inf if v is None else v)


def _samples(
    conditions: Sequence[Condition], name: str, levels: Sequence[object]
) -> list[Condition]:
    return [next(c for c in conditions if getattr(c, name) == level) for level in levels]


def _grouped(members: Sequence[Curve], names: tuple[str, ...]) -> _Panels:
    panels: _Panels = {}
    for curve in members:
        key = tuple(getattr(curve.condition, name) for name in FIELDS if name in names)
        panels.setdefault(key, []).append(curve)
    return panels


def _worst_panels(panels: _Panels) -> list[list[Curve]]:
    """Return the groups to draw, in the table's order; of many those that fit worst."""
    ranked = sorted(panels.values(), key=lambda group: -np.nan_to_num(worst(group), nan=-1.0))
    kept = {id(group) for group in ranked[:_MOST_PANELS]}
    return [group for group in panels.values() if id(group) in kept]


def _note(panels: int, shown: int, *, alike: bool) -> str:
    note = "Each small chart holds one combination of the remaining conditions"
    note += ", all on the same axes." if alike else "; mind that their delay axes differ."
    if shown < panels:
        note += f" Of {panels} combinations the {shown} that fit worst are drawn."
    return note


def _small_axes(groups: Sequence[Sequence[Curve]]) -> list[tuple[PlotAxis, PlotAxis]]:
    """Return one pair of axes a chart; all alike unless that would flatten the fast ones."""
    tops = [max(float(max(c.y.max(), c.line_y.max())) for c in group) for group in groups]
    common = max(tops) < 3.0 * min(tops)
    x = _overdrive_axis(*_overdrive_span([c for g in groups for c in g]), most_ticks=3)
    return [
        (x, PlotAxis(label="Delay", unit="s", low=0.0,
                     high=1.06 * (max(tops) if common else top), most_ticks=4))
        for top in tops
    ]  # fmt: skip


def _small_figure(
    number: int,
    group: Sequence[Curve],
    series: str,
    levels: Sequence[object],
    axes: tuple[PlotAxis, PlotAxis],
) -> Figure:
    layers: list[Layer] = []
    for curve in group:
        if getattr(curve.condition, series) not in levels:
            continue
        i = levels.index(getattr(curve.condition, series))
        title = condition_words(curve.condition)
        layers.append(Line(x=curve.line_x, y=curve.line_y, style=series_style(i), title=title))
        layers.append(Dots(x=curve.x, y=curve.y, marker=series_marker(i), style=series_style(i)))
    words = condition_words(group[0].condition, [n for n in FIELDS if n != series])
    chart = Chart(
        name=f"delay-{number}", title=f"Delay over overdrive, {words}",
        description=f"{len(group)} conditions, worst error {percent_text(worst(group))}.",
        panels=(Panel(x=axes[0], y=axes[1], layers=tuple(layers), height=130.0),),
        width=240.0, left=42.0,
    )  # fmt: skip
    detail = f"worst {percent_text(worst(group))}"
    return Figure(svg=draw_chart(chart), caption=words, detail=detail)


def _overdrive_span(members: Sequence[Curve]) -> tuple[float, float]:
    return spanning(*(c.x for c in members), logarithmic=True)


def _overdrive_axis(low: float, high: float, most_ticks: int) -> PlotAxis:
    return PlotAxis(label="Overdrive", unit="V", low=low, high=high, logarithmic=True,
                    most_ticks=most_ticks)  # fmt: skip
