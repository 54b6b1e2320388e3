"""Error probabilities against published rates, 60-digit arithmetic, integrals and identities."""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.special import erf, ndtr

from behavgen.formulas.decision_errors import (
    log_error_probability,
    log_error_probability_uniform,
    log_unresolved_probability,
    log_unresolved_probability_uniform,
)

LN_10 = np.log(10.0)
SIGMA_V = 1e-3
sigmas = st.floats(-20.0, 20.0)
windows = st.floats(-12.0, 2.0)


@pytest.mark.parametrize(("z", "rate"), [(7.03448, 1e-12), (7.94135, 1e-15)])
def test_bit_error_rates_of_data_links(z: float, rate: float) -> None:
    # Sigmas that go with these bit error rates in tables of the normal tail.
    found = float(log_error_probability(z * SIGMA_V, SIGMA_V))
    # The sigmas are given to 5e-6, which is z * 5e-6 / ln 10 decades.
    assert found / LN_10 == pytest.approx(np.log10(rate), abs=2e-5)


@pytest.mark.parametrize(("z", "log10"), [(30, -197.309209261661), (60, -783.907429164111)])
def test_far_tails_do_not_underflow(z: float, log10: float) -> None:
    # Reference: the normal distribution in 60-digit arithmetic.
    assert float(log_error_probability(z, 1.0)) / LN_10 == pytest.approx(log10, rel=1e-13)


@pytest.mark.parametrize(
    ("distance_v", "half_window_v", "log10"),
    [
        (20e-3, 1e-18, -101.956956319165),
        (5e-3, 1e-5, -7.52656726195415),
        (5e-3, 3e-4, -5.90556167580018),
        (3e-3, 2e-3, -0.799546326157497),
    ],
)
def test_windows_off_the_trip_point(distance_v: float, half_window_v: float, log10: float) -> None:
    # Reference: difference of two normal distributions in 60-digit arithmetic, sigma 1 mV.
    for sign in (1.0, -1.0):
        found = log_unresolved_probability(sign * distance_v, SIGMA_V, np.log(half_window_v))
        assert float(found) / LN_10 == pytest.approx(log10, rel=1e-12)


def test_window_at_the_trip_point() -> None:
    window_v = np.geomspace(1e-15, 1e-2, 40)
    found = np.exp(log_unresolved_probability(0.0, SIGMA_V, np.log(0.5 * window_v)))
    # erf(W / (2 sqrt2 sigma)): a normal variable within W/2 of its mean.
    np.testing.assert_allclose(found, erf(window_v / (2 * np.sqrt(2) * SIGMA_V)), rtol=1e-12)


def test_a_window_too_narrow_for_a_double() -> None:
    # 2 h phi(0) / sigma with ln h = -5000.
    expected = -5000.0 + np.log(2.0 / SIGMA_V) - 0.5 * np.log(2.0 * np.pi)
    assert float(log_unresolved_probability(0.0, SIGMA_V, -5000.0)) == pytest.approx(expected)
    uniform = float(log_unresolved_probability_uniform(1.0, SIGMA_V, -5000.0))
    assert uniform == pytest.approx(-5000.0 + np.log(2.0))


def test_what_never_resolves() -> None:
    for found in (
        log_unresolved_probability([0.0, 1.0], SIGMA_V, np.inf),
        log_unresolved_probability_uniform([1e-6, 1.0], SIGMA_V, np.inf),
        log_error_probability([0.0, 1.0], SIGMA_V, np.inf),
        log_error_probability_uniform([1e-6, 1.0], SIGMA_V, np.inf),
    ):
        np.testing.assert_allclose(found, 0.0, atol=1e-12)


def test_without_noise_inputs_are_certain() -> None:
    log_half = np.log(0.1)
    found = log_unresolved_probability([0.0, 0.05, 0.2], 0.0, log_half)
    np.testing.assert_array_equal(found, [0.0, 0.0, -np.inf])
    np.testing.assert_array_equal(log_error_probability([0.2, -0.2], 0.0), [-np.inf, 0.0])
    assert float(log_unresolved_probability_uniform(1.0, 0.0, log_half)) == pytest.approx(
        np.log(0.2)
    )
    # Half the span of 1 V minus the shift of 0.1 V is right: 0.1 of 1 V is wrong.
    assert float(log_error_probability_uniform(1.0, 0.0, 0.0, 0.1)) == pytest.approx(np.log(0.1))


def test_narrow_windows_without_noise_are_their_share_of_the_span() -> None:
    log_half = np.log([1e-3, 1e-12, 1e-40, 1e-200])
    found = log_unresolved_probability_uniform(0.6, 0.0, log_half)
    # W / S (Veendrick 1980), also where span plus window is the span to a double.
    np.testing.assert_allclose(found, log_half + np.log(2.0 / 0.6), rtol=1e-14)


def test_uniform_input_of_many_sigmas() -> None:
    # W / S (Veendrick 1980); sqrt(2/pi) sigma / S, twice the integral of the normal tail.
    window = np.exp(log_unresolved_probability_uniform(1.0, SIGMA_V, np.log(0.5e-9)))
    assert float(window) == pytest.approx(1e-9, rel=1e-12)
    noise = np.exp(log_error_probability_uniform(1.0, SIGMA_V))
    assert float(noise) == pytest.approx(np.sqrt(2.0 / np.pi) * SIGMA_V, rel=1e-12)


def test_uniform_input_of_few_sigmas() -> None:
    # Reference: quadrature in 60-digit arithmetic; span 4 mV, half window 1.5 mV, shift 1 mV.
    unresolved = np.exp(log_unresolved_probability_uniform(4e-3, SIGMA_V, np.log(1.5e-3)))
    assert float(unresolved) == pytest.approx(0.651130961758558, rel=1e-13)
    error = np.exp(log_error_probability_uniform(4e-3, SIGMA_V, 1.5e-3, 1e-3))
    assert float(error) == pytest.approx(0.618174335854131, rel=1e-13)


@pytest.mark.parametrize("span_v", [1e-4, 2e-3, 0.03, 1.0])
@pytest.mark.parametrize("half_window_v", [1e-5, 1e-3, 3.9e-3, 4.1e-3, 0.02, 0.4])
def test_uniform_input_is_the_mean_over_levels(span_v: float, half_window_v: float) -> None:
    about_the_edge = half_window_v + SIGMA_V * np.arange(-6, 7)
    ends = sorted({0.0, 0.5 * span_v, *np.clip(about_the_edge, 0.0, 0.5 * span_v)})

    def mean(density: Callable[[float], float]) -> float:
        pieces = (quad(density, a, b, epsabs=0.0)[0] for a, b in pairwise(ends))
        return 2.0 * sum(pieces) / span_v

    def unresolved(x: float) -> float:
        return float(ndtr((half_window_v - x) / SIGMA_V) - ndtr((-half_window_v - x) / SIGMA_V))

    def error(x: float) -> float:
        return float(ndtr((half_window_v - x) / SIGMA_V))

    log_half = np.log(half_window_v)
    found = np.exp(log_unresolved_probability_uniform(span_v, SIGMA_V, log_half))
    assert float(found) == pytest.approx(mean(unresolved), rel=1e-9)
    found = np.exp(log_error_probability_uniform(span_v, SIGMA_V, half_window_v))
    assert float(found) == pytest.approx(mean(error), rel=1e-9)


@given(z=sigmas, log_half=windows)
def test_not_right_in_time_for_either_bit_is_one_and_unresolved(z: float, log_half: float) -> None:
    # P(e < h) + P(e > -h) = 1 + P(|e| < h)
    half = np.exp(log_half)
    both = np.exp(log_error_probability([z, -z], 1.0, half)).sum()
    unresolved = np.exp(log_unresolved_probability(z, 1.0, log_half))
    assert both == pytest.approx(1.0 + float(unresolved), rel=1e-12)


@example(z=0.0, more=1e-6, log_half=1.8125, wider=1.0)  # lost its digits close to certainty
@given(z=sigmas, more=st.floats(1e-6, 5.0), log_half=windows, wider=st.floats(1e-6, 5.0))
def test_errors_fall_with_distance_and_rise_with_the_window(
    z: float, more: float, log_half: float, wider: float
) -> None:
    half = np.exp(log_half)
    near, far = log_error_probability([z, z + more], 1.0, half)
    assert far <= near
    near, far = log_unresolved_probability([abs(z), abs(z) + more], 1.0, log_half)
    assert far <= near + 1e-12 * abs(near)
    for found in (
        log_unresolved_probability(z, 1.0, [log_half, log_half + wider]),
        log_unresolved_probability_uniform(10.0, 1.0, [log_half, log_half + wider]),
        log_error_probability_uniform(10.0, 1.0, np.exp([log_half, log_half + wider]), z),
    ):
        assert found[0] <= found[1] + 1e-12
