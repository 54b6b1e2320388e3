"""Regeneration formulas against published values, integrals and simulated converters."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from scipy.integrate import quad

from behavgen.formulas.metastability import (
    MEAN_LOG_DELAY_AT_BALANCE,
    VARIANCE_LOG_DELAY_AT_BALANCE,
    mean_time_between_failures,
    metastable_window,
    regeneration_delay,
    regeneration_tau,
    sar_easy_regeneration,
    sar_regeneration,
    saturating_latch_delay,
    unresolved_probability_at_balance,
    unresolved_probability_uniform,
)

# IEEE Solid-State Circuits Magazine, Summer 2019, Table 1
SAR = json.loads((Path(__file__).parents[1] / "published" / "sar_regeneration.json").read_text())


def test_regeneration_of_1_mv_to_half_a_volt() -> None:
    # tau ln(V/V0): 10 fF, 1 mS, 1 mV to 0.5 V (arithmetic of Veendrick's law)
    tau_s = regeneration_tau(10e-15, 1e-3)
    assert float(tau_s) == pytest.approx(10e-12)
    assert float(regeneration_delay(1e-3, tau_s, 0.5)) == pytest.approx(62.146e-12, abs=5e-16)


def test_no_delay_beyond_the_logic_level() -> None:
    np.testing.assert_array_equal(regeneration_delay([0.5, 0.7], 1e-11, 0.5), 0.0)
    np.testing.assert_array_equal(saturating_latch_delay([0.5, 0.7], 1e-11, 0.5, 0.2), 0.0)


@pytest.mark.parametrize(
    ("initial_v", "delay_s"), [(1e-3, 70.9841e-12), (10e-3, 47.9541e-12), (100e-3, 24.5191e-12)]
)
def test_saturating_latch(initial_v: float, delay_s: float) -> None:
    # Closed form, tau 10 ps, 0.5 V, Vs 0.2 V; equals quadrature, see below.
    found_s = float(saturating_latch_delay(initial_v, 10e-12, 0.5, 0.2))
    assert found_s == pytest.approx(delay_s, abs=1e-16)


def test_saturating_latch_solves_its_differential_equation() -> None:
    for initial_v in (1e-3, 0.03, 0.2):
        time_in_tau, _ = quad(
            lambda v: 1.0 / (0.2 * np.tanh(v / 0.2)), initial_v, 0.5, epsabs=1e-12
        )
        assert float(saturating_latch_delay(initial_v, 1.0, 0.5, 0.2)) == pytest.approx(
            time_in_tau, rel=1e-9
        )


def test_saturating_latch_becomes_linear_far_below_saturation() -> None:
    initial_v = np.array([1e-6, 1e-3, 0.1])
    linear = regeneration_delay(initial_v, 1e-11, 0.5)
    np.testing.assert_allclose(
        saturating_latch_delay(initial_v, 1e-11, 0.5, 1e4), linear, rtol=1e-8
    )


def test_saturating_latch_survives_deep_saturation() -> None:
    # sinh(x) = exp(x)/2: the delay is the difference of voltages over Vs.
    found = float(saturating_latch_delay(1.0, 1.0, 2.0, 1e-3))
    assert found == pytest.approx(1000.0, rel=1e-12)


def test_window_is_the_delay_read_the_other_way() -> None:
    # An input is unresolved at t if regeneration from it takes longer than t.
    tau_s, logic_v, t_s = 12e-12, 0.6, 150e-12
    half_v = 0.5 * float(metastable_window(t_s, tau_s, 2.0 * logic_v))
    assert float(regeneration_delay(half_v, tau_s, logic_v)) == pytest.approx(t_s)


def test_probability_of_a_uniform_input() -> None:
    np.testing.assert_allclose(
        unresolved_probability_uniform([1e-6, 0.1, 3.0], 1.0), [1e-6, 0.1, 1]
    )


def test_probability_at_balance() -> None:
    # Within one, two and three sigmas of the mean: 68.27, 95.45 and 99.73 % (any normal table).
    share = unresolved_probability_at_balance([2e-3, 4e-3, 6e-3], 1e-3)
    np.testing.assert_allclose(share, [0.682689, 0.954500, 0.997300], atol=1e-6)
    # A narrow window collects its width times the density at the centre.
    narrow = float(unresolved_probability_at_balance(1e-9, 1e-3))
    assert narrow == pytest.approx(1e-6 / np.sqrt(2.0 * np.pi), rel=1e-9)


def test_mean_time_between_failures() -> None:
    # exp(30) / (100 ps x 1 GHz x 100 MHz) by hand
    found_s = float(mean_time_between_failures(300e-12, 10e-12, 100e-12, 1e9, 1e8))
    assert found_s == pytest.approx(np.exp(30.0) / 1e7, rel=1e-12)
    assert float(mean_time_between_failures(1e-6, 1e-12, 1e-10, 1e9, 1e8)) == np.inf


def test_mean_extra_delay_at_balance() -> None:
    # 0.63518 and pi^2/8: moments of -ln|z| by quadrature
    def moment(power: int, centre: float = 0.0) -> float:
        def integrand(z: float) -> float:
            return (-np.log(z) - centre) ** power * np.exp(-0.5 * z * z) * np.sqrt(2.0 / np.pi)

        return sum(quad(integrand, *ends, limit=200)[0] for ends in ((0.0, 1.0), (1.0, 40.0)))

    assert pytest.approx(0.63518, abs=5e-6) == MEAN_LOG_DELAY_AT_BALANCE
    assert pytest.approx(moment(1), rel=1e-7) == MEAN_LOG_DELAY_AT_BALANCE
    variance = moment(2, MEAN_LOG_DELAY_AT_BALANCE)
    assert pytest.approx(variance, rel=1e-7) == VARIANCE_LOG_DELAY_AT_BALANCE


def test_easy_decisions_of_an_asynchronous_converter_round_to_the_published_table() -> None:
    table = {int(bits): tau for bits, tau in SAR["sar_easy_regeneration_tau"].items()}
    assert len(table) == 9
    found = {bits: round(float(sar_easy_regeneration(bits))) for bits in table}
    assert found == table


@pytest.mark.parametrize("bits", [6, 10])
def test_converter_formulas_against_a_simulated_converter(bits: int) -> None:
    """Binary search of random inputs, each decision costing ln(full scale / distance)."""
    rng = np.random.default_rng(20190701)
    residue = rng.uniform(-0.5, 0.5, 200_000)
    cost = np.empty((bits, residue.size))
    for i in range(bits):
        cost[i] = -np.log(np.abs(residue))
        residue = residue - np.sign(residue) * 2.0 ** -(i + 2)
    every = cost.sum(axis=0)
    easy = every - cost.max(axis=0)
    # The end codes, neglected by the formula, cost ln2 once in 2^(bits-1) conversions.
    allowed = 4.0 * every.std() / np.sqrt(every.size) + np.log(2.0) / 2 ** (bits - 1)
    assert every.mean() == pytest.approx(float(sar_regeneration(bits)), abs=allowed)
    assert easy.mean() == pytest.approx(float(sar_easy_regeneration(bits)), abs=allowed)
