"""Intervals against published cases and their own promise."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest
from scipy.special import comb

from behavgen.fit.intervals import (
    exact_interval,
    mean_interval,
    normal_quantile,
    sigma_interval,
    student_quantile,
    wilson_interval,
)

PUBLISHED = Path(__file__).parents[1] / "published"
# Cases of R. Newcombe, Statistics in Medicine 17, 1998.
CASES = json.loads((PUBLISHED / "binomial_ci.json").read_text())


@pytest.mark.parametrize("case", CASES)
def test_published_binomial_cases(case: str) -> None:
    ones, trials = (int(count) for count in case.split("/"))
    np.testing.assert_allclose(wilson_interval(ones, trials), CASES[case]["wilson"], atol=1e-9)
    np.testing.assert_allclose(exact_interval(ones, trials), CASES[case]["beta"], atol=1e-9)


def test_printed_digits_of_the_best_known_cases() -> None:
    # Newcombe 1998, table I
    np.testing.assert_allclose(wilson_interval(81, 263), (0.2553, 0.3662), atol=5e-5)
    np.testing.assert_allclose(exact_interval(81, 263), (0.2527, 0.3676), atol=5e-5)
    np.testing.assert_allclose(wilson_interval(0, 20), (0.0, 0.1611), atol=5e-5)
    np.testing.assert_allclose(exact_interval(0, 20), (0.0, 0.1684), atol=5e-5)


def test_counts_broadcast() -> None:
    low, high = exact_interval(np.arange(6)[:, None], np.array([5, 50]))
    assert low.shape == high.shape == (6, 2)
    assert np.all(low < high)


def test_no_trials_tell_nothing() -> None:
    assert wilson_interval(0, 0) == (0.0, 1.0)
    assert exact_interval(0, 0) == (0.0, 1.0)


@pytest.mark.parametrize("level", [0.8, 0.95, 0.999])
def test_exact_interval_never_covers_too_little(level: float) -> None:
    """Coverage summed over all outcomes, for every proportion tried: no simulation."""
    trials, ones = 25, np.arange(26)
    low, high = exact_interval(ones, trials, level)
    for p in np.linspace(0.001, 0.999, 333):
        chance = comb(trials, ones) * p**ones * (1.0 - p) ** (trials - ones)
        assert chance[(low <= p) & (p <= high)].sum() >= level - 1e-12


def test_wilson_interval_covers_on_average() -> None:
    trials, ones = 25, np.arange(26)
    low, high = wilson_interval(ones, trials)
    p = np.linspace(0.02, 0.98, 481)[:, None]
    chance = comb(trials, ones) * p**ones * (1.0 - p) ** (trials - ones)
    coverage = (chance * ((low <= p) & (p <= high))).sum(axis=1)
    assert coverage.mean() == pytest.approx(0.95, abs=0.01)


def test_quantiles() -> None:
    # Any printed table of the normal and of Student's distribution
    assert normal_quantile(0.95) == pytest.approx(1.959964, abs=1e-6)
    assert normal_quantile(0.99) == pytest.approx(2.575829, abs=1e-6)
    np.testing.assert_allclose(
        student_quantile(0.95, [1, 5, 30]), [12.7062, 2.5706, 2.0423], atol=5e-5
    )


def test_certified_sample() -> None:
    # NIST StRD Mavro: 95 % limits of mean and standard deviation
    sample = json.loads((PUBLISHED / "nist_univariate.json").read_text())["mavro"]
    low, high = mean_interval(sample["mean"], sample["sd"], sample["n"])
    np.testing.assert_allclose((low, high), (2.0017340445, 2.0019779555), atol=5e-10)
    low, high = sigma_interval(sample["sd"], sample["n"])
    np.testing.assert_allclose((low, high), (0.00035846142, 0.00053474505), rtol=1e-6)


def test_sample_intervals_cover() -> None:
    """20 000 normal samples of 6: a false alarm at 5 standard errors has chance 6e-7."""
    sample = np.random.default_rng(60).normal(3.0, 2.0, (20_000, 6))
    mean, sigma = sample.mean(axis=1), sample.std(axis=1, ddof=1)
    allowed = 5.0 * np.sqrt(0.9 * 0.1 / 20_000)
    low, high = mean_interval(mean, sigma, 6, 0.9)
    assert np.mean((low < 3.0) & (high > 3.0)) == pytest.approx(0.9, abs=allowed)
    low, high = sigma_interval(sigma, 6, 0.9)
    assert np.mean((low < 2.0) & (high > 2.0)) == pytest.approx(0.9, abs=allowed)
