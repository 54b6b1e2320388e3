"""S-curves in pictures: intervals, sigmas and what is left out."""

import json
import xml.etree.ElementTree as ET
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from behavgen.bands import Bands
from behavgen.model import Condition, CurvePoints, NoiseEffect, OffsetEffect
from behavgen.reference import Reference
from behavgen.report.curves import curves
from behavgen.report.noise_figures import (
    observed_sigmas,
    s_curve_multiples,
    score_interval,
    standardised_s_curves,
)
from tests.example_models import constant_surface, minimal_model
from tests.report.drawings import marker_places, tick_places

PUBLISHED = json.loads(
    (Path(__file__).parents[1] / "published" / "binomial_ci.json").read_text(encoding="utf-8")
)


def noisy_model(levels_v, shares, conditions=1):
    """Return a model with a noise sigma of exactly 1 mV around a trip point of 0 V."""
    bare = minimal_model()
    noise = NoiseEffect(surface=constant_surface("V", "plain", 1e-3, "nominal"))
    points = tuple(
        CurvePoints(quantity="noise", condition=Condition(vdd_v=1.0 + 0.1 * k), x=levels_v,
                    y=shares, trials=(200,) * len(levels_v))
        for k in range(conditions)
    )  # fmt: skip
    return replace(bare, noise=noise, points=points)


@pytest.mark.parametrize("case", sorted(PUBLISHED))
def test_score_intervals_are_those_published(case):
    """Cases of R. G. Newcombe, Statistics in Medicine 17, 1998, 857-872, method 3."""
    ones, trials = map(int, case.split("/"))
    low, high = score_interval(np.array([ones / trials]), np.array([float(trials)]))
    assert (low[0], high[0]) == pytest.approx(PUBLISHED[case]["wilson"], abs=1e-9)


def test_sigmas_observed_are_those_of_the_rarest_count():
    model = noisy_model((-3e-3, 0.0, 3e-3), (0.005, 0.5, 1.0))
    found = observed_sigmas(curves(model, Reference(model), "noise"))
    assert found == pytest.approx(2.5758, abs=1e-4)  # normal quantile of 0.005, from tables


def test_nothing_counted_between_zero_and_one_is_no_observation():
    model = noisy_model((-3e-3, 3e-3), (0.0, 1.0))
    assert observed_sigmas(curves(model, Reference(model), "noise")) is None
    assert observed_sigmas(()) is None


def test_one_condition_needs_no_common_axis():
    model = noisy_model((-1e-3, 0.0, 1e-3), (0.2, 0.5, 0.8))
    members = curves(model, Reference(model), "noise")
    assert standardised_s_curves(members, Reference(model)) is None
    small = s_curve_multiples(members, Reference(model), Bands(model))
    assert len(small.figures) == 1
    assert "1\N{NO-BREAK SPACE}mV" in small.figures[0].detail


def test_levels_stand_at_their_distance_from_the_trip_point_in_sigmas():
    model = noisy_model((0.0, 1e-3, 3e-3), (0.2, 0.5, 0.97), conditions=2)
    offset = OffsetEffect(surface=constant_surface("V", "plain", 1e-3, "nominal"))
    model = replace(model, offset=offset)
    figure = standardised_s_curves(curves(model, Reference(model), "noise"), Reference(model))
    svg = ET.fromstring(figure.svg)
    ticks = tick_places(svg, "x")
    upper = next(e for e in svg.iter("svg") if e is not svg)
    x = marker_places(upper, "dot s0", "dot")[:, 0]
    unit = ticks["1"] - ticks["0"]
    np.testing.assert_allclose((x - ticks["0"]) / unit, [-1.0, 0.0, 2.0], atol=2e-3)


def test_of_many_conditions_a_dozen_is_drawn_and_said():
    model = noisy_model((-1e-3, 0.0, 1e-3), (0.2, 0.5, 0.8), conditions=30)
    members = curves(model, Reference(model), "noise")
    small = s_curve_multiples(members, Reference(model), Bands(model))
    assert len(small.figures) == 12
    assert "30 conditions" in small.note
    assert standardised_s_curves(members, Reference(model)) is not None


def test_a_model_without_noise_draws_no_s_curves():
    model = replace(noisy_model((0.0,), (0.5,)), noise=None)
    members = curves(model, Reference(model), "noise")
    assert s_curve_multiples(members, Reference(model), Bands(model)) is None
