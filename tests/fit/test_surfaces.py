"""Surfaces recovered from known truths, and honest about what they have not seen."""

import itertools

import numpy as np
import pytest

from behavgen.fit.surface_changes import difference_by_left_out
from behavgen.fit.surface_forms import axis_powers, design
from behavgen.fit.surfaces import choose_by_left_out, choose_by_likelihood

GRID = np.array(list(itertools.product((233.15, 300.15, 398.15), (1.08, 1.2, 1.32), (0.5, 0.65))))
NOWHERE = np.nan


def truth(values):
    temperature, vdd, vcm = values.T
    return 0.4 * vdd**-2 + 200.0 / temperature + 0.5 * vcm - 0.1 * vcm / vdd**2


def test_a_surface_of_the_family_is_recovered_between_its_points():
    fit = choose_by_left_out(GRID, truth(GRID)[:, None])
    rng = np.random.default_rng(2)
    between = GRID.min(axis=0) + rng.uniform(size=(200, 3)) * np.ptp(GRID, axis=0)
    assert fit.predict(between)[:, 0] == pytest.approx(truth(between), abs=2e-4)


def test_left_out_errors_are_those_of_refits():
    rng = np.random.default_rng(3)
    values = np.column_stack([np.full(14, 300.0), rng.uniform(1.0, 1.4, 14), np.full(14, NOWHERE)])
    targets = np.exp(-2.0 * values[:, 1:2]) + 0.01 * rng.normal(size=(14, 1))
    fit = choose_by_left_out(values, targets)
    for i in (0, 5, 13):
        others = np.arange(14) != i
        refit = choose_by_left_out(values[others], targets[others])
        expected = refit.predict(values[i : i + 1]) - targets[i]
        # The axis of a refit is normalised to the range of its own conditions.
        assert fit.left_out[i] == pytest.approx(expected[0], abs=2e-3)


def test_levels_limit_the_powers():
    assert axis_powers(GRID) == {"temperature_k": 2, "vdd_v": 2, "vcm_v": 1}


def test_conditions_that_hold_everywhere_make_no_axis():
    values = np.array([[NOWHERE, 1.0, 0.5], [NOWHERE, 1.2, 0.5]])
    assert axis_powers(values) == {"vdd_v": 1}


def test_a_star_of_conditions_gets_no_cross_terms():
    star = np.array(
        [[300, 1.2, 0.6], [233, 1.2, 0.6], [398, 1.2, 0.6], [300, 1.08, 0.6], [300, 1.2, 0.5]],
        dtype=float,
    )
    fit = choose_by_left_out(star, truth(star)[:, None])
    assert all(sum(power > 0 for power in term) <= 1 for term in fit.form.exponents)


def test_a_single_condition_is_a_constant():
    fit = choose_by_left_out(np.array([[300.0, 1.2, 0.6]]), np.array([[2.5]]))
    assert fit.form.axes == ()
    assert fit.predict(np.array([[400.0, 9.0, 0.1]]))[0, 0] == pytest.approx(2.5, rel=1e-6)
    assert np.isnan(fit.left_out).all()


def test_noisy_constants_stay_constant():
    rng = np.random.default_rng(5)
    constants = 0
    for _ in range(200):
        target = 1.0 + 0.1 * rng.normal(size=len(GRID))
        fit = choose_by_likelihood(GRID, target, np.full(len(GRID), 0.01))
        constants += len(fit.form.exponents) == 1
    # A likelihood criterion with a margin of 2 keeps most true constants constant.
    assert constants > 150


def test_a_clear_slope_in_noisy_values_is_seen():
    rng = np.random.default_rng(6)
    slope = (GRID[:, 1] - 1.2) / 0.12
    target = 1.0 + 0.5 * slope + 0.05 * rng.normal(size=len(GRID))
    fit = choose_by_likelihood(GRID, target, np.full(len(GRID), 0.05**2))
    ends = np.array([[300.0, 1.08, 0.6], [300.0, 1.32, 0.6]])
    low, high = fit.predict(ends)[:, 0]
    # Standard error of the slope over 18 points is 0.05 / sqrt(12); five of them.
    assert high - low == pytest.approx(1.0, abs=2 * 5 * 0.05 / np.sqrt(12))


def test_a_process_measured_once_is_shifted():
    fit = choose_by_left_out(GRID, truth(GRID)[:, None])
    once = GRID[7:8]
    shift = difference_by_left_out(fit, once, truth(once)[:, None] + 0.3)
    moved = design(fit.form, GRID) @ (fit.coefficients + shift)
    assert moved[:, 0] == pytest.approx(truth(GRID) + 0.3, abs=1e-3)


def test_a_process_measured_everywhere_gets_its_own_slopes():
    fit = choose_by_left_out(GRID, truth(GRID)[:, None])
    other = truth(GRID) + 0.2 + 0.3 / GRID[:, 1] ** 2
    change = difference_by_left_out(fit, GRID, other[:, None])
    found = design(fit.form, GRID) @ (fit.coefficients + change)
    assert found[:, 0] == pytest.approx(other, abs=2e-3)


def test_two_conditions_foresee_each_other_as_well_as_they_agree():
    # ln of delays in seconds: far from zero, close to each other.
    values = np.array([[300.0, 0.9, 0.5], [300.0, 1.1, 0.5]])
    targets = np.array([[-23.0, -22.0], [-23.1, -22.2]])
    left_out = choose_by_left_out(values, targets).left_out
    assert np.abs(left_out) == pytest.approx(np.array([[0.1, 0.2]] * 2), rel=1e-3)
