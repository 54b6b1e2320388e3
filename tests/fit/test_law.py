"""Delay laws recovered from independent latches."""

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.special import stdtrit

from behavgen.fit.law import fit_law
from behavgen.fit.law_solution import DelayRows
from behavgen.formulas.node_law import node_law_delay

OVERDRIVE_V = np.geomspace(1e-6, 0.3, 25)


def rows_of(*delays):
    delay_s = np.array(delays)
    return DelayRows(
        overdrive_v=np.broadcast_to(OVERDRIVE_V, delay_s.shape).copy(),
        delay_s=delay_s,
        weight=np.ones_like(delay_s),
    )


def fitted(fit, condition=0):
    tau, *nodes = fit.parameters[condition]
    return node_law_delay(OVERDRIVE_V, fit.log_node, np.array(tau), np.array(nodes))


def saturating_latch(tau_s):
    """Return t = tau ln[sinh(V_L/Vs) / sinh(V0/Vs)]: closed form for i = I tanh(v/Vs)."""
    return tau_s * np.log(np.sinh(0.5 / 0.2) / np.sinh(OVERDRIVE_V / 0.2))


def test_saturating_latch_closed_form_is_recovered():
    # tau 10 ps, V_L 0.5 V, Vs 0.2 V: 1 mV takes 70.9841 ps (closed form, equals quadrature).
    exact = saturating_latch(10e-12)
    fit = fit_law(rows_of(exact, saturating_latch(37e-12)))
    assert fit.parameters[:, 0] == pytest.approx([10e-12, 37e-12], rel=2e-4)
    assert fitted(fit) == pytest.approx(exact, rel=5e-3)
    tau, *nodes = fit.parameters[0]
    at_1_mv = node_law_delay(np.array([1e-3]), fit.log_node, np.array(tau), np.array(nodes))
    assert at_1_mv[0] == pytest.approx(70.9841e-12, rel=1e-3)


def two_node_latch(overdrive_v, gm_s=1.2e-3, c_f=12e-15, limit_v=0.35):
    """Integrate two cross-coupled saturating stages after a tail current has charged them.

    An independent circuit: both node voltages fall together while the tail current
    integrates, and regenerate through tanh transconductances. Returns the time of
    half a volt of separation.
    """

    def slope(t, v):
        on = -np.expm1(-t / 8e-12)
        drive = gm_s * limit_v
        return (
            np.array(
                [
                    -drive * np.tanh(v[1] / limit_v) + 0.4 * gm_s * overdrive_v * on,
                    -drive * np.tanh(v[0] / limit_v) - 0.4 * gm_s * overdrive_v * on,
                ]
            )
            / c_f
        )

    def separated(t, v):
        return v[0] - v[1] - 0.5

    separated.terminal = True
    found = solve_ivp(
        slope, (0.0, 2e-9), [0.0, 0.0], events=separated, rtol=1e-10, atol=1e-16, method="LSODA"
    )
    return found.t_events[0][0]


def test_integrated_latch_is_recovered_with_the_tau_of_its_linearisation():
    exact = np.array([two_node_latch(v) for v in OVERDRIVE_V])
    fit = fit_law(rows_of(exact))
    # The differential mode of the linearised equations grows with tau = C / gm = 10 ps.
    assert fit.parameters[0, 0] == pytest.approx(10e-12, rel=1e-3)
    error = fitted(fit) / exact - 1.0
    assert np.sqrt(np.mean(error**2)) < 5e-3
    assert np.abs(error).max() < 2e-2


def test_a_logarithmic_table_needs_a_single_node():
    fit = fit_law(rows_of(50e-12 + 12e-12 * np.log(0.4 / OVERDRIVE_V)))
    assert fit.chosen.name == "logarithmic law"
    assert fit.parameters[0] == pytest.approx([12e-12, 50e-12 + 12e-12 * np.log(0.4 / 0.3)])


def test_left_out_error_predicts_fresh_rows():
    # Generalised cross-validation estimates the error at new rows of the same kind.
    rng = np.random.default_rng(12)
    exact = saturating_latch(10e-12)
    noisy, fresh = exact * (1.0 + 0.002 * rng.normal(size=(2, 400, len(exact))))
    fit = fit_law(rows_of(*noisy))
    model = np.array([fitted(fit, c) for c in range(400)])
    seen = np.sqrt(np.mean((model / fresh - 1.0) ** 2))
    assert fit.chosen.left_out == pytest.approx(seen, rel=0.1)


def test_tau_and_delays_are_estimated_without_bias_from_noisy_delays():
    rng = np.random.default_rng(4)
    exact = saturating_latch(10e-12)
    noisy = exact * (1.0 + 0.002 * rng.normal(size=(2000, len(exact))))
    fit = fit_law(rows_of(*noisy))
    tau = fit.parameters[:, 0]
    # Fixed seed; the mean of 2000 fits lies within 4 of its standard errors plus the law's bias.
    assert abs(tau.mean() - 10e-12) < 4 * tau.std() / np.sqrt(2000) + 1e-3 * 10e-12


@pytest.mark.slow
def test_intervals_of_tau_cover():
    # 95 % intervals cover 94..96 % over 4000 replicates (3 standard errors are 1 %).
    rng = np.random.default_rng(8)
    exact = saturating_latch(10e-12)
    noisy = exact * (1.0 + 0.002 * rng.normal(size=(4000, len(exact))))
    fit = fit_law(rows_of(*noisy))
    error = np.sqrt(fit.covariance[:, 0, 0])
    covered = np.abs(fit.parameters[:, 0] - 10e-12) < stdtrit(fit.freedom, 0.975) * error
    assert 0.94 <= covered.mean() <= 0.96


def test_nodes_always_fall_even_where_a_table_rises():
    bumpy = 100e-12 + 10e-12 * np.sin(np.arange(25.0))
    fit = fit_law(rows_of(bumpy, saturating_latch(10e-12)))
    assert (np.diff(fit.parameters[:, 1:], axis=1) < 0.0).all()
    assert (fit.parameters > 0.0).all()
