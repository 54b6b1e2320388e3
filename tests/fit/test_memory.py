"""Memory: known exponentials come back, bounds pull only when they must."""

from functools import partial

import numpy as np
import pytest

from behavgen.errors import FitError
from behavgen.fit.memory import fit_memory
from tests.fit.effect_tables import latch_column, latch_where, memory_table

close = partial(pytest.approx, rel=1e-6, abs=0.0)
"""Relative only: what is compared here is far below the usual absolute tolerance."""

PS = 1e-12


def exponentials(reset_s, *terms, floor=0.0):
    return floor + sum(height * np.exp(-np.asarray(reset_s) / tau) for height, tau in terms)


def value(surface, variant=0):
    """Return the value of a surface that depends on nothing."""
    assert surface.axes == ()
    return np.exp(surface.variants[variant].coefficients[0])


def fitted(reset_s, shift_v, censored=False, **where):
    return fit_memory(memory_table(reset_s, shift_v, censored, **where), ("nominal",))


def test_a_single_exponential_is_recovered():
    reset_s = np.array([60, 80, 110, 150, 200]) * PS
    found = fitted(reset_s, exponentials(reset_s, (1.5, 37 * PS)))
    (term,) = found.effect.terms
    assert found.effect.floor is None
    assert value(term.tau) == close(37 * PS, rel=1e-6)
    assert value(term.shift) == close(1.5, rel=1e-6)
    assert found.effect.cap_v == close(1.5 * np.exp(-60 / 37), rel=1e-9)
    assert found.fits[0].worst_relative < 1e-6


def test_two_exponentials_are_recovered_the_fastest_first():
    reset_s = np.linspace(20, 600, 12) * PS
    found = fitted(reset_s, exponentials(reset_s, (0.3, 25 * PS), (0.02, 140 * PS)))
    assert [value(t.tau) / PS for t in found.effect.terms] == close([25, 140], rel=1e-4)
    assert [value(t.shift) for t in found.effect.terms] == close([0.3, 0.02], rel=1e-3)
    assert found.effect.floor is None


def test_an_exponential_over_a_floor_is_recovered():
    reset_s = np.linspace(30, 500, 9) * PS
    found = fitted(reset_s, exponentials(reset_s, (0.5, 30 * PS), floor=6.6e-3))
    assert value(found.effect.floor) == close(6.6e-3, rel=1e-5)
    assert value(found.effect.terms[0].tau) == close(30 * PS, rel=1e-5)


def test_a_shift_that_does_not_fade_is_a_floor():
    found = fitted([50 * PS, 100 * PS, 400 * PS], [5e-3, 5e-3, 5e-3])
    assert found.effect.terms == ()
    assert value(found.effect.floor) == close(5e-3)


def test_two_rows_carry_a_single_exponential():
    found = fitted([100 * PS, 200 * PS], [0.05, 0.002])
    (term,) = found.effect.terms
    assert value(term.tau) == close(100 * PS / np.log(25), rel=1e-6)
    # Nothing is left over that could tell how well it is known.
    assert term.tau.covariance == ()


def test_noise_does_not_make_a_second_exponential():
    rng = np.random.default_rng(3)
    reset_s = np.linspace(40, 250, 8) * PS
    shift_v = exponentials(reset_s, (1.0, 40 * PS)) * (1 + 0.03 * rng.standard_normal(8))
    found = fitted(reset_s, shift_v)
    assert len(found.effect.terms) == 1
    assert value(found.effect.terms[0].tau) == close(40 * PS, rel=0.03)


def test_bounds_that_agree_change_nothing():
    reset_s = np.array([110, 150, 250]) * PS
    shift_v = exponentials(reset_s, (1.8, 36 * PS))
    alone = fitted(reset_s, shift_v)
    bounded = fitted(
        np.append(reset_s, [60 * PS, 90 * PS]),
        np.append(shift_v, [0.08, 0.08]),
        [False, False, False, True, True],
    )
    assert bounded.effect == alone.effect
    assert bounded.fits == alone.fits


def test_bounds_that_disagree_pull_and_are_said_to_be_missed():
    reset_s = np.array([100, 150, 200]) * PS
    shift_v = exponentials(reset_s, (1.0, 40 * PS))
    found = fitted(np.append(reset_s, 120 * PS), np.append(shift_v, 0.07), [False] * 3 + [True])
    at_bound = value(found.effect.terms[0].shift) * np.exp(
        -120 * PS / value(found.effect.terms[0].tau)
    )
    assert np.exp(-3.0) + 2e-3 < at_bound < 0.07
    assert any("bounds" in notice and "not met" in notice for notice in found.notices)


def test_the_cap_is_the_largest_shift_that_the_table_vouches_for():
    found = fitted([50 * PS, 100 * PS, 200 * PS], [0.2, 0.1, 0.01], [True, False, False])
    assert found.effect.cap_v == 0.2


def test_conditions_with_other_time_constants_get_a_surface():
    reset_s = np.tile(np.array([60, 90, 130, 200]) * PS, 3)
    temperature = np.repeat([250.0, 300.0, 350.0], 4)
    tau_s = 40 * PS * (temperature / 300.0)
    found = fitted(reset_s, exponentials(reset_s, (1.0, tau_s)), temperature=temperature)
    tau = found.effect.terms[0].tau
    assert [axis.condition for axis in tau.axes] == ["temperature_k"]
    assert max(fit.worst_relative for fit in found.fits) < 0.01


def test_conditions_that_are_alike_share_one_curve():
    reset_s = np.tile(np.array([60, 90, 130, 200]) * PS, 2)
    found = fitted(
        reset_s, exponentials(reset_s, (1.0, 40 * PS)), temperature=np.repeat([250.0, 350.0], 4)
    )
    assert value(found.effect.terms[0].tau) == close(40 * PS, rel=1e-6)


def test_the_latch_forgets_in_37_ps():
    # tests/data/latch_130n: two rows a decade apart at 27 C give 100 ps / ln(15.7) = 36.3 ps.
    table = memory_table(
        latch_column("memory", "t_reset_s"),
        latch_column("memory", "shift_V"),
        latch_column("memory", "censored") == 1.0,
        **latch_where("memory"),
    )
    found = fit_memory(table, ("tt", "ss", "ff"))
    (term,) = found.effect.terms
    assert found.effect.floor is None
    assert np.exp(term.tau.variants[0].coefficients[0]) == close(37.1 * PS, rel=0.01)
    assert found.effect.cap_v == close(0.100001)
    assert [fit.rows for fit in found.fits] == [3, 2]
    assert max(fit.worst_relative for fit in found.fits) < 0.02
    assert not any("not met" in notice for notice in found.notices)


def test_one_reset_time_tells_nothing_and_is_refused():
    with pytest.raises(FitError, match="1 reset time") as caught:
        fitted([1e-10, 1e-10, 5e-11], [0.1, 0.11, 0.2], [False, False, True])
    assert "memory.csv" in str(caught.value)
    assert "two" in str(caught.value)


def test_shifts_of_both_signs_are_refused():
    with pytest.raises(FitError, match="both signs"):
        fitted(np.arange(1, 5) * 1e-10, [-0.01, -0.01, -0.01, 0.005])


def test_shifts_that_follow_no_law_are_said_to():
    found = fitted(np.arange(1, 7) * 1e-10, [0.01, 0.05, 0.01, 0.05, 0.01, 0.05])
    assert any("no simple law" in notice for notice in found.notices)


def test_a_table_without_any_shift_gives_no_effect_and_says_so():
    found = fitted([1e-10, 2e-10], [0.0, -1e-6])
    assert found.effect is None
    assert any("no shift" in notice for notice in found.notices)


def test_conditions_with_bounds_only_are_left_out_and_said_so():
    found = fitted(
        [1e-10, 2e-10, 1e-10], [0.1, 0.01, 0.2], [False, False, True],
        temperature=[300.0, 300.0, 350.0],
    )  # fmt: skip
    assert len(found.fits) == 1
    assert any("bounds only" in notice for notice in found.notices)
