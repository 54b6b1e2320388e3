"""How many instances, against a published constant and against simulated samples."""

from __future__ import annotations

import numpy as np
import pytest

from behavgen.fit.instances import instance_statistics
from behavgen.fit.planning.instances import BRACKET, mean_half, plan_instances, sigma_half
from behavgen.fit.planning.sample_deviation import mean_deviation


@pytest.mark.parametrize(
    ("size", "c4"), [(2, 0.7979), (3, 0.8862), (5, 0.9400), (10, 0.9727), (25, 0.9896)]
)
def test_published_control_chart_constants(size: int, c4: float) -> None:
    """NIST/SEMATECH e-Handbook of Statistical Methods, 6.3.2: factor c4."""
    assert mean_deviation(size - 1) == pytest.approx(c4, abs=5e-5)


def test_the_constant_has_no_seam() -> None:
    assert mean_deviation(10_000) == pytest.approx(mean_deviation(10_001), rel=1e-8)


@pytest.mark.parametrize("within", [0.5, 0.2, 0.1, 0.05])
def test_no_instance_too_many(within: float) -> None:
    for planned in (plan_instances(sigma_within=within), plan_instances(mean_within=within)):
        assert planned is not None
    spread, mean = plan_instances(sigma_within=within), plan_instances(mean_within=within)
    assert spread is not None
    assert mean is not None
    assert sigma_half(spread.instances) <= within < sigma_half(spread.instances - 1)
    assert mean_half(mean.instances) <= within < mean_half(mean.instances - 1)


def test_large_samples_follow_the_normal_law() -> None:
    """Relative half width 1.96 / sqrt(2 n) of the spread, 1.96 / sqrt(n) of the mean."""
    spread, mean = plan_instances(sigma_within=1e-3), plan_instances(mean_within=1e-3)
    assert spread is not None
    assert mean is not None
    assert spread.instances == pytest.approx(0.5 * (1.959964 / 1e-3) ** 2, rel=1e-3)
    assert mean.instances == pytest.approx((1.959964 / 1e-3) ** 2, rel=1e-3)


@pytest.mark.parametrize("within", [0.3, 0.1])
def test_promise(within: float) -> None:
    """Means over 500 samples, which stray by 1 % at most (one standard deviation)."""
    planned = plan_instances(sigma_within=within)
    assert planned is not None
    rng = np.random.default_rng(7)
    sigma_v = 5e-3
    halves = []
    for _ in range(500):
        found = instance_statistics(sigma_v * rng.standard_normal(planned.instances))
        halves.append(
            (found.sigma_high_v - found.sigma_low_v, found.mean_high_v - found.mean_low_v)
        )
    spread_half, mean = 0.5 * np.mean(halves, axis=0) / sigma_v
    assert spread_half == pytest.approx(planned.sigma_half, rel=0.05)
    assert mean == pytest.approx(planned.mean_half, rel=0.05)


def test_offsets_known_to_a_bracket_keep_the_promise() -> None:
    """Halving leaves each offset anywhere in its bracket; the spread hardly feels it."""
    planned = plan_instances(sigma_within=0.1)
    assert planned is not None
    rng = np.random.default_rng(8)
    exact = rng.standard_normal((300, planned.instances))
    bracketed = (np.floor(exact / BRACKET) + 0.5) * BRACKET
    assert np.mean(bracketed.std(axis=1, ddof=1)) == pytest.approx(1.0, abs=0.01)
    assert 8.0 / 2.0**planned.halvings <= BRACKET


def test_those_there_are_count() -> None:
    fresh = plan_instances(sigma_within=0.1)
    assert fresh is not None
    more = plan_instances(sigma_within=0.1, measured=80)
    assert more is not None
    assert more.more == fresh.instances - 80
    assert more.decisions == more.more * more.halvings
    assert plan_instances(sigma_within=0.1, measured=fresh.instances) is None
