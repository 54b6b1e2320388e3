"""The node law against closed forms, scipy's Hermite curves and its promises."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.interpolate import CubicHermiteSpline

from behavgen.formulas.node_law import node_law_basis, node_law_delay, node_slopes

LOG_NODE = np.log([1e-3, 4e-3, 2e-2, 0.1, 0.3])
NODE_S = np.array([200.0, 172.0, 131.0, 80.0, 55.0])


def test_single_node_is_linear_regeneration():
    # t = tau ln(V_logic / V0) (H. Veendrick, IEEE JSSC 1980): C 10 fF, gm 1 mS gives tau 10 ps,
    # 1 mV to 0.5 V takes 62.146 ps.
    delay = node_law_delay(np.array([1e-3]), np.log([0.5]), np.array(10e-12), np.array([0.0]))
    assert delay[0] == pytest.approx(62.146e-12, rel=1e-5)


def test_tail_is_straight_with_slope_tau():
    v = np.array([1e-12, 1e-9, 1e-6])
    delay = node_law_delay(v, LOG_NODE, np.array(20.0), NODE_S)
    assert delay == pytest.approx(200.0 + 20.0 * np.log(1e-3 / v), rel=1e-14)


def test_curve_between_nodes_is_the_cubic_hermite_curve():
    v = np.exp(np.linspace(LOG_NODE[0], LOG_NODE[-1], 200))
    slope = node_slopes(LOG_NODE, np.array(20.0), NODE_S)
    expected = CubicHermiteSpline(LOG_NODE, NODE_S, slope)(np.log(v))
    assert node_law_delay(v, LOG_NODE, np.array(20.0), NODE_S) == pytest.approx(expected, rel=1e-12)


def test_slopes_are_exact_for_a_parabola():
    x = np.array([0.0, 1.0, 2.5, 3.0])
    parabola = -(x**2) - x + 60.0
    slope = node_slopes(x, np.array(1.0), parabola)
    assert slope == pytest.approx(-2.0 * x - 1.0, rel=1e-12)


def test_delay_stays_constant_above_the_last_node():
    delay = node_law_delay(np.array([0.3, 0.5, 1e3]), LOG_NODE, np.array(20.0), NODE_S)
    assert delay == pytest.approx([55.0, 55.0, 55.0])


falls = st.lists(st.floats(1e-3, 1e3), min_size=2, max_size=9)


@settings(max_examples=300, deadline=None)
@given(falls=falls, tau=st.floats(1e-3, 1e3), last=st.floats(1e-3, 1e3))
def test_falling_nodes_give_a_falling_curve(falls, tau, last):
    node = last + np.cumsum(falls[::-1])[::-1]
    node = np.append(node, last)
    log_node = np.linspace(-7.0, 0.0, len(node))
    v = np.exp(np.linspace(-12.0, 1.0, 2000))
    delay = node_law_delay(v, log_node, np.array(tau), node)
    assert np.diff(delay).max() <= 1e-9 * delay.max()
    assert delay.min() >= last * (1.0 - 1e-12)


def test_basis_is_the_law_where_no_slope_is_limited():
    v = np.exp(np.linspace(np.log(1e-5), np.log(0.3), 60))
    parameters = np.concatenate([[20.0], NODE_S])
    expected = node_law_delay(v, LOG_NODE, np.array(20.0), NODE_S)
    assert node_law_basis(v, LOG_NODE) @ parameters == pytest.approx(expected, rel=1e-12)


def test_rows_may_have_nodes_of_their_own():
    v = np.array([1e-4, 1e-2])
    nodes = np.stack([NODE_S, 2.0 * NODE_S])
    delay = node_law_delay(v, LOG_NODE, np.array([20.0, 40.0]), nodes)
    single = node_law_delay(v, LOG_NODE, np.array(20.0), NODE_S)
    assert delay == pytest.approx(single * [1.0, 2.0])
