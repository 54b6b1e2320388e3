"""The window without a window table is the delay read the other way."""

import math
import xml.etree.ElementTree as ET

import pytest

from behavgen.reference import Reference
from behavgen.report.conditions import middle_condition
from behavgen.report.window_figures import window_from_delay
from tests.example_models import minimal_model
from tests.report.drawings import line_places, tick_places

NBSP = "\N{NO-BREAK SPACE}"


def test_the_window_is_twice_the_overdrive_of_that_delay():
    """By hand: all of 1 V is open at 25 ps, and each decade takes 10 ps ln(10) more."""
    model = minimal_model()
    figure = window_from_delay(model, Reference(model), middle_condition(model))
    svg = ET.fromstring(figure.svg)
    across, along = tick_places(svg, "x"), tick_places(svg, "y")
    line = line_places(svg, "line s0")
    assert line[0, 1] == pytest.approx(along[f"1{NBSP}V"], abs=0.11)
    per_ps = (across["100"] - across["50"]) / 50.0
    assert (line[0, 0] - across["50"]) / per_ps == pytest.approx(-25.0, abs=0.1)
    # down to the window of 2 uV
    later_ps = (line[-1, 0] - line[0, 0]) / per_ps
    assert later_ps == pytest.approx(10.0 * math.log(0.5 / 1e-6), abs=0.1)
    assert len(line) == 2  # the law is a straight line on this paper
