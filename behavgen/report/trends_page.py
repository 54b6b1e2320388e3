"""The page of trends: every cell's parameters over the past runs."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from markupsafe import Markup

from behavgen.report.axes import PlotAxis, spanning
from behavgen.report.charts import Band, Chart, Dots, Layer, Line, Panel, draw_chart
from behavgen.report.figure import Figure, Multiples
from behavgen.report.html import csp_hash, html_environment, shipped_text

__all__ = ["CellTrends", "RunTrend", "trends_page"]


@dataclass(frozen=True, slots=True, kw_only=True)
class RunTrend:
    """One parameter over runs, the oldest first, N runs.

    Parameters
    ----------
    name, unit : str
    runs : tuple of int, length N
        Numbers of the runs.
    value, low, high : tuple of float, length N
        Ends of the interval are NaN where none is known.
    """

    name: str
    unit: str
    runs: tuple[int, ...]
    value: tuple[float, ...]
    low: tuple[float, ...]
    high: tuple[float, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class CellTrends:
    """The parameters of one cell."""

    name: str
    trends: tuple[RunTrend, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Content:
    """Everything the template prints."""

    title: str
    overview: str
    cells: tuple[tuple[str, Multiples], ...]
    cautions: tuple[str, ...]


def trends_page(
    cells: Sequence[CellTrends], *, title: str, overview: str, cautions: Sequence[str] = ()
) -> str:
    """Return one self-contained HTML page; it runs no script and loads nothing.

    Parameters
    ----------
    cells : sequence of CellTrends
    title : str
        Of the project.
    overview : str
        Path of the page of all cells relative to this one.
    cautions : sequence of str
        Full sentences.
    """
    content = _Content(
        title=title,
        overview=overview,
        cells=tuple((cell.name, _drawn(number, cell)) for number, cell in enumerate(cells)),
        cautions=tuple(cautions),
    )
    style = shipped_text("report/style.css").strip()
    template = html_environment().get_template("report/trends.html")
    return template.render(content=content, style=Markup(style), style_hash=csp_hash(style))


def _drawn(number: int, cell: CellTrends) -> Multiples:
    figures = (_figure(f"trend-{number}-{k}", trend) for k, trend in enumerate(cell.trends))
    return Multiples(figures=tuple(figures))


def _figure(name: str, trend: RunTrend) -> Figure:
    x, y, low, high = (
        np.array(column, dtype=float) for column in (trend.runs, trend.value, trend.low, trend.high)
    )
    layers: list[Layer] = [Line(x=x, y=y), Dots(x=x, y=y)]
    if np.isfinite(low).any() and len(x) > 1:
        layers.insert(0, Band(x=x, low=low, high=high))
    first, last = trend.runs[0] - 1, trend.runs[-1] + 1  # ticks at whole runs
    bottom, top = spanning(y, low, high, padding=0.15)
    across = PlotAxis(
        label="Run", unit="1", low=float(first), high=float(last), most_ticks=min(5, last - first)
    )
    along = PlotAxis(label="", unit=trend.unit, low=bottom, high=top, most_ticks=4)
    chart = Chart(
        name=name,
        title=f"{trend.name} over runs",
        description=f"{len(x)} runs, from {trend.runs[0]} to {trend.runs[-1]}.",
        panels=(Panel(x=across, y=along, layers=tuple(layers), height=90.0),),
        width=240.0,
        left=42.0,
    )
    return Figure(svg=draw_chart(chart), caption=trend.name)
