"""Aperture: centre and width of known weights."""

from functools import partial

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.special import ndtr

from behavgen.errors import FitError
from behavgen.fit.aperture import fall_between, fit_aperture, weight_centre
from tests.fit.effect_tables import aperture_table, latch_column, latch_where

close = partial(pytest.approx, rel=1e-6, abs=0.0)
"""Relative only: what is compared here is far below the usual absolute tolerance."""

PS = 1e-12


def parameters(fit):
    return {p.name: p.estimate.value for p in fit.parameters}


def test_a_rectangular_weight_is_exact():
    time_s = np.array([0.0, 10.0, 20.0, 30.0, 40.0]) * PS
    weight = np.array([1.0, 1.0, 0.5, 0.0, 0.0])
    assert weight_centre(time_s, weight) == close(20 * PS)
    assert fall_between(time_s, weight, 0.9, 0.1) == close(16 * PS)


def test_a_weight_that_ends_at_the_lower_level():
    time_s, weight = np.array([0.0, 10.0, 20.0]) * PS, np.array([0.9, 0.5, 0.1])
    assert fall_between(time_s, weight, 0.9, 0.1) == close(20 * PS)


def test_rows_at_the_same_time_are_averaged():
    time_s, weight = np.array([0.0, 10.0, 10.0, 20.0]) * PS, [1.0, 0.4, 0.6, 0.0]
    (fit,) = fit_aperture(aperture_table(time_s, weight), ("nominal",)).fits
    assert parameters(fit)["aperture_width_s"] == close(16 * PS)


def test_weight_beyond_the_rows_is_left_out_of_the_centre():
    time_s, weight = np.array([0.0, 10.0, 20.0]) * PS, np.array([0.95, 0.5, 0.05])
    assert weight_centre(time_s, weight) == close(10 * PS)


def test_a_gaussian_weight():
    # 10 % to 90 % of a Gaussian: 2 * 1.28155 sigma (standard tables).
    time_s = np.linspace(-100, 200, 601) * PS
    weight = ndtr((45 * PS - time_s) / (20 * PS))
    assert weight_centre(time_s, weight) == close(45 * PS, rel=1e-5)
    assert fall_between(time_s, weight, 0.9, 0.1) == close(2 * 1.28155 * 20 * PS, rel=1e-4)


def test_the_mean_of_a_lopsided_weight_is_not_its_median():
    # Exponential weight after the edge: mean tau, median tau ln 2.
    time_s = np.linspace(0, 400, 4001) * PS
    weight = np.exp(-time_s / (20 * PS))
    assert weight_centre(time_s, weight) == close(20 * PS, rel=1e-3)


@given(st.floats(-1e-10, 1e-10), st.floats(0.1, 10.0))
def test_the_centre_moves_and_stretches_with_time(shift_s, factor):
    time_s = np.array([0.0, 4.0, 9.0, 11.0, 30.0]) * PS
    weight = np.array([1.0, 0.93, 0.5, 0.2, 0.0])
    moved = weight_centre(factor * time_s + shift_s, weight)
    expected = factor * weight_centre(time_s, weight) + shift_s
    assert moved == pytest.approx(expected, abs=1e-20)


def test_an_evenly_moving_input_counts_as_it_stands_at_the_centre():
    # Share after each time of a lopsided density; the input weighed by the density, term by term.
    edges = np.array([0.0, 5.0, 8.0, 20.0, 60.0]) * PS
    share = np.array([0.1, 0.4, 0.3, 0.2])
    middle = 0.5 * (edges[1:] + edges[:-1])
    input_v = 2.0 + 3e9 * middle
    centre = weight_centre(edges, np.append(1.0, 1.0 - np.cumsum(share)))
    assert 2.0 + 3e9 * centre == close(share @ input_v)


def test_the_latch_weighs_its_input_after_the_edge():
    table = aperture_table(
        latch_column("aperture", "t_step_rel_clk_s"),
        latch_column("aperture", "weight_after"),
        latch_column("aperture", "step_V"),
        **latch_where("aperture"),
    )
    found = fit_aperture(table, ("tt",))
    assert len(found.fits) == 3
    assert [fit.rows for fit in found.fits] == [42, 21, 21]
    centres = [parameters(fit)["aperture_centre_s"] / PS for fit in found.fits]
    widths = [parameters(fit)["aperture_width_s"] / PS for fit in found.fits]
    # Half of the weight lies after 45 ps, 22.5 ps and 46 ps (read off the table): the mean of the
    # weight, whose later half is longer, lies a little after its median.
    assert all(0.0 < c - m < 4.0 for c, m in zip(centres, (45.0, 22.5, 46.0), strict=True))
    assert widths == close([64, 23, 65], abs=1.5)
    assert found.notices == ()


def test_steps_of_other_heights_are_averaged_and_differences_told():
    time_s = np.tile(np.array([0.0, 10.0, 20.0]) * PS, 2)
    weight = np.array([1.0, 0.5, 0.0, 1.0, 0.8, 0.0])
    found = fit_aperture(aperture_table(time_s, weight, [0.01] * 3 + [0.1] * 3), ("nominal",))
    (fit,) = found.fits
    assert parameters(fit)["aperture_centre_s"] == close(11.5 * PS)
    assert any("height of the step" in notice for notice in found.notices)


def test_conditions_get_a_surface_in_seconds():
    time_s = np.tile(np.array([-10.0, 0.0, 10.0, 20.0]) * PS, 3)
    vcm = np.repeat([0.5, 0.6, 0.7], 4)
    weight = np.tile([1.0, 1.0, 0.5, 0.0], 3)
    later = 20 * PS * (vcm - 0.5) / 0.2
    found = fit_aperture(aperture_table(time_s + later, weight, vcm=vcm), ("nominal",))
    (axis,) = found.effect.centre.axes
    assert axis.condition == "vcm_v"
    assert found.effect.centre.variants[0].coefficients == close([20 * PS, 10 * PS], rel=1e-3)


def test_a_weight_that_is_not_followed_through_is_left_out_or_refused():
    time_s = np.array([0.0, 10.0, 20.0, 0.0, 10.0, 20.0]) * PS
    weight = [1.0, 0.5, 0.0, 1.0, 0.7, 0.4]
    found = fit_aperture(
        aperture_table(time_s, weight, temperature=[300.0] * 3 + [350.0] * 3), ("nominal",)
    )
    assert len(found.fits) == 1
    assert any("left out" in notice for notice in found.notices)
    with pytest.raises(FitError, match=r"0\.9 or more"):
        fit_aperture(aperture_table(time_s[3:], weight[3:]), ("nominal",))
