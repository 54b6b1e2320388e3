"""Conditions compared instance by instance."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

from behavgen.errors import FitError
from behavgen.fit.instance_components import InstanceComponents, instance_components
from behavgen.fit.instances import instance_statistics

OFFSETS = Path(__file__).parents[1] / "data" / "latch_130n" / "offset.csv"


@pytest.fixture(scope="module")
def latch_v() -> np.ndarray:
    """Offsets of 120 instances at nominal, 30 of them at three more conditions, V."""
    with OFFSETS.open(newline="") as file:
        rows = list(csv.DictReader(file))
    conditions = list(dict.fromkeys((r["vdd_V"], r["temp_C"], r["vcm_V"]) for r in rows))
    offset_v = np.full((120, len(conditions)), np.nan)
    for row in rows:
        condition = conditions.index((row["vdd_V"], row["temp_C"], row["vcm_V"]))
        offset_v[int(row["instance"]), condition] = float(row["vos_V"])
    return offset_v


def deviations(found: InstanceComponents) -> np.ndarray:
    return np.sqrt(np.diag(found.covariance_v2))


def test_counts_of_the_simulated_latch(latch_v: np.ndarray) -> None:
    found = instance_components(latch_v)
    assert found.reference == 0
    assert found.instances.tolist() == found.shared.tolist() == [120, 30, 30, 30]


def test_the_means_of_its_subset_are_not_compared_directly(latch_v: np.ndarray) -> None:
    """The 30 instances lie 2.2 mV below all 120 by chance; no condition shifts by that much."""
    found = instance_components(latch_v)
    naive_v = np.nanmean(latch_v, axis=0) - np.nanmean(latch_v[:, 0])
    assert np.all(np.abs(naive_v[1:]) > 2e-3)
    assert np.all(np.abs(found.shift_v[1:]) < 0.4e-3)
    assert np.all(found.shift_low_v[1:] < 0.0)
    assert np.all(found.shift_high_v[1:] > 0.0)
    paired_v = (latch_v[:30, 1:] - latch_v[:30, :1]).mean(axis=0)
    np.testing.assert_allclose(found.mean_v[1:], latch_v[:, 0].mean() + paired_v, rtol=1e-12)


def test_the_scatter_of_its_subset_is_not_taken_for_all(latch_v: np.ndarray) -> None:
    """At nominal the 120 scatter 19 % more than the 30; so they would at the other conditions."""
    found = instance_components(latch_v)
    assert deviations(found)[0] == pytest.approx(instance_statistics(latch_v[:, 0]).sigma_v)
    ratio = deviations(found) / latch_v[:30].std(axis=0, ddof=1)
    assert ratio[0] == pytest.approx(1.19, abs=0.005)
    assert np.all((ratio[1:] > 1.15) & (ratio[1:] < 1.20))


def test_its_conditions_are_highly_correlated(latch_v: np.ndarray) -> None:
    found = instance_components(latch_v)
    correlation = found.covariance_v2 / np.outer(deviations(found), deviations(found))
    others = correlation[np.triu_indices(4, 1)]
    assert np.all((others > 0.93) & (others < 1.0))
    assert found.share[0] > 0.95
    assert np.all(found.loadings_v[:, 0] > 0.0)


def test_without_gaps_the_covariance_is_the_usual_one() -> None:
    rng = np.random.default_rng(50)
    offset_v = rng.normal(size=(50, 4)) @ rng.normal(size=(4, 4)) * 1e-3
    found = instance_components(offset_v)
    np.testing.assert_allclose(found.covariance_v2, np.cov(offset_v.T), rtol=1e-9)
    np.testing.assert_allclose(found.mean_v, offset_v.mean(axis=0), rtol=1e-9, atol=1e-12)


def test_one_gap_pattern_has_a_closed_form() -> None:
    """Second column seen on a subset: regression on the first (T. Anderson, JASA 52, 1957).

    The residual variance is divided by one less than the subset, as in all covariances here.
    """
    rng = np.random.default_rng(57)
    offset_v = rng.multivariate_normal([0, 0], [[4.0, 3.0], [3.0, 3.0]], 60)
    offset_v[20:, 1] = np.nan
    found = instance_components(offset_v)
    slope, start = np.polyfit(offset_v[:20, 0], offset_v[:20, 1], 1)
    left = np.sum((offset_v[:20, 1] - start - slope * offset_v[:20, 0]) ** 2) / 19
    variance = offset_v[:, 0].var(ddof=1)
    expected = [[variance, slope * variance], [slope * variance, slope**2 * variance + left]]
    np.testing.assert_allclose(found.covariance_v2, expected, rtol=1e-6)


def test_the_truth_is_recovered() -> None:
    """400 studies of 60 instances, 20 of them at two more conditions.

    Unbiased within 5 standard errors of the average (a false alarm in 1e6); the shift's
    95 % interval covers within 4.4 of its own (a false alarm in 1e5).
    """
    rng = np.random.default_rng(400)
    truth = np.array([[25.0, 24.0, 10.0], [24.0, 26.0, 12.0], [10.0, 12.0, 30.0]])
    found, covered = [], []
    for _ in range(400):
        offset_v = rng.multivariate_normal([1.0, 2.0, -1.0], truth, 60)
        offset_v[20:, 1:] = np.nan
        one = instance_components(offset_v)
        found.append(one.covariance_v2)
        covered.append((one.shift_low_v[1:] < [1.0, -2.0]) & (one.shift_high_v[1:] > [1.0, -2.0]))
    mean, error = np.mean(found, axis=0), np.std(found, axis=0) / 20.0
    # The subset's residual variance is divided by 19, not by its 18 degrees of freedom.
    residual = np.diag(truth) - truth[0] ** 2 / truth[0, 0]
    np.testing.assert_array_less(np.abs(mean - truth), 5.0 * error + np.max(residual) / 18.0)
    np.testing.assert_allclose(
        np.mean(covered, axis=0), 0.95, atol=4.4 * np.sqrt(0.95 * 0.05 / 400)
    )


@pytest.mark.parametrize("seed", range(8))
def test_any_pattern_of_gaps_gives_a_covariance(seed: int) -> None:
    rng = np.random.default_rng(seed)
    conditions = int(rng.integers(2, 7))
    common = rng.normal(size=(40, 1))
    offset_v = common + 0.1 * rng.normal(size=(40, conditions))
    offset_v[rng.random(offset_v.shape) < 0.4] = np.nan
    found = instance_components(offset_v)
    values = np.linalg.eigvalsh(found.covariance_v2)
    assert values[0] >= -1e-12 * values[-1]
    np.testing.assert_allclose(found.loadings_v @ found.loadings_v.T, found.covariance_v2)
    assert found.share.sum() == pytest.approx(1.0)
    assert np.all(np.diff(found.share) <= 1e-12)
    assert found.share[0] > 0.9


def test_perfectly_correlated_conditions_share_one_component() -> None:
    first = np.random.default_rng(1).normal(size=25)
    offset_v = np.column_stack([first, 2.0 * first + 1.0, -first])
    offset_v[15:, 1] = np.nan
    found = instance_components(offset_v)
    assert found.share[0] == pytest.approx(1.0, abs=1e-5)
    np.testing.assert_allclose(
        found.loadings_v[:, 0] / found.loadings_v[0, 0], [1.0, 2.0, -1.0], rtol=1e-2
    )


def test_a_condition_that_shares_no_instances_keeps_its_own_mean() -> None:
    offset_v = np.random.default_rng(2).normal(size=(30, 3))
    offset_v[:20, 2] = np.nan
    offset_v[20:, :2] = np.nan
    found = instance_components(offset_v)
    assert found.shared.tolist() == [20, 20, 0]
    assert found.mean_v[2] == pytest.approx(offset_v[20:, 2].mean())
    assert np.isnan(found.shift_v[2])
    assert np.all(np.isnan(found.covariance_v2[2]))
    assert np.all(np.isfinite(found.covariance_v2[:2, :2]))


def test_instances_without_any_mismatch() -> None:
    offset_v = np.column_stack([np.full(10, 1e-3), np.random.default_rng(4).normal(size=10)])
    offset_v[7:, 1] = np.nan
    found = instance_components(offset_v)
    assert found.mean_v[0] == pytest.approx(1e-3)
    np.testing.assert_allclose(found.covariance_v2[0], 0.0, atol=1e-12)
    assert instance_components(np.zeros((5, 2))).share.tolist() == [0.0, 0.0]


def test_measurement_error_is_not_mismatch() -> None:
    """One common offset read with independent errors: 5 standard errors allowed."""
    rng = np.random.default_rng(9)
    common = rng.normal(0.0, 3.0, (20_000, 1))
    offset_v = common + rng.normal(0.0, [1.0, 2.0], (20_000, 2))
    found = instance_components(offset_v, [1.0, 4.0])
    assert found.covariance_v2 == pytest.approx(np.full((2, 2), 9.0), abs=5 * 13 * np.sqrt(2 / 2e4))
    assert found.share[0] > 0.98


def test_single_instances_are_refused() -> None:
    with pytest.raises(FitError, match="no condition has two instances"):
        instance_components([[1.0, np.nan], [np.nan, 2.0]])
