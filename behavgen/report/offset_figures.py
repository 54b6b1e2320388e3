"""Offsets of instances against the normal distribution that the model draws from."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt
from scipy.special import betaincinv, ndtri

from behavgen.model import ComparatorModel, Condition, CurvePoints
from behavgen.operating_point import evaluate, operating_point
from behavgen.report.axes import PlotAxis, spanning
from behavgen.report.charts import Band, Chart, Dots, Layer, Line, Panel, draw_chart, swatch
from behavgen.report.conditions import condition_words, reference_keywords
from behavgen.report.figure import Figure, LegendEntry, Multiples
from behavgen.report.numbers import SIGMA, si_text

__all__ = ["mismatch_sigma", "offset_multiples"]

Floats = npt.NDArray[np.float64]

_MOST_PANELS = 6
_FEWEST_INSTANCES = 3


def mismatch_sigma(model: ComparatorModel, condition: Condition) -> float | None:
    """Return the emitted standard deviation of the offset between instances in V."""
    if model.mismatch is None:
        return None
    point = operating_point(model, (), reference_keywords(condition))
    parts = [evaluate(component, point) for component in model.mismatch.components]
    return float(np.sqrt(np.sum(np.square(parts))))


def offset_multiples(model: ComparatorModel) -> Multiples | None:
    """Return a normal quantile plot for each condition; None when no instances were measured."""
    found = [p for p in model.points if p.quantity == "offset" and len(p.y) >= _FEWEST_INSTANCES]
    if not found:
        return None
    shown = sorted(found, key=lambda p: -len(p.y))[:_MOST_PANELS]
    figures = tuple(_quantile_figure(i, model, points) for i, points in enumerate(shown))
    note = _note(len(found), [len(p.y) for p in shown])
    legend = (
        LegendEntry(sample=swatch("s0", "dot", line=False), text="instances in order"),
        LegendEntry(sample=swatch("ink"), text="mean of the instances and emitted sigma"),
        LegendEntry(sample=swatch("band-sample"), text="where 95 % of such order statistics fall"),
    )
    return Multiples(figures=figures, legend=legend, note=note)


def _note(found: int, instances: Sequence[int]) -> str:
    parts = []
    if len(set(instances)) > 1:
        parts.append("Fewer instances are a subset whose mean and spread differ by chance; the "
                     "model relates conditions instance by instance.")  # fmt: skip
    if len(instances) < found:
        parts.append(f"Of {found} conditions the {len(instances)} with most instances are drawn.")
    return " ".join(parts)


def _quantile_figure(number: int, model: ComparatorModel, points: CurvePoints) -> Figure:
    offsets = np.sort(np.array(points.y))
    sigma = mismatch_sigma(model, points.condition)
    layers = _quantile_layers(offsets, sigma)
    words = condition_words(points.condition) or "all conditions"
    x = PlotAxis(label="Normal quantile", unit="1", low=-3.2, high=3.2, most_ticks=7)
    low, high = spanning(offsets, padding=0.15)
    y = PlotAxis(label="Offset", unit="V", low=low, high=high, most_ticks=5)
    spread = float(offsets.std(ddof=1))
    chart = Chart(
        name=f"offset-{number}", title=f"Offsets of instances, {words}",
        description=f"{len(offsets)} instances, standard deviation {si_text(spread, 'V')}.",
        panels=(Panel(x=x, y=y, layers=layers, height=150.0),), width=240.0, left=42.0,
    )  # fmt: skip
    detail = f"{len(offsets)} instances, {SIGMA}\N{NO-BREAK SPACE}{si_text(spread, 'V')}"
    if sigma is not None:
        detail += f", emitted {si_text(sigma, 'V')}"
    return Figure(svg=draw_chart(chart), caption=words, detail=detail)


def _quantile_layers(offsets: Floats, sigma: float | None) -> tuple[Layer, ...]:
    """Plot at the positions of G. Blom, Statistical Estimates and Transformed Beta-Variables, 1958.

    The k-th of n order statistics of uniform variables is beta distributed
    with k and n + 1 - k (H. A. David & H. N. Nagaraja, Order Statistics, 2003).
    """
    n = len(offsets)
    k = np.arange(1, n + 1)
    z = ndtri((k - 0.375) / (n + 0.25))
    dots = Dots(x=z, y=offsets, marker="dot", style="s0")
    if sigma is None:
        return (dots,)
    mean = float(offsets.mean())
    low, high = (mean + sigma * ndtri(betaincinv(k, n + 1 - k, p)) for p in (0.025, 0.975))
    return (
        Band(x=z, low=low, high=high),
        Line(x=np.array([-3.2, 3.2]), y=mean + sigma * np.array([-3.2, 3.2]), style="ink"),
        dots,
    )
