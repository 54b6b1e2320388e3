"""Noise formulas against published and closed-form values."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from scipy.constants import Boltzmann
from scipy.special import ndtr

from behavgen.formulas.noise import (
    BOLTZMANN_J_PER_K,
    Z_BEST_FOR_BOTH,
    Z_BEST_FOR_OFFSET,
    Z_BEST_FOR_SIGMA,
    decision_information,
    error_rate,
    flash_yield,
    kt_over_c_noise,
    sigma_for_flash_yield,
    sigmas_for_error_rate,
)

# Closed forms and numerical maxima of the probit information, computed independently.
FISHER = json.loads((Path(__file__).parents[1] / "published" / "fisher_power.json").read_text())


@pytest.mark.parametrize(
    ("capacitance_f", "noise_v"),
    [(10e-15, 643.58e-6), (100e-15, 203.518e-6), (1e-12, 64.358e-6)],
)
def test_sampled_noise_at_300_k(capacitance_f: float, noise_v: float) -> None:
    # sqrt(k T / C) with the CODATA 2018 Boltzmann constant
    assert float(kt_over_c_noise(capacitance_f, 300.0)) == pytest.approx(noise_v, rel=1e-5)


def test_boltzmann_constant_is_the_si_definition() -> None:
    assert Boltzmann == BOLTZMANN_J_PER_K


@pytest.mark.parametrize(("rate", "z"), [(1e-12, 7.03448), (1e-15, 7.94135)])
def test_error_rates_in_sigmas(rate: float, z: float) -> None:
    # Published normal quantiles.
    assert float(sigmas_for_error_rate(rate)) == pytest.approx(z, abs=5e-6)
    assert float(error_rate(z)) == pytest.approx(rate, rel=1e-4)


def test_a_balanced_input_errs_half_the_time() -> None:
    assert float(error_rate(0.0)) == 0.5


@pytest.mark.parametrize(
    ("bits", "sigma"), [(4, 0.14699), (6, 0.13242), (8, 0.12162), (10, 0.11310)]
)
def test_flash_converter_yield_of_99_percent(bits: int, sigma: float) -> None:
    # Roots of [1 - 2 Q(0.5/sigma)]^(2^N - 1) = 0.99
    assert float(sigma_for_flash_yield(0.99, bits)) == pytest.approx(sigma, abs=1e-5)  # last digit
    assert float(flash_yield(sigma, bits)) == pytest.approx(0.99, abs=2e-5)


def test_information_at_the_trip_point_is_two_over_pi() -> None:
    information = decision_information(0.0)
    np.testing.assert_allclose(information, [[2.0 / np.pi, 0.0], [0.0, 0.0]], atol=1e-15)
    assert FISHER["w0"] == pytest.approx(2.0 / np.pi)


def test_information_is_the_mean_square_score() -> None:
    # E[(d ln P / d theta)^2] over both outcomes, by finite differences of the law itself.
    h = 1e-5
    for z in (-2.0, -0.3, 0.0, 1.1, 2.7):

        def share(offset: float, sigma: float, z: float = z) -> float:
            return float(ndtr((z - offset) / sigma))

        slopes = [
            (share(h, 1.0) - share(-h, 1.0)) / (2.0 * h),
            (share(0.0, 1.0 + h) - share(0.0, 1.0 - h)) / (2.0 * h),
        ]
        p = share(0.0, 1.0)
        expected = np.outer(slopes, slopes) / (p * (1.0 - p))
        np.testing.assert_allclose(decision_information(z), expected, rtol=1e-6, atol=1e-9)


def test_best_levels() -> None:
    assert Z_BEST_FOR_OFFSET == 0.0
    assert pytest.approx(FISHER["z_sigma"], abs=1e-9) == Z_BEST_FOR_SIGMA
    assert pytest.approx(FISHER["z_D"], abs=1e-9) == Z_BEST_FOR_BOTH
    z = np.linspace(0.0, 4.0, 40001)
    information = decision_information(z)
    on_offset, on_sigma = information[:, 0, 0], information[:, 1, 1]
    assert z[np.argmax(on_offset)] == Z_BEST_FOR_OFFSET
    assert z[np.argmax(on_sigma)] == pytest.approx(Z_BEST_FOR_SIGMA, abs=1e-4)
    assert z[np.argmax(on_offset * on_sigma)] == pytest.approx(Z_BEST_FOR_BOTH, abs=1e-4)
    assert on_sigma.max() == pytest.approx(FISHER["wz2_sigma"], rel=1e-8)


@pytest.mark.parametrize("design", FISHER["designs"], ids=lambda design: design["name"])
def test_published_designs(design: dict[str, object]) -> None:
    """Lowest variances per decision of sets of levels, as tabulated."""
    name = str(design["name"])
    covariance = np.linalg.inv(decision_information(_levels(name)).mean(axis=0))
    assert covariance[0, 0] == pytest.approx(design["nvar_mu"], rel=1e-6)
    assert covariance[1, 1] == pytest.approx(design["nvar_sigma"], rel=1e-6)
    correlation = covariance[0, 1] / np.sqrt(covariance[0, 0] * covariance[1, 1])
    assert abs(correlation) == pytest.approx(abs(design["corr"]), abs=1e-6)


def _levels(name: str) -> np.ndarray:
    if name.startswith("2pt"):
        z = Z_BEST_FOR_BOTH if " D " in name else Z_BEST_FOR_SIGMA
        return np.array([-z, z])
    if name.startswith("3pt"):
        return np.array([-1.5, 0.0, 1.5])
    points, span = name.split()[:2]
    low, high = (float(end) for end in span.split(".."))
    shift = float(name.split("shifted")[1].replace("by", "").split()[0]) if "shifted" in name else 0
    return np.linspace(low, high, int(points.removesuffix("pt"))) + shift
