"""Figures: a drawing with its caption and legend, ready for the page."""

from __future__ import annotations

from dataclasses import dataclass

from behavgen.report.charts import swatch

__all__ = [
    "Figure",
    "LegendEntry",
    "Multiples",
    "series_legend",
    "series_marker",
    "series_style",
]

_MARKER_ORDER = ("dot", "square", "triangle", "diamond", "cross", "plus")


@dataclass(frozen=True, slots=True, kw_only=True)
class LegendEntry:
    """A sample of a series (SVG) and what it stands for."""

    sample: str
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Figure:
    """One drawing (SVG) and its words; `detail` is a second, quieter line of a small figure."""

    svg: str
    caption: str
    detail: str = ""
    legend: tuple[LegendEntry, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Multiples:
    """Small figures of one kind side by side, with one legend and one note."""

    figures: tuple[Figure, ...]
    legend: tuple[LegendEntry, ...] = ()
    note: str = ""


def series_style(index: int) -> str:
    """Return the colour class of the n-th series; dash patterns go with the colours."""
    return f"s{index % len(_MARKER_ORDER)}"


def series_marker(index: int) -> str:
    """Return the marker of the n-th series, so that no series is told by colour alone."""
    return _MARKER_ORDER[index % len(_MARKER_ORDER)]


def series_legend(index: int, text: str) -> LegendEntry:
    """Return the legend entry of the n-th series."""
    return LegendEntry(sample=swatch(series_style(index), series_marker(index)), text=text)
