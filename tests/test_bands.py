"""Intervals: they cover, they widen with extrapolation, they close around the value."""

from dataclasses import replace

import numpy as np
import pytest
from scipy.special import ndtr

from behavgen.bands import Bands
from behavgen.model import DelayEffect
from tests.example_models import full_model


def with_scatter(model):
    effect: DelayEffect = model.delay
    size = 1 + len(effect.nodes)
    terms = len(effect.tau.exponents)
    leverage = np.zeros((terms, terms))
    leverage[0, 0] = 1.0
    return replace(
        model,
        delay=replace(
            effect,
            scatter=tuple(tuple(row) for row in 1e-4 * np.eye(size)),
            scatter_freedom=50,
            leverage=tuple(tuple(row) for row in leverage),
        ),
    )


def test_windows_widen_with_every_decade_of_extrapolation():
    band = Bands(with_scatter(full_model())).window([3e-10, 5e-10, 9e-10, 1.5e-9])
    decades = np.log10(band.high / band.low)
    assert (np.diff(decades) > 0.0).all()
    # Far out the error of tau rules: ln W = -t / tau, so one percent of tau is t / tau percent.
    tau = float(np.exp(-24.635))
    gain = (decades[3] - decades[2]) * np.log(10) / 2.0
    assert gain == pytest.approx(2.01 * 0.01 * 6e-10 / tau, rel=0.25)


def test_the_logarithm_of_the_window_goes_on_where_the_window_underflows():
    bands = Bands(with_scatter(full_model()))
    log_window = bands.log_window(np.array([4e-10, 5e-10, 1e-8, 2e-8]))
    window = bands.window(np.array([4e-10, 5e-10, 1e-8, 2e-8]))
    np.testing.assert_allclose(np.exp(log_window.value[:2]), window.value[:2], rtol=1e-12)
    np.testing.assert_allclose(np.exp(log_window.high[:2]), window.high[:2], rtol=1e-12)
    assert window.value[3] == 0.0
    # W falls by e every tau, on one straight line.
    tau_s = 1e-10 / (log_window.value[0] - log_window.value[1])
    assert log_window.value[2] - log_window.value[3] == pytest.approx(1e-8 / tau_s, rel=1e-9)
    # One percent of tau is one percent of the wait in tau, 2.01 of them in the interval.
    half = log_window.high - log_window.value
    assert half[3] - half[2] == pytest.approx(2.01 * 0.01 * 1e-8 / tau_s, rel=0.01)


def test_delay_band_of_independent_nodes_is_that_of_the_node():
    model = with_scatter(full_model())
    band = Bands(model).delay(model.delay.node_overdrive_v[1])
    # One percent standard error, Student quantile 2.01 at 50 degrees of freedom.
    assert np.log(band.high / band.value) == pytest.approx(2.01 * 0.01, rel=0.01)


def test_probability_band_is_narrow_where_the_data_were_and_wide_in_the_tail():
    model = full_model()
    surface = model.noise.surface
    terms = len(surface.exponents)
    covariance = np.zeros((terms, terms))
    covariance[0, 0] = 0.03**2
    noise = replace(
        model.noise,
        surface=replace(surface, covariance=tuple(tuple(row) for row in covariance)),
    )
    bands = Bands(replace(model, noise=noise))
    offset, sigma = float(bands.offset().value), float(bands.noise_sigma().value)
    band = bands.probability(offset + sigma * np.array([0.0, -6.0]))
    assert band.low[0] == band.high[0] == pytest.approx(0.5)
    # z = -6 with 3 % of sigma: z moves by 1.96 * 0.18.
    assert band.high[1] == pytest.approx(ndtr(-6.0 + 1.96 * 0.18), rel=1e-3)


def test_a_model_without_covariance_has_closed_bands():
    band = Bands(full_model()).delay([1e-6, 1e-2])
    assert (band.low == band.value).all()
    assert (band.high == band.value).all()
