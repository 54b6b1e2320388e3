"""S-curves in pictures: intervals, sigmas and what is left out."""

import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from behavgen.bands import Bands
from behavgen.model import Condition, CurvePoints, NoiseEffect
from behavgen.reference import Reference
from behavgen.report.curves import curves
from behavgen.report.noise_figures import (
    observed_sigmas,
    s_curve_multiples,
    score_interval,
    standardised_s_curves,
)
from tests.example_models import constant_surface, minimal_model

PUBLISHED = Path(__file__).parents[1] / "published" / "binomial_ci.json"


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


@pytest.mark.parametrize(
    ("ones", "trials", "low", "high"), [(81, 263, 0.2553, 0.3662), (0, 20, 0.0, 0.1611)]
)
def test_score_intervals_are_those_published(ones, trials, low, high):
    """R. G. Newcombe, Statistics in Medicine 17, 1998, 857-872, table I, method 3."""
    found = score_interval(np.array([ones / trials]), np.array([float(trials)]))
    assert (found[0][0], found[1][0]) == pytest.approx((low, high), abs=5.1e-5)


def test_the_published_cases_are_still_those_of_the_file():
    assert "81" in PUBLISHED.read_text() and json.loads(PUBLISHED.read_text())


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
