"""Statistics of instances against certified data, published tests and simulation."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

from behavgen.errors import FitError
from behavgen.fit.instances import instance_statistics, normality_p, outliers

NIST = json.loads(
    (Path(__file__).parents[1] / "published" / "nist_univariate.json").read_text()
)  # NIST StRD, univariate summary statistics

# B. Rosner, Technometrics 25, 1983, as in NIST/SEMATECH e-Handbook 1.3.5.17.3
ROSNER = [
    *(-0.25, 0.68, 0.94, 1.15, 1.20, 1.26, 1.26, 1.34, 1.38, 1.43, 1.49, 1.49, 1.55, 1.56),
    *(1.58, 1.65, 1.69, 1.70, 1.76, 1.77, 1.81, 1.91, 1.94, 1.96, 1.99, 2.06, 2.09, 2.10),
    *(2.14, 2.15, 2.23, 2.24, 2.26, 2.35, 2.37, 2.40, 2.47, 2.54, 2.62, 2.64, 2.90, 2.92),
    *(2.92, 2.93, 3.21, 3.26, 3.30, 3.59, 3.68, 4.30, 4.64, 5.34, 5.42, 6.01),
]
# F. Grubbs' example in NIST/SEMATECH e-Handbook 1.3.5.17.1: one outlier, the last
GRUBBS = [199.31, 199.53, 200.19, 200.82, 201.92, 201.95, 202.18, 245.57]


@pytest.mark.parametrize("name", NIST)
def test_certified_mean_and_deviation(name: str) -> None:
    """A one-pass variance fails NumAcc3 and NumAcc4."""
    certified = NIST[name]
    found = instance_statistics(certified["y"])
    assert found.instances == certified["n"]
    assert found.mean_v == pytest.approx(certified["mean"], rel=1e-14)
    assert found.sigma_v == pytest.approx(certified["sd"], rel=1e-8)


def test_certified_intervals() -> None:
    # NIST StRD Mavro
    found = instance_statistics(NIST["mavro"]["y"])
    assert found.mean_low_v == pytest.approx(2.0017340445, abs=5e-10)
    assert found.mean_high_v == pytest.approx(2.0019779555, abs=5e-10)
    assert found.sigma_low_v == pytest.approx(0.00035846142, rel=1e-6)
    assert found.sigma_high_v == pytest.approx(0.00053474505, rel=1e-6)


@pytest.mark.parametrize("offset_v", [[], [1e-3]])
def test_fewer_than_two_instances_are_refused(offset_v: list[float]) -> None:
    with pytest.raises(FitError, match=f"^{len(offset_v)} instance.*measure 2 or more"):
        instance_statistics(offset_v)


def test_two_instances_are_enough() -> None:
    found = instance_statistics([1e-3, 3e-3])
    assert found.mean_v == pytest.approx(2e-3)
    assert found.sigma_v == pytest.approx(np.sqrt(2.0) * 1e-3)
    assert np.isnan(found.normality_p)
    assert found.outliers == ()


def test_measurement_variance_is_subtracted() -> None:
    """True scatter 4 mV, measured with 3 mV: 5 mV are seen; 5 standard errors allowed."""
    rng = np.random.default_rng(345)
    offset_v = rng.normal(1e-3, 4e-3, 40_000) + rng.normal(0.0, 3e-3, 40_000)
    found = instance_statistics(offset_v, np.full(offset_v.size, 9e-6))
    assert found.sigma_v == pytest.approx(4e-3, abs=5 * 5e-3 / np.sqrt(2 * 40_000) * 5 / 4)
    assert found.sigma_low_v < 4e-3 < found.sigma_high_v
    raw = instance_statistics(offset_v)
    assert raw.sigma_v == pytest.approx(5e-3, rel=0.02)
    # The mean is as uncertain as its noisy sample.
    assert (found.mean_low_v, found.mean_high_v) == (raw.mean_low_v, raw.mean_high_v)


def test_scatter_below_the_measurement_error_is_bounded_not_negative() -> None:
    offset_v = np.random.default_rng(7).normal(0.0, 1e-3, 30)
    found = instance_statistics(offset_v, 1.2e-6)
    assert found.sigma_low_v == 0.0
    assert 0.0 <= found.sigma_v < found.sigma_high_v


def test_intervals_with_measurement_error_cover() -> None:
    """4000 samples of 20: 95 % +- 4.4 standard errors, a false alarm in 1e5."""
    rng = np.random.default_rng(20)
    hits = np.zeros(2)
    for offset_v in rng.normal(0.0, 4.0, (4000, 20)) + rng.normal(0.0, 3.0, (4000, 20)):
        found = instance_statistics(offset_v, 9.0)
        hits += (
            found.mean_low_v < 0.0 < found.mean_high_v,
            found.sigma_low_v < 4 < found.sigma_high_v,
        )
    np.testing.assert_allclose(hits / 4000, 0.95, atol=4.4 * np.sqrt(0.95 * 0.05 / 4000))


def test_normality_agrees_with_an_independent_implementation() -> None:
    diagnostic = pytest.importorskip("statsmodels.stats.diagnostic")
    rng = np.random.default_rng(11)
    samples = [rng.normal(size=n) for n in (8, 20, 300)]
    samples += [rng.exponential(size=n) for n in (10, 40)] + [rng.uniform(size=60)]
    for sample in samples:
        assert normality_p(sample) == pytest.approx(diagnostic.normal_ad(sample)[1], rel=1e-9)


def test_normality_false_alarms_and_power() -> None:
    """4000 normal samples of 30: 5 % +- 4.4 standard errors, a false alarm in 1e5."""
    rng = np.random.default_rng(30)
    alarms = np.mean([normality_p(sample) < 0.05 for sample in rng.normal(size=(4000, 30))])
    assert alarms == pytest.approx(0.05, abs=4.4 * np.sqrt(0.05 * 0.95 / 4000))
    skewed = np.mean([normality_p(sample) < 0.05 for sample in rng.exponential(size=(400, 30))])
    assert skewed > 0.8


def test_normality_has_nothing_to_say_about_equal_offsets() -> None:
    assert np.isnan(normality_p(np.zeros(40)))


def test_published_outliers() -> None:
    # Three outliers at 5 %, although the first two tests of the sequence are not significant.
    assert outliers(ROSNER, alpha=0.05, most=10) == (53, 52, 51)
    assert outliers(GRUBBS, alpha=0.05) == (7,)


def test_outliers_survive_shuffling() -> None:
    order = np.random.default_rng(3).permutation(54)
    found = outliers(np.array(ROSNER)[order], alpha=0.05, most=10)
    assert {int(order[i]) for i in found} == {51, 52, 53}


def test_clean_samples_rarely_hold_outliers() -> None:
    """4000 normal samples of 60 at 1 %: +- 4.4 standard errors, a false alarm in 1e5."""
    rng = np.random.default_rng(61)
    alarms = np.mean([outliers(sample) != () for sample in rng.normal(size=(4000, 60))])
    assert alarms == pytest.approx(0.01, abs=4.4 * np.sqrt(0.01 * 0.99 / 4000))


def test_equal_offsets_hold_no_outliers() -> None:
    assert outliers(np.ones(20)) == ()
    assert outliers([1.0, 2.0]) == ()
