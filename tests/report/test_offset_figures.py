"""Offsets of instances: the emitted sigma and its picture."""

import xml.etree.ElementTree as ET
from dataclasses import replace

import numpy as np
import pytest

from behavgen.model import Condition, CurvePoints, MismatchEffect
from behavgen.report.offset_figures import mismatch_sigma, offset_multiples
from tests.example_models import constant_surface, minimal_model
from tests.report.drawings import marker_places, tick_places

NBSP, SIGMA = "\N{NO-BREAK SPACE}", "\N{GREEK SMALL LETTER SIGMA}"


def model_of(*component_v, instances=(0.0, 1e-3, -2e-3, 4e-3)):
    components = tuple(constant_surface("V", "plain", v, "nominal") for v in component_v)
    points = CurvePoints(quantity="offset", condition=Condition(),
                         x=tuple(map(float, range(len(instances)))), y=instances)  # fmt: skip
    mismatch = MismatchEffect(components=components, instances=len(instances))
    return replace(minimal_model(), mismatch=mismatch if component_v else None, points=(points,))


def test_independent_components_add_in_squares():
    assert mismatch_sigma(model_of(3e-3, -4e-3), Condition()) == pytest.approx(5e-3, rel=1e-12)
    assert mismatch_sigma(model_of(), Condition()) is None


def test_each_condition_has_a_plot_with_its_numbers():
    drawn = offset_multiples(model_of(3e-3, 4e-3))
    (figure,) = drawn.figures
    # statistics.stdev of the four instances is 2.5 mV
    sigma = f"{SIGMA}{NBSP}2.5{NBSP}mV"
    assert figure.detail == f"4 instances, {sigma}, emitted 5{NBSP}mV"


def test_instances_stand_at_their_normal_scores():
    """Expected normal scores of four by G. Blom, (k - 3/8) / (n + 1/4): -1.049, -0.299, ..."""
    (figure,) = offset_multiples(model_of(3e-3, 4e-3)).figures
    svg = ET.fromstring(figure.svg)
    ticks = tick_places(svg, "x")
    unit = ticks["1"] - ticks["0"]
    x = (marker_places(svg, "dot s0", "dot")[:, 0] - ticks["0"]) / unit
    np.testing.assert_allclose(x, [-1.049, -0.299, 0.299, 1.049], atol=3e-3)


def test_too_few_instances_are_no_plot():
    assert offset_multiples(model_of(3e-3, instances=(0.0, 1e-3))) is None
