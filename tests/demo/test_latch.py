"""The invented latch against closed forms and an independent solver."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.optimize import brentq

from behavgen.demo import measurements
from behavgen.demo.latch import (
    SENSE_LATCH,
    Circuit,
    Mismatch,
    Operating,
    circuit_at,
    clock_rise,
    node_slopes,
    separation,
    steering,
)

BOLTZMANN_J_PER_K = 1.380649e-23  # CODATA 2018


def _nominal(temperature_k: float = 300.15, mismatch: Mismatch | None = None) -> Circuit:
    one = np.ones((1, 1))
    at = Operating(
        vdd_v=1.0 * one,
        temperature_k=temperature_k * one,
        vcm_v=0.6 * one,
        threshold_shift_v=0.0 * one,
        drive_factor=1.0 * one,
    )
    return circuit_at(SENSE_LATCH, at, mismatch)


@pytest.fixture(scope="module")
def circuit() -> Circuit:
    return _nominal()


@pytest.fixture(scope="module")
def trip_v(circuit: Circuit) -> np.ndarray:
    return measurements.trip_point(circuit, span_v=0.02, passes=7, until_s=600e-12)


@pytest.mark.parametrize("overdrive_v", [1e-5, -1e-3, 0.02, 0.3])
def test_delay_equals_that_of_an_adaptive_solver(circuit, trip_v, overdrive_v):
    vdiff_v = trip_v + overdrive_v
    shares = steering(circuit, vdiff_v)

    def slopes(time_s: float, nodes_v: np.ndarray) -> np.ndarray:
        return node_slopes(circuit, shares, clock_rise(time_s), nodes_v.reshape(2, 1, 1)).ravel()

    def reached(_time_s: float, nodes_v: np.ndarray) -> float:
        return float(abs(nodes_v[0] - nodes_v[1]) - 0.5)

    reached.terminal = True
    solution = solve_ivp(
        slopes,
        (-80e-12, 400e-12),
        [0.0, 0.0],
        method="DOP853",
        rtol=1e-11,
        atol=1e-14,
        max_step=2e-12,
        events=reached,
    )
    delay_s = measurements.decision_delay(circuit, vdiff_v, watched_s=400e-12)
    assert delay_s[0, 0] == pytest.approx(solution.t_events[0][0], rel=1e-6)


def test_delay_tail_has_the_time_constant_of_the_balanced_equilibrium(circuit, trip_v):
    """The slope of delay over ln(overdrive) is one over the growing eigenvalue (Veendrick 1980)."""
    shares = steering(circuit, trip_v)

    def slopes(nodes_v: list[float]) -> np.ndarray:
        return node_slopes(circuit, shares, 1.0, np.array(nodes_v).reshape(2, 1, 1)).ravel()

    balanced_v = brentq(lambda v: slopes([v, v])[0], 0.3, 0.9)
    for _ in range(20):  # the two sides differ a little: Newton from the symmetric point
        at = np.array([balanced_v, balanced_v]) if np.isscalar(balanced_v) else balanced_v
        jacobian = np.column_stack(
            [(slopes(at + step) - slopes(at - step)) / 2e-6 for step in 1e-6 * np.eye(2)]
        )
        balanced_v = at - np.linalg.solve(jacobian, slopes(at))
    tau_s = 1 / np.linalg.eigvals(jacobian).real.max()
    overdrives_v = np.array([[1e-6, 1e-5]])
    delay_s = measurements.decision_delay(circuit, trip_v + overdrives_v, watched_s=400e-12)
    assert (delay_s[0, 0] - delay_s[0, 1]) / np.log(10) == pytest.approx(tau_s, rel=1e-3)


def test_noise_of_outputs_held_in_reset_is_kt_over_c():
    """300 K and 10 fF give 643.58 uV (kT/C); the step of the solver adds up to 1 %.

    Of 20 000 runs the sample deviation strays by more than 2 % with probability 6e-5.
    """
    circuit = _nominal(temperature_k=300.0)
    times_s = np.arange(0.0, 150e-12, 0.5e-12)
    separated_v = separation(
        circuit,
        np.zeros((1, 20_000)),
        times_s,
        clock=lambda _: 0.0,
        noise=np.random.default_rng(7),
    )[-1, 0]
    # The difference of two independent nodes.
    assert separated_v.std() / np.sqrt(2) == pytest.approx(643.58e-6, rel=0.03)


def test_swapped_halves_and_inputs_mirror_the_waveform():
    shifts = Mismatch(pair_threshold_v=3e-3, pair_drive=0.02, latch_threshold_v=-5e-3)
    mirrored = Mismatch(pair_threshold_v=-3e-3, pair_drive=-0.02, latch_threshold_v=5e-3)
    symmetric = Mismatch()
    times_s = np.arange(-80e-12, 150e-12, 0.5e-12)
    vdiff_v = np.array([[1e-3, 0.05]])

    def waveform(mismatch: Mismatch, sign: float) -> np.ndarray:
        circuit = _nominal(mismatch=mismatch)
        even = np.full((2, 1, 1), SENSE_LATCH.capacitance_f)
        balanced = Circuit(
            **{
                name: even if name == "capacitance_f" else getattr(circuit, name)
                for name in Circuit.__slots__
            }
        )
        return separation(balanced, sign * vdiff_v, times_s)

    np.testing.assert_allclose(waveform(shifts, 1), -waveform(mirrored, -1), rtol=0, atol=1e-9)
    np.testing.assert_array_equal(waveform(symmetric, 1), -waveform(symmetric, -1))


def test_pair_threshold_difference_is_an_input_offset(trip_v):
    """A threshold in series with the input shifts the trip point by itself."""
    shifted = _nominal(mismatch=Mismatch(pair_threshold_v=4e-3))
    found_v = measurements.trip_point(shifted, span_v=0.02, passes=7, until_s=600e-12)
    assert found_v[0, 0] - trip_v[0, 0] == pytest.approx(4e-3, abs=1e-8)


def test_decision_ends_at_the_rails(circuit):
    times_s = np.arange(-80e-12, 400e-12, 0.5e-12)
    last_v = separation(circuit, np.array([[-0.1, 0.1]]), times_s)[-1, 0]
    np.testing.assert_allclose(last_v, [-1.0, 1.0], atol=2e-3)


def test_window_edges_are_inputs_that_resolve_just_then(circuit, trip_v):
    resolve_time_s = np.array([[100e-12]])
    width_v = measurements.metastable_window(circuit, resolve_time_s, trip_v, searched_span_v=0.6)
    edges_v = np.array([[-0.5, 0.5]]) * width_v
    delay_s = measurements.decision_delay(circuit, trip_v + edges_v, watched_s=200e-12)
    # The window is not quite symmetric about the trip point.
    np.testing.assert_allclose(delay_s, 100e-12, rtol=2e-3)


def test_window_wider_than_searched_is_not_a_number(circuit, trip_v):
    early_s = np.array([[20e-12]])
    assert np.isnan(
        measurements.metastable_window(circuit, early_s, trip_v, searched_span_v=0.6)
    ).all()


def test_input_noise_is_the_width_of_the_s_curve(circuit, trip_v):
    """Two ways to the same sigma: spread over gain, and the share of ones one sigma away.

    With 8000 decisions a side the sum of both tails has a standard error of 0.0058;
    the bound is four of them plus the noise picked up after the first way's reading.
    """
    sigma_v = measurements.input_noise(
        circuit, trip_v, 8000, until_s=80e-12, noise=np.random.default_rng(3)
    )[0]
    levels_v = trip_v[0, 0] + sigma_v * np.array([-1.0, 1.0])
    ones = measurements.count_ones(
        circuit, levels_v, 8000, until_s=220e-12, noise=np.random.default_rng(4)
    )[0]
    tails = (ones[0] + 8000 - ones[1]) / 8000
    assert tails == pytest.approx(2 * 0.158655, abs=0.03)  # Gaussian tail beyond one sigma
