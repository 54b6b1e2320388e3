"""What cannot be fitted is refused in words, and nothing more is.

Simulated tests use fixed seeds; each states how often it would fail by chance with a fresh one.
"""

from __future__ import annotations

import re

import numpy as np
import pytest
from scipy.optimize import brentq
from scipy.special import log_ndtr, ndtr

from behavgen.fit.s_curve import fit_s_curves
from behavgen.fit.s_curve_identification import Reason
from tests.fit.simulated_s_curves import fit_one, reason_of, simulate

LEVELS_V = np.array([-1.5e-3, -1e-3, -0.5e-3, 0.0, 0.5e-3, 1e-3, 1.5e-3])


def test_separated_counts_are_refused_and_bounded() -> None:
    found = fit_one(LEVELS_V, 200, [0, 0, 0, 200, 200, 200, 200])
    assert reason_of(found) is Reason.SEPARATED
    assert np.isnan(found.sigma_v[0])
    assert not found.converged[0]
    # By symmetry the best offset is half way: 400 ln Phi(h/sigma) = -1.9207, h 0.25 mV.
    bound_v = brentq(lambda s: 400 * log_ndtr(0.25e-3 / s) + 1.9207294, 1e-5, 1e-3)
    assert found.identification.sigma_bound_v[0] == pytest.approx(bound_v, rel=1e-6)
    fault = found.identification.fault(0)
    assert "only zeros up to -500 uV, only ones from 0 V on" in fault.what
    assert f"sigma is at most {bound_v * 1e6:.4g} uV (95 %)" in fault.what
    assert "83.33 uV apart from -500 uV to 0 V" in fault.allowed


def test_one_level_with_both_outcomes_is_still_separated() -> None:
    found = fit_one(LEVELS_V, 200, [0, 0, 0, 77, 200, 200, 200])
    assert reason_of(found) is Reason.SEPARATED
    assert "only the level 0 V gave both" in found.identification.fault(0).what
    assert 0.0 < found.identification.sigma_bound_v[0] < 0.25e-3


@pytest.mark.parametrize(
    "ones",
    [
        [0, 0, 0, 77, 199, 200, 200],
        [0, 0, 1, 77, 200, 200, 200],
        [0, 0, 1, 199, 200, 200, 200],
        [0, 0, 1, 0, 200, 200, 200],
    ],
)
def test_the_nearest_counts_that_are_fine_are_fitted(ones: list[int]) -> None:
    found = fit_one(LEVELS_V, 200, ones)
    assert reason_of(found) is Reason.FINE
    assert found.converged[0]
    assert 0.0 < found.sigma_low_v[0] < found.sigma_v[0] < found.sigma_high_v[0] < 1e-3


def test_two_levels_are_enough() -> None:
    # Closed form: the line through both probits, z = Phi^-1(0.16), Phi^-1(0.84).
    found = fit_one([-1e-3, 1e-3], 100, [16, 84])
    assert found.offset_v[0] == pytest.approx(0.0, abs=1e-12)
    assert found.sigma_v[0] == pytest.approx(1e-3 / 0.9944579, rel=1e-6)
    assert found.deviance[0] == pytest.approx(0.0, abs=1e-9)
    assert np.isnan(found.goodness_p[0])
    assert np.isnan(found.tail_z[0])


def test_one_level_is_too_few() -> None:
    found = fit_one([1e-3, 1e-3, 2e-3], [50, 50, 0], [10, 12, 0])
    assert reason_of(found) is Reason.TOO_FEW
    fault = found.identification.fault(0)
    assert "all 100 decisions are at 1 mV" in fault.what
    assert "two levels or more" in fault.allowed


def test_a_curve_without_rows_is_too_few() -> None:
    found = fit_s_curves([0.0, 1.0], [9, 9], [2, 7], [1, 1])
    assert reason_of(found, 0) is Reason.TOO_FEW
    assert "no decision" in found.identification.fault(0).what


@pytest.mark.parametrize(("ones", "side"), [(0, "above 1.5 mV"), (200, "below -1.5 mV")])
def test_decisions_all_alike(ones: int, side: str) -> None:
    found = fit_one(LEVELS_V, 200, np.full(7, ones))
    assert reason_of(found) is Reason.ONE_SIDED
    assert side in found.identification.fault(0).allowed


@pytest.mark.parametrize("ones", [[199, 180, 150, 100, 60, 20, 3], [200, 200, 200, 0, 0, 0, 0]])
def test_falling_curves_are_reversed(ones: list[int]) -> None:
    found = fit_one(LEVELS_V, 200, ones)
    assert reason_of(found) is Reason.REVERSED
    assert "V(inp) - V(inn)" in found.identification.fault(0).allowed


@pytest.mark.parametrize(
    "ones", [[100] * 7, [96, 104, 99, 103, 95, 101, 104], [104, 101, 95, 103, 99, 104, 96]]
)
def test_flat_curves(ones: list[int]) -> None:
    found = fit_one(LEVELS_V, 200, ones)
    assert reason_of(found) is Reason.FLAT
    assert "does not rise from -1.5 mV to 1.5 mV" in found.identification.fault(0).what


def test_slope_test_agrees_with_the_published_trend_statistic() -> None:
    """P. Armitage's trend test equals N times the squared correlation of bit and level."""
    trials, ones = np.full(7, 40), np.array([15, 17, 19, 22, 20, 25, 24])
    bits = np.concatenate([np.repeat([1.0, 0.0], [k, 40 - k]) for k in ones])
    levels = np.repeat(LEVELS_V, trials)
    expected = np.sqrt(bits.size) * np.corrcoef(bits, levels)[0, 1]
    found = fit_one(LEVELS_V, trials, ones)
    assert found.identification.slope_z[0] == pytest.approx(expected, rel=1e-9)


def test_noise_alone_is_hardly_ever_a_curve() -> None:
    """0.05 % of 20 000 coin-tossing curves rise by 3.291: at most 30 seen (p 1e-6)."""
    found, _ = simulate(np.linspace(-2, 2, 7), 100, 20_000, seed=50, share=lambda z: 0.5 + 0 * z)
    assert np.sum(found.identification.reason == Reason.FINE) <= 30


def test_the_bound_on_sigma_holds() -> None:
    """Levels 3 sigma apart, offset anywhere between: of the separated curves 95 % or more."""
    rng = np.random.default_rng(31)
    offset = rng.uniform(-1.5, 1.5, 4000)
    z = np.arange(-9.0, 10.0, 3.0) - offset[:, None]
    ones = rng.binomial(20, ndtr(z))
    curve = np.repeat(np.arange(4000), z.shape[1])
    found = fit_s_curves(z.ravel(), np.full(z.size, 20), ones.ravel(), curve)
    bound = found.identification.sigma_bound_v[found.identification.reason == Reason.SEPARATED]
    assert bound.size > 1000
    assert np.mean(bound > 1.0) > 0.94


def test_a_refused_curve_leaves_its_neighbours_alone() -> None:
    good, _ = simulate(np.linspace(-2, 2, 7), 100, 1, seed=8)
    z = np.linspace(-2.0, 2.0, 7)
    rng = np.random.default_rng(8)
    ones = rng.binomial(100, ndtr(z), (1, 7))[0]
    mixed = fit_s_curves(
        np.tile(z, 3),
        np.full(21, 100),
        np.concatenate([np.zeros(7), ones, [0, 0, 0, 100, 100, 100, 100]]),
        np.repeat([0, 1, 2], 7),
    )
    assert [reason_of(mixed, i).name for i in range(3)] == ["ONE_SIDED", "FINE", "SEPARATED"]
    assert mixed.offset_v[1] == good.offset_v[0]
    assert mixed.sigma_high_v[1] == good.sigma_high_v[0]
    assert np.isnan(mixed.covariance[[0, 2]]).all()


def test_no_rows_at_all() -> None:
    found = fit_s_curves([], [], [], [])
    assert found.offset_v.shape == (0,)


@pytest.mark.parametrize("reason", [r for r in Reason if r is not Reason.FINE])
def test_every_refusal_says_what_was_found_and_what_to_do(reason: Reason) -> None:
    counts = {
        Reason.TOO_FEW: ([0.0], [10], [5]),
        Reason.ONE_SIDED: ([0.0, 1.0], [10, 10], [0, 0]),
        Reason.SEPARATED: ([0.0, 1.0], [1, 1], [0, 1]),
        Reason.REVERSED: ([0.0, 1.0], [10, 10], [10, 0]),
        Reason.FLAT: ([0.0, 1.0], [10, 10], [5, 5]),
    }
    found = fit_one(*counts[reason])
    assert reason_of(found) is reason
    fault = found.identification.fault(0)
    assert fault.what
    assert fault.allowed
    assert not re.search(r"\b(nan|inf)\b", str(fault))
