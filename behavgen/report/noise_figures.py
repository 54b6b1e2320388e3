"""S-curves: counted shares of ones with their intervals, beside the emitted model."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from statistics import NormalDist

import numpy as np
import numpy.typing as npt
from scipy.special import ndtr

from behavgen.bands import Bands
from behavgen.reference import Reference
from behavgen.report.axes import PlotAxis, spanning, symmetric
from behavgen.report.charts import Band, Chart, Dots, Layer, Line, Panel, draw_chart, swatch
from behavgen.report.conditions import condition_words, reference_keywords
from behavgen.report.curves import Curve
from behavgen.report.figure import (
    Figure,
    LegendEntry,
    Multiples,
    series_legend,
    series_marker,
    series_style,
)
from behavgen.report.numbers import SIGMA, si_text

__all__ = [
    "observed_sigmas",
    "s_curve_multiples",
    "score_interval",
    "standardised_s_curves",
]

Floats = npt.NDArray[np.float64]

_MOST_PANELS = 12
_MOST_SERIES = 6


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _SCurve:
    """A curve with the emitted trip point and sigma, and its levels in sigmas from the trip."""

    curve: Curve
    trip_v: float
    sigma_v: float
    z: Floats
    low: Floats
    high: Floats
    deviation: Floats


def observed_sigmas(members: Sequence[Curve]) -> float | None:
    """Return how far from the trip point decisions of both kinds were counted, in sigmas.

    The largest normal quantile of a counted share that is neither 0 nor 1;
    None when there is no such share.
    """
    shares = np.concatenate([c.y for c in members]) if members else np.empty(0)
    inner = shares[(shares > 0.0) & (shares < 1.0)]
    return max((abs(NormalDist().inv_cdf(float(p))) for p in inner), default=None)


def standardised_s_curves(members: Sequence[Curve], reference: Reference) -> Figure | None:
    """Return all conditions on one axis of sigmas; None for one condition or without noise."""
    found = _s_curves(members, reference)
    if len(found) < 2:
        return None
    low, high = spanning(*(s.z for s in found))
    label = "Input from the trip point, in sigmas of the model"
    x = PlotAxis(label=label, unit="1", low=low, high=high)
    z = np.linspace(low, high, 61)
    line = Line(x=z, y=np.asarray(ndtr(z)), style="ink", title="normal distribution")
    share, deviation = _standardised_layers(found)
    bottom, top = symmetric([-3.0, 3.0], *(s.deviation for s in found))
    label = "Deviation in standard errors"
    error = PlotAxis(label=label, unit="1", low=bottom, high=top, most_ticks=5)
    chart = Chart(
        name="noise", title="S-curves in units of sigma",
        description=f"Shares of ones at {len(found)} conditions against the normal distribution; "
        "below, deviations in binomial standard errors.",
        panels=(
            Panel(x=x, y=_share_axis(), layers=(line, *share), height=240.0),
            Panel(x=x, y=error, layers=deviation, height=100.0, zero_line=True),
        ),
    )  # fmt: skip
    return Figure(svg=draw_chart(chart), caption=_CAPTION, legend=_standardised_legend(found))


_CAPTION = (
    "Each level's distance from the emitted trip point in emitted sigmas, with 95 % score "
    "intervals of the counts. If noise is Gaussian and the model right, all fall on one curve and "
    "about 19 of 20 deviations stay within ±2."
)


def _standardised_layers(found: Sequence[_SCurve]) -> tuple[tuple[Layer, ...], tuple[Layer, ...]]:
    if len(found) > _MOST_SERIES:
        z = np.concatenate([s.z for s in found])
        share, error = (
            Dots(x=z, y=np.concatenate(values), marker="speck", style="s0")
            for values in ([s.curve.y for s in found], [s.deviation for s in found])
        )
        return (share,), (error,)
    shares, errors = [], []
    for i, s in enumerate(found):
        style, marker = series_style(i), series_marker(i)
        title = condition_words(s.curve.condition)
        shares.append(Dots(x=s.z, y=s.curve.y, low=s.low, high=s.high, marker=marker,
                           style=style, title=title))  # fmt: skip
        errors.append(Dots(x=s.z, y=s.deviation, marker=marker, style=style, title=title))
    return tuple(shares), tuple(errors)


def _standardised_legend(found: Sequence[_SCurve]) -> tuple[LegendEntry, ...]:
    model = LegendEntry(sample=swatch("ink"), text="normal distribution")
    if len(found) > _MOST_SERIES:
        levels = f"levels of {len(found)} conditions"
        return model, LegendEntry(sample=swatch("s0", "speck", line=False), text=levels)
    return model, *(
        LegendEntry(
            sample=swatch(series_style(i), series_marker(i), line=False),
            text=condition_words(s.curve.condition),
        )
        for i, s in enumerate(found)
    )


def s_curve_multiples(
    members: Sequence[Curve], reference: Reference, bands: Bands
) -> Multiples | None:
    """Return one small S-curve in volts for each condition; of many those that deviate most."""
    found = _s_curves(members, reference)
    if not found:
        return None
    ranked = sorted(found, key=lambda s: -float(np.max(np.abs(s.deviation))))
    kept = {id(s) for s in ranked[:_MOST_PANELS]}
    shown = [s for s in found if id(s) in kept]
    note = ""
    if len(shown) < len(found):
        note = f"Of {len(found)} conditions the {len(shown)} that deviate most are drawn."
    figures = tuple(_small_figure(i, s, bands) for i, s in enumerate(shown))
    legend = (
        series_legend(0, "share of ones with its 95 % interval; line: the emitted model"),
        LegendEntry(sample=swatch("band-sample"), text="where the model's curve may lie, 95 %"),
    )
    return Multiples(figures=figures, legend=legend, note=note)


def _small_figure(number: int, s: _SCurve, bands: Bands) -> Figure:
    curve = s.curve
    low, high = spanning(curve.x, padding=0.08)
    x = PlotAxis(label="Differential input", unit="V", low=low, high=high, most_ticks=4)
    words = condition_words(curve.condition) or "all conditions"
    trip, sigma = si_text(s.trip_v, "V"), si_text(s.sigma_v, "V")
    band = bands.probability(curve.line_x, **reference_keywords(curve.condition))
    layers = (
        Band(x=curve.line_x, low=band.low, high=band.high),
        Line(x=curve.line_x, y=curve.line_y, style="s0"),
        Dots(x=curve.x, y=curve.y, low=s.low, high=s.high, marker="dot", style="s0"),
    )
    chart = Chart(
        name=f"noise-{number}", title=f"S-curve, {words}",
        description=f"{len(curve.x)} levels; emitted trip point {trip}, sigma {sigma}.",
        panels=(Panel(x=x, y=_share_axis(), layers=layers, height=130.0),),
        width=240.0, left=42.0,
    )  # fmt: skip
    detail = f"{SIGMA}\N{NO-BREAK SPACE}{sigma}, trip point {trip}"
    return Figure(svg=draw_chart(chart), caption=words, detail=detail)


def _s_curves(members: Sequence[Curve], reference: Reference) -> list[_SCurve]:
    counted = [c for c in members if len(c.trials) == len(c.x)]
    found = (_s_curve(c, reference) for c in counted)
    return [s for s in found if s is not None]


def _s_curve(curve: Curve, reference: Reference) -> _SCurve | None:
    keywords = reference_keywords(curve.condition)
    trip, sigma = float(reference.offset(**keywords)), float(reference.noise_sigma(**keywords))
    if sigma <= 0.0:
        return None
    low, high = score_interval(curve.y, curve.trials.astype(float))
    expected = np.clip(curve.model_y, 1e-12, 1.0 - 1e-12)
    error = np.sqrt(expected * (1.0 - expected) / curve.trials)
    return _SCurve(curve=curve, trip_v=trip, sigma_v=sigma, z=(curve.x - trip) / sigma, low=low,
                   high=high, deviation=(curve.y - curve.model_y) / error)  # fmt: skip


def score_interval(share: Floats, trials: Floats, level: float = 0.95) -> tuple[Floats, Floats]:
    """Return the score interval of a proportion (E. B. Wilson, J. Am. Stat. Assoc. 22, 1927).

    Parameters
    ----------
    share, trials : ndarray, shape (N,)
    level : float
        Confidence, reached on average.
    """
    z2 = NormalDist().inv_cdf(0.5 + 0.5 * level) ** 2
    centre = share + 0.5 * z2 / trials
    half = np.sqrt(z2 * (share * (1.0 - share) / trials + 0.25 * z2 / trials**2))
    scale = 1.0 + z2 / trials
    return np.maximum((centre - half) / scale, 0.0), np.minimum((centre + half) / scale, 1.0)


def _share_axis() -> PlotAxis:
    return PlotAxis(label="Share of ones", unit="1", low=-0.04, high=1.04, most_ticks=5)
