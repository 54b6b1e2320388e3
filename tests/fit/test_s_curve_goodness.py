"""Misfit is seen, rarely where there is none, and widens the intervals.

Simulated tests use fixed seeds.
"""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import ndtr

from behavgen.fit.s_curve import fit_s_curves, misfit_notice
from behavgen.fit.s_curve_identification import Reason
from tests.fit.simulated_s_curves import fit_one, simulate


@pytest.mark.parametrize(
    ("z", "trials"),
    [
        (np.linspace(-2, 2, 7), 100),
        (np.linspace(-4, 4, 9), 200),  # levels where no wrong decision is expected
        (np.linspace(-2.5, 2.5, 400), 1),  # a ramp: single decisions
    ],
    ids=["usual", "wide", "ramp"],
)
def test_false_alarms(z: np.ndarray, trials: int) -> None:
    """At 1 % and 0.1 % of 20 000 curves: no more than 1.3 and 2 times as many."""
    curves = 20_000 if z.size < 100 else 2_000
    found, _ = simulate(z, trials, curves, seed=z.size)
    p = found.goodness_p[found.identification.reason == Reason.FINE]
    assert np.mean(p < 0.01) <= 0.013
    assert np.mean(p < 0.001) <= 0.002
    assert np.mean(p < 0.05) >= 0.02
    tails = found.tail_z[found.identification.reason == Reason.FINE]
    assert np.mean(np.abs(tails) > 2.576) == pytest.approx(0.01, abs=0.005)


def test_one_stray_decision_far_out_is_no_misfit() -> None:
    """Pearson's statistic alone would refuse this curve: one zero in 200 at 4 sigma."""
    z = np.array([-4.0, -1.5, -0.75, 0.0, 0.75, 1.5, 4.0])
    ones = np.round(200 * ndtr(z)).astype(int)
    ones[-1] = 199
    found = fit_one(z, 200, ones)
    assert found.pearson[0] > 20.5  # chi-square, 5 degrees of freedom, p 0.001
    assert found.goodness_p[0] > 0.01
    assert found.overdispersion[0] == 1.0


def test_drift_between_levels_is_seen_and_covered() -> None:
    """Offset moves by 0.4 sigma rms between levels: intervals must still cover.

    4000 curves at 95 %: allowed is 92 % and more. Plain intervals cover far less.
    """
    rng = np.random.default_rng(44)
    z = np.linspace(-2.0, 2.0, 9)
    ones = rng.binomial(400, ndtr(z + rng.normal(0.0, 0.4, (4000, 9))))
    curve = np.repeat(np.arange(4000), 9)
    found = fit_s_curves(np.tile(z, 4000), np.full(curve.size, 400), ones.ravel(), curve)
    assert np.mean(found.overdispersion > 1.0) > 0.99
    offset = (found.offset_low_v < 0.0) & (found.offset_high_v > 0.0)
    assert np.mean(offset) > 0.92
    # So must the errors that other fits take as weights: binomial ones are a twenty-eighth of it.
    assert np.mean(found.offset_error_v**2) == pytest.approx(found.offset_v.var(), rel=0.3)
    plain_error = found.offset_error_v / np.sqrt(found.overdispersion)
    assert np.mean(np.abs(found.offset_v) < 1.96 * plain_error) < 0.6


def test_errors_grow_with_the_intervals() -> None:
    z = np.linspace(-2.0, 2.0, 7)
    ones = np.array([10, 2, 60, 80, 190, 150, 199])
    found = fit_one(z, 200, ones)
    assert found.overdispersion[0] > 5.0
    notice = misfit_notice(found, 0)
    assert f"multiplied by {found.overdispersion[0]:.3g}" in notice
    assert f"(p = {found.goodness_p[0]:.1g})" in notice


def test_a_good_fit_gives_no_notice() -> None:
    found, _ = simulate(np.linspace(-2, 2, 7), 100, 1, seed=12)
    assert misfit_notice(found, 0) == ""
    assert misfit_notice(fit_one([0.0, 1.0], 10, [5, 5]), 0) == ""


@pytest.mark.parametrize(
    ("share", "word"),
    [
        (lambda z: 0.8 * ndtr(z / 0.6) + 0.2 * ndtr(z / 3.0), "heavier"),
        (lambda z: np.clip(0.5 + z / (2 * np.sqrt(3.0)), 0.0, 1.0), "lighter"),
    ],
    ids=["two noises", "uniform noise"],
)
def test_the_shape_of_the_noise_is_named(share: object, word: str) -> None:
    found, _ = simulate(np.linspace(-2.5, 2.5, 11), 4000, 20, seed=2, share=share)
    notices = [misfit_notice(found, i) for i in range(20)]
    assert all(f"{word} tails than Gaussian" in notice for notice in notices)
