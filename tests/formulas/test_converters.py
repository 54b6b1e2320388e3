"""Closed forms of converters against published values, quadrature and each other."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from scipy import integrate, stats

from behavgen.formulas.converters import (
    effective_bits,
    flash_noise_power,
    flash_yield,
    sar_easy_regeneration_taus,
    sar_noise_power,
    small_noise_power,
    unresolved_share,
)

PUBLISHED = json.loads(
    (Path(__file__).parents[1] / "published" / "sar_regeneration.json").read_text()
)


@pytest.mark.parametrize(("bits", "taus"), PUBLISHED["sar_easy_regeneration_tau"].items())
def test_the_published_regeneration_times(bits, taus):
    # IEEE Solid-State Circuits Magazine, Summer 2019, Table 1
    assert round(sar_easy_regeneration_taus(int(bits))) == taus


@pytest.mark.parametrize(
    ("bits", "sigma"), [(4, 0.14699), (6, 0.13242), (8, 0.12162), (10, 0.11310)]
)
def test_a_yield_of_99_percent(bits, sigma):
    # [1 - 2 Q(0.5 LSB / sigma)]^(2^N - 1) = 0.99, solved independently to five digits
    assert flash_yield(sigma, bits) == pytest.approx(0.99, abs=2e-5)


def test_ideal_converters_have_all_their_bits():
    # W. R. Bennett, Bell System Technical Journal 27, 1948: LSB^2 / 12
    assert flash_noise_power(0.0) == pytest.approx(1.0 / 12.0, abs=1e-12)
    assert sar_noise_power(0.0, 6) == pytest.approx(1.0 / 12.0, rel=1e-3)
    assert effective_bits(8, 1.0 / 12.0) == pytest.approx(8.0)
    assert effective_bits(8, 4.0 / 12.0) == pytest.approx(7.0)


def test_little_noise_adds_its_own_power():
    for sigma in (0.05, 0.1, 0.15):
        assert flash_noise_power(sigma) == pytest.approx(small_noise_power(sigma), rel=1e-3)
        assert sar_noise_power(sigma, 8) == pytest.approx(small_noise_power(sigma), rel=5e-3)


@pytest.mark.parametrize("sigma", [0.2, 0.6, 1.3])
def test_flash_noise_is_what_quadrature_says(sigma):
    thresholds = np.arange(-30.0, 31.0)

    def error_power(x):
        p = stats.norm.cdf((x - thresholds) / sigma)
        # Of a count with that many thresholds below the range, 30.5 steps from its middle
        return np.sum(p * (1.0 - p)) + (np.sum(p) - 30.5 - x) ** 2

    expected = integrate.quad(error_power, 0.0, 1.0, epsabs=1e-10)[0]
    assert flash_noise_power(sigma) == pytest.approx(expected, rel=1e-8)


def test_sar_noise_is_what_a_plain_simulation_says():
    rng = np.random.default_rng(9)
    bits, sigma, count = 5, 0.7, 200_000
    x = rng.uniform(0.0, 32.0, count)
    code = np.zeros(count)
    for bit in range(bits - 1, -1, -1):
        code += 2.0**bit * (x + sigma * rng.standard_normal(count) > code + 2.0**bit)
    power = (code + 0.5 - x) ** 2
    error = power.std() / np.sqrt(count)
    assert abs(power.mean() - sar_noise_power(sigma, bits)) < 4.0 * error  # false alarm 6e-5


def test_every_threshold_has_its_window():
    # Three thresholds of 1 mV in a full scale of 4 x 10 mV
    assert unresolved_share(1e-3, 10e-3, 2) == pytest.approx(3e-3 / 40e-3)
