"""Reads places back from the paths of a drawing."""

from __future__ import annotations

import re
import xml.etree.ElementTree as ET

import numpy as np

from behavgen.report.charts import MARKERS

__all__ = ["line_places", "marker_places", "path_of", "tick_places"]


def path_of(svg: ET.Element, style: str) -> str:
    """Return the path of the one element with exactly these classes."""
    (found,) = [e for e in svg.iter("path") if e.get("class") == style]
    return found.get("d") or ""


def marker_places(svg: ET.Element, style: str, marker: str) -> np.ndarray:
    """Return where markers stand, shape (N, 2), by adding up the steps between them."""
    across, along, stroke = MARKERS[marker]
    steps = [part for part in path_of(svg, style).split(stroke) if part]
    pairs = [[float(v) for v in re.findall(r"-?[\d.]+", step)] for step in steps]
    return np.cumsum(np.array(pairs), axis=0) - [across, along]


def line_places(svg: ET.Element, style: str) -> np.ndarray:
    """Return the corners of a line, shape (N, 2)."""
    return np.array([[float(v) for v in p.split()] for p in path_of(svg, style)[1:].split("L")])


def tick_places(svg: ET.Element, axis: str) -> dict[str, float]:
    """Return where the labelled ticks of the uppermost plot's x or y axis stand, in its units."""
    plot = next(e for e in svg.iter("svg") if e is not svg)
    origin = float(plot.get(axis) or 0.0) - (4.0 if axis == "y" else 0.0)
    group = next(e for e in svg.iter("g") if e.get("class") == axis)
    return {
        e.text or "": float(e.get(axis) or 0.0) - origin - (8.0 if axis == "y" else 0.0)
        for e in group
        if e.get("class") == "tick"
    }
