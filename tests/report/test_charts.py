"""Charts: what is drawn lies where the numbers say."""

import re
import xml.etree.ElementTree as ET

import numpy as np
import pytest

from behavgen.report.axes import PlotAxis
from behavgen.report.charts import MARKERS, Band, Chart, Dots, Line, Panel, draw_chart, swatch
from tests.report.drawings import line_places, marker_places, path_of

WIDTH, HEIGHT = 480.0 - 54.0 - 14.0, 200.0


def draw(*layers, log_x=False, title="A title", low=0.0, high=10.0):
    x = PlotAxis(label="x", unit="V", low=1e-6 if log_x else 0.0, high=1.0 if log_x else 10.0,
                 logarithmic=log_x)  # fmt: skip
    y = PlotAxis(label="y", unit="s", low=low, high=high)
    panel = Panel(x=x, y=y, layers=layers, height=HEIGHT)
    text = draw_chart(Chart(name="c", title=title, description="What it shows", panels=(panel,)))
    return ET.fromstring(text)


@pytest.mark.parametrize("marker", MARKERS)
def test_markers_stand_at_their_values_to_a_tenth_of_a_unit(marker):
    rng = np.random.default_rng(1)
    x, y = rng.uniform(0.0, 10.0, 300), rng.uniform(0.0, 10.0, 300)
    svg = draw(Dots(x=x, y=y, marker=marker, style="s3"))
    (style,) = [e.get("class") for e in svg.iter("path") if (e.get("class") or "").endswith(" s3")]
    expected = np.column_stack([x / 10.0 * WIDTH, (1.0 - y / 10.0) * HEIGHT])
    np.testing.assert_allclose(marker_places(svg, style, marker), expected, atol=0.051)


@pytest.mark.parametrize("marker", MARKERS)
def test_a_marker_ends_where_it_starts(marker):
    """Else the relative steps of `draw_chart` would drift."""
    stroke = MARKERS[marker][2]
    at = np.zeros(2)
    for command, numbers in re.findall(r"([a-z])([-\d. ]*)", stroke):
        values = [float(v) for v in re.findall(r"-?\d+(?:\.\d+)?", numbers)]
        if command == "z":
            at = np.zeros(2)
        elif command == "h":
            at[0] += sum(values)
        elif command == "v":
            at[1] += sum(values)
        else:
            at = at + np.array(values).reshape(-1, 2).sum(axis=0)
    assert at.tolist() == [0.0, 0.0]


def test_a_line_keeps_its_shape_when_points_are_left_out():
    x = np.linspace(0.0, 10.0, 400)
    y = 5.0 + 4.0 * np.sin(x)
    kept = line_places(draw(Line(x=x, y=y, style="s1")), "line s1")
    assert len(kept) < 150
    drawn = np.interp(x / 10.0 * WIDTH, kept[:, 0], kept[:, 1])
    np.testing.assert_allclose(drawn, (1.0 - y / 10.0) * HEIGHT, atol=0.35)


def test_a_straight_line_needs_two_points():
    d = path_of(draw(Line(x=np.geomspace(1e-6, 1.0, 50), y=np.linspace(9.0, 1.0, 50)), log_x=True),
             "line s0")  # fmt: skip
    assert d == f"M0 20L{WIDTH:g} 180"


def test_values_that_are_not_finite_are_not_drawn():
    y = np.array([1.0, np.nan, np.inf, 3.0])
    d = path_of(draw(Dots(x=np.arange(4.0), y=y)), "dot s0")
    assert d.count("h0") == 2


def test_a_band_is_a_closed_area_and_error_bars_reach_both_ends():
    x = np.array([0.0, 10.0])
    svg = draw(
        Band(x=x, low=np.array([1.0, 2.0]), high=np.array([3.0, 4.0])),
        Dots(x=x, y=x / 2, low=np.array([0.0, 4.0]), high=np.array([1.0, 6.0])),
    )
    assert path_of(svg, "band") == f"M0 180L{WIDTH:g} 160L{WIDTH:g} 120L0 140z"
    assert path_of(svg, "bar s0") == f"M0 200V180M{WIDTH:g} 120V80"


def test_titles_are_escaped_and_name_the_drawing():
    svg = draw(Line(x=np.arange(3.0), y=np.arange(3.0), title="<b> & co"), title="a < b & c")
    assert svg.find("title").text == "a < b & c"
    assert [e.text for e in svg.iter("title")][-1] == "<b> & co"
    assert svg.get("role") == "img"
    assert svg.get("aria-labelledby") == "c-t c-d"


def test_tick_labels_stand_at_their_grid_lines():
    svg = draw(log_x=True)
    grid = path_of(svg, "grid")
    lines = {float(v) for v in re.findall(r"M([\d.]+) 0V", grid)}
    labels = {round(float(e.get("x")) - 54.0, 1) for e in svg.iter("text")
              if e.get("class") == "tick" and "V" in e.text}  # fmt: skip
    assert lines == labels


def test_no_colour_alone_tells_series_apart():
    samples = [re.sub(r"s\d", "", swatch(f"s{i}", marker)) for i, marker in
               enumerate(("dot", "square", "triangle", "diamond", "cross", "plus"))]  # fmt: skip
    assert len(set(samples)) == 6
