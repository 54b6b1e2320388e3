"""Curves of the data sheet, each with data, the emitted model and its band."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from behavgen.bands import Bands
from behavgen.model import ComparatorModel
from behavgen.reference import Reference
from behavgen.report.aperture_figures import aperture_figure
from behavgen.report.axes import PlotAxis, spanning
from behavgen.report.charts import Band, Chart, Dots, Layer, Line, Panel, draw_chart
from behavgen.report.conditions import condition_words, middle_condition, reference_keywords
from behavgen.report.curves import Curve, curves, drawn_overdrives
from behavgen.report.delay_figures import delay_alone, delay_overview
from behavgen.report.energy_figures import energy_figure
from behavgen.report.figure import (
    Figure,
    Multiples,
    series_legend,
    series_marker,
    series_style,
)
from behavgen.report.memory_figures import memory_figure
from behavgen.report.noise_figures import s_curve_multiples, standardised_s_curves
from behavgen.report.numbers import si_text
from behavgen.report.offset_figures import offset_multiples
from behavgen.report.overlay import band_legend, spotlights
from behavgen.report.window_figures import window_figure, window_from_delay

__all__ = ["Curves", "Traffic", "drawn_curves_of"]

Floats = npt.NDArray[np.float64]

_LINE_POINTS = 81
_LONGEST_LOG10_S = 20.0
"""The chart of failures ends where its slowest curve has reached this many decades of seconds."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Traffic:
    """What is decided on: inputs uniform over a span in V about the trip point, at a rate in Hz."""

    span_v: float
    clock_hz: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Curves:
    """Figures of the page; None where there is nothing to draw."""

    delay: Figure | None
    window: Figure | None
    failures: Figure | None
    noise: Figure | None
    s_curves: Multiples | None
    offset: Multiples | None
    memory: Figure | None
    aperture: Figure | None
    energy: Figure | None


def drawn_curves_of(model: ComparatorModel, bands: Bands, traffic: Traffic | None) -> Curves:
    """Return all figures; `traffic` is what the mean time between failures is drawn for."""
    reference, middle = bands.reference, middle_condition(model)
    known = bands if model.delay and (model.delay.scatter or model.delay.lack_of_fit) else None
    noise = curves(model, reference, "noise") if model.noise else ()
    return Curves(
        delay=_delay(model, reference, known),
        window=_window(model, reference, known),
        failures=_failures(model, bands, traffic) if model.delay and traffic else None,
        noise=standardised_s_curves(noise, reference),
        s_curves=s_curve_multiples(noise, reference, bands),
        offset=offset_multiples(model),
        memory=memory_figure(model, reference, middle),
        aperture=aperture_figure(model),
        energy=energy_figure(model, reference, middle),
    )


def _delay(model: ComparatorModel, reference: Reference, bands: Bands | None) -> Figure | None:
    if model.delay is None:
        return None
    members, middle = curves(model, reference, "delay"), middle_condition(model)
    if members:
        return delay_overview(members, middle, bands)
    return delay_alone(model, reference, middle, bands)


def _window(model: ComparatorModel, reference: Reference, bands: Bands | None) -> Figure | None:
    if model.delay is None:
        return None
    members, middle = curves(model, reference, "window"), middle_condition(model)
    if members:
        return window_figure(members, middle, bands)
    return window_from_delay(model, reference, middle, bands)


def _failures(model: ComparatorModel, bands: Bands, traffic: Traffic) -> Figure:
    """Return the mean time between unresolved decisions over the time given to resolve."""
    found = _tabulated_windows(model, bands.reference)
    chosen = spotlights(found, middle_condition(model), [float(c.x.max()) for c in found])
    longest = max(_time_needed(s.curve, bands, traffic) for s in chosen)
    times_s = np.linspace(min(float(s.curve.x.min()) for s in chosen), longest, _LINE_POINTS)
    drawn = [_failure_layers(i, s.curve, times_s, bands, traffic) for i, s in enumerate(chosen)]
    chart = _failure_chart(
        times_s, [layer for layers in zip(*drawn, strict=True) for layer in layers], traffic
    )
    legend = [
        series_legend(i, _role_words(s.role, condition_words(s.curve.condition)))
        for i, s in enumerate(chosen)
    ]
    return Figure(svg=draw_chart(chart), caption=_failure_caption(traffic),
                  legend=(*legend, band_legend(bands.level)))  # fmt: skip


def _failure_layers(
    number: int, curve: Curve, times_s: Floats, bands: Bands, traffic: Traffic
) -> tuple[Layer, ...]:
    """Return band, line and markers of one condition."""
    style, keywords = series_style(number), reference_keywords(curve.condition)
    window = bands.log_window(times_s, **keywords)
    low, value, high = (
        _log10_wait_s(log_v / math.log(10.0), traffic)
        for log_v in (window.high, window.value, window.low)
    )
    tabulated = curve.x[: len(curve.y)]
    return (
        Band(x=times_s, low=low, high=high),
        Line(x=times_s, y=value, style=style, title=condition_words(curve.condition)),
        Dots(x=tabulated, y=_log10_wait_s(np.log10(curve.y), traffic),
             marker=series_marker(number), style=style),
    )  # fmt: skip


def _role_words(role: str, words: str) -> str:
    return ": ".join(part for part in (role, words) if part) or "table and model"


def _failure_chart(times_s: Floats, layers: Sequence[Layer], traffic: Traffic) -> Chart:
    start, end = spanning(times_s)
    x = PlotAxis(label="Time given to resolve", unit="s", low=start, high=end)
    low = -math.log10(traffic.clock_hz) - 0.5
    y = PlotAxis(label="Mean time between failures, log₁₀ of s", unit="1", low=low,
                 high=_LONGEST_LOG10_S, most_ticks=7)  # fmt: skip
    return Chart(
        name="failures", title="Mean time between failures over the time given to resolve",
        description="Lines are the emitted model, markers follow from tabulated windows.",
        panels=(Panel(x=x, y=y, layers=tuple(layers), height=280.0),),
    )  # fmt: skip


def _failure_caption(traffic: Traffic) -> str:
    return (
        "Mean time between unresolved decisions, for inputs uniform over "
        f"{si_text(traffic.span_v, 'V')} about the trip point and a clock of "
        f"{si_text(traffic.clock_hz, 'Hz')}: span over rate times window "
        "(H. J. M. Veendrick, 1980). Markers follow from table rows. A year is 7.5 on this axis, "
        "the age of the universe 17.6. Beyond the markers exponential regeneration is "
        "extrapolated."
    )


def _tabulated_windows(model: ComparatorModel, reference: Reference) -> tuple[Curve, ...]:
    """Return windows over times: from the window table, else from the delays, else the model's."""
    found = curves(model, reference, "window")
    if found:
        return found
    delays = curves(model, reference, "delay")
    if delays:
        return tuple(replace(c, x=c.y, y=2.0 * c.x) for c in delays)
    times_s = reference.delay(drawn_overdrives(model)[::-1])
    none = np.empty(0)
    return (
        Curve(condition=middle_condition(model), x=times_s, y=none, model_y=none, line_x=none,
              line_y=none, error=none, trials=np.empty(0, dtype=np.int64)),
    )  # fmt: skip


def _log10_wait_s(log10_window: Floats, traffic: Traffic) -> Floats:
    """Return ``log10(S / (f W))``, no window being wider than the span."""
    log10_span = math.log10(traffic.span_v)
    share = np.minimum(log10_window, log10_span) - log10_span
    wait: Floats = -share - math.log10(traffic.clock_hz)
    return wait


def _time_needed(curve: Curve, bands: Bands, traffic: Traffic) -> float:
    """Return the time at which the mean time between failures leaves the chart, s."""
    assert bands.model.delay is not None
    keywords = reference_keywords(curve.condition)
    # The law itself, not the model's delay, which a floor keeps finite.
    node_v = bands.model.delay.node_overdrive_v[0]
    node_s, tau_s = bands.reference.delay(node_v, **keywords), bands.tau(**keywords).value
    log10_half = math.log10(0.5 * traffic.span_v / traffic.clock_hz) - _LONGEST_LOG10_S
    return float(node_s + tau_s * (math.log(node_v) - log10_half * math.log(10.0)))
