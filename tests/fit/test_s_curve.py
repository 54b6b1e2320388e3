"""S-curve fits against published sets, another package, their own promises and simulation.

Simulated tests use fixed seeds; each states how often it would fail by chance
with a fresh one.
"""

from __future__ import annotations

import csv
import json
from pathlib import Path

import numpy as np
import pytest
from scipy.optimize import brentq, minimize_scalar
from scipy.special import gammaln, log_ndtr, ndtr

from behavgen.fit.s_curve import SCurveFits, fit_s_curves
from behavgen.fit.s_curve_identification import Reason
from behavgen.formulas.noise import decision_information
from tests.fit.simulated_s_curves import fit_one, simulate

TESTS = Path(__file__).parents[1]
# Sets of C. I. Bliss 1935, D. J. Finney 1971 and two textbooks; fits recomputed with
# a general statistics package, intervals by its likelihood.
PUBLISHED = json.loads((TESTS / "published" / "probit_refs.json").read_text())
FISHER = json.loads((TESTS / "published" / "fisher_power.json").read_text())


@pytest.mark.parametrize("name", PUBLISHED)
class TestPublishedSets:
    """Tolerances: 1e-6 on estimates, 1e-4 on errors (expected information)."""

    @staticmethod
    def both(name: str) -> tuple[SCurveFits, dict[str, object]]:
        data = PUBLISHED[name]
        reference = next(fit for fit in data["fits"] if fit["link"] == "probit")
        return fit_one(data["x"], data["n"], data["y"]), reference

    def test_estimates(self, name: str) -> None:
        found, reference = self.both(name)
        assert found.converged[0]
        assert found.offset_v[0] == pytest.approx(reference["mu"], rel=1e-6)
        assert found.sigma_v[0] == pytest.approx(reference["sigma"], rel=1e-6)

    def test_errors_from_the_expected_information(self, name: str) -> None:
        found, reference = self.both(name)
        assert found.offset_error_v[0] == pytest.approx(reference["se_mu"], rel=1e-4)
        assert found.sigma_error_v[0] == pytest.approx(reference["se_sigma"], rel=1e-4)

    def test_covariance(self, name: str) -> None:
        """Intercept is -offset/sigma: its covariance with the slope 1/sigma is published."""
        found, reference = self.both(name)
        offset, sigma = found.offset_v[0], found.sigma_v[0]
        jacobian = np.array([[-1.0 / sigma, offset / sigma], [0.0, -1.0 / sigma]])
        covariance = jacobian @ found.covariance[0] @ jacobian.T
        assert covariance[0, 1] == pytest.approx(reference["cov01_expected"], rel=1e-4)
        np.testing.assert_allclose(
            np.sqrt(np.diag(covariance)), reference["se_expected"], rtol=1e-4
        )

    def test_goodness_of_fit(self, name: str) -> None:
        found, reference = self.both(name)
        assert found.deviance[0] == pytest.approx(reference["deviance"], rel=1e-6)
        assert found.pearson[0] == pytest.approx(reference["pearson"], rel=1e-6)
        assert found.degrees_of_freedom[0] == reference["df"]
        assert found.overdispersion[0] == 1.0

    def test_likelihood(self, name: str) -> None:
        found, reference = self.both(name)
        n, k = np.array(PUBLISHED[name]["n"]), np.array(PUBLISHED[name]["y"])
        constant = np.sum(gammaln(n + 1) - gammaln(k + 1) - gammaln(n - k + 1))
        assert found.loglik[0] + constant == pytest.approx(reference["llf"], rel=1e-8)

    def test_profile_intervals(self, name: str) -> None:
        found, reference = self.both(name)
        offset = (found.offset_low_v[0], found.offset_high_v[0])
        sigma = (found.sigma_low_v[0], found.sigma_high_v[0])
        np.testing.assert_allclose(offset, reference["profile95_mu"], rtol=1e-6)
        np.testing.assert_allclose(sigma, reference["profile95_sigma"], rtol=1e-6)


def test_printed_digits_of_the_beetle_set() -> None:
    # A. J. Dobson, An Introduction to Generalized Linear Models: -34.94 (2.65), 19.73 (1.49)
    data = PUBLISHED["beetle1935_log10dose"]
    found = fit_one(data["x"], data["n"], data["y"])
    assert -found.offset_v[0] / found.sigma_v[0] == pytest.approx(-34.94, abs=0.005)
    assert 1.0 / found.sigma_v[0] == pytest.approx(19.73, abs=0.005)
    assert found.deviance[0] == pytest.approx(10.12, abs=0.005)


def test_agreement_with_a_general_package_on_random_tables() -> None:
    """Sixty curves of unequal length, scale and trials, rows shuffled over all of them."""
    sm = pytest.importorskip("statsmodels.api")
    family = sm.families.Binomial(link=sm.families.links.Probit())
    rng = np.random.default_rng(60)
    length = rng.integers(4, 15, 60)
    curve = np.repeat(np.arange(60), length)
    sigma_v = 10.0 ** rng.uniform(-5, -2, 60)
    offset_v = sigma_v * rng.normal(0.0, 3.0, 60)
    z = rng.uniform(-2.2, 2.2, curve.size)
    vdiff_v = offset_v[curve] + z * sigma_v[curve]
    trials = rng.integers(30, 500, curve.size)
    ones = rng.binomial(trials, ndtr(z))
    order = rng.permutation(curve.size)
    found = fit_s_curves(vdiff_v[order], trials[order], ones[order], curve[order])
    for i in range(60):
        rows = curve == i
        # The general package wants a well-scaled input; the law does not care.
        scaled = sm.add_constant((vdiff_v[rows] - offset_v[i]) / sigma_v[i])
        counts = np.column_stack([ones[rows], (trials - ones)[rows]])
        other = sm.GLM(counts, scaled, family=family).fit(tol=1e-12, maxiter=200)
        start, slope = other.params
        assert found.converged[i]
        assert found.sigma_v[i] == pytest.approx(sigma_v[i] / slope, rel=1e-6)
        expected_v = offset_v[i] - sigma_v[i] * start / slope
        assert found.offset_v[i] == pytest.approx(expected_v, abs=1e-6 * sigma_v[i])
        assert found.deviance[i] == pytest.approx(other.deviance, rel=1e-6, abs=1e-9)
        assert found.pearson[i] == pytest.approx(other.pearson_chi2, rel=1e-5)
        error = other.bse[1] / slope
        assert found.sigma_error_v[i] == pytest.approx(found.sigma_v[i] * error, rel=1e-4)


def test_interval_ends_by_scalar_search() -> None:
    """The definition, with another optimiser: the best likelihood is half a quantile lower."""
    z, trials = np.array([-1.4, -0.9, -0.2, 0.5, 0.8, 1.9]), 25
    found, ones = simulate(z, trials, 5, seed=5)
    for i in range(5):
        offset, sigma, best = found.offset_v[i], found.sigma_v[i], found.loglik[i]
        ends = [
            brentq(above_end, *span, args=(parameter, z, trials, ones[i], best))
            for parameter, span in [
                (0, (offset - 4.0 * sigma, offset)),
                (0, (offset, offset + 4.0)),
                (1, (0.1 * sigma, sigma)),
                (1, (sigma, 20.0 * sigma)),
            ]
        ]
        ours = [found.offset_low_v, found.offset_high_v, found.sigma_low_v, found.sigma_high_v]
        np.testing.assert_allclose([end[i] for end in ours], ends, atol=2e-6)


def above_end(
    value: float, parameter: int, z: np.ndarray, trials: int, ones: np.ndarray, best: float
) -> float:
    """Return by how much the best likelihood with one parameter held exceeds the interval's end."""

    def loss(other: float) -> float:
        offset, sigma = (value, np.exp(other)) if parameter == 0 else (other, value)
        at = (z - offset) / sigma
        return -float(np.sum(ones * log_ndtr(at) + (trials - ones) * log_ndtr(-at)))

    found = minimize_scalar(loss, bounds=(-5.0, 5.0), method="bounded", options={"xatol": 1e-10})
    return 1.9207294 - best - float(found.fun)


class TestPromises:
    """What intervals and errors say of themselves."""

    @pytest.mark.parametrize("trials", [100, 150, 200])
    def test_intervals_cover_as_often_as_they_say(self, trials: int) -> None:
        """94..96 % of 4000: 2.9 standard errors, fails by chance once in 270 seeds."""
        found, _ = simulate(np.linspace(-2.0, 2.0, 7), trials, 4000, seed=trials)
        assert found.converged.all()
        offset = np.mean((found.offset_low_v < 0.0) & (found.offset_high_v > 0.0))
        sigma = np.mean((found.sigma_low_v < 1.0) & (found.sigma_high_v > 1.0))
        assert 0.94 <= offset <= 0.96
        assert 0.94 <= sigma <= 0.96

    def test_other_levels_cover_too(self) -> None:
        """80 % of 4000: 4.4 standard errors, fails by chance once in 1e5 seeds."""
        z = np.tile(np.linspace(-1.8, 2.2, 6), 4000)
        rng = np.random.default_rng(80)
        ones = rng.binomial(120, ndtr(z))
        curve = np.repeat(np.arange(4000), 6)
        found = fit_s_curves(z, np.full(z.size, 120), ones, curve, level=0.8)
        inside = (found.sigma_low_v < 1.0) & (found.sigma_high_v > 1.0)
        assert np.mean(inside) == pytest.approx(0.8, abs=4.4 * np.sqrt(0.16 / 4000))
        assert found.level == 0.8

    @pytest.mark.parametrize("name", ["5pt -2..2", "7pt -2..2", "11pt -3..3"])
    def test_variances_reach_the_least_possible(self, name: str) -> None:
        """Within 5 % of the Cramer-Rao bound at 100 decisions a level.

        20 000 curves: a variance's own error is 1 %, so chance fails once in 1e5 seeds;
        the bound is asymptotic, what it misses at this size must fit in, too.
        """
        design = next(entry for entry in FISHER["designs"] if entry["name"] == name)
        points = int(name.split("pt", maxsplit=1)[0])
        end = float(name.split("..")[1])
        found, _ = simulate(np.linspace(-end, end, points), 100, 20_000, seed=points)
        decisions = 100 * points
        assert decisions * found.offset_v.var() == pytest.approx(design["nvar_mu"], rel=0.05)
        assert decisions * found.sigma_v.var() == pytest.approx(design["nvar_sigma"], rel=0.05)
        assert decisions * np.mean(found.offset_error_v**2) == pytest.approx(
            design["nvar_mu"], rel=0.05
        )

    def test_information_adds_up_to_the_covariance(self) -> None:
        z = np.array([-1.0, 0.3, 1.2])
        found, _ = simulate(z, 10**9, 1, seed=1)
        expected = np.linalg.inv(1e9 * decision_information(z).sum(axis=0))
        np.testing.assert_allclose(found.covariance[0], expected, rtol=1e-3)

    def test_estimates_are_nearly_unbiased(self) -> None:
        """20 000 curves: five standard errors, fails by chance once in 1e6 seeds."""
        found, _ = simulate(np.linspace(-2.0, 2.0, 7), 200, 20_000, seed=3)
        assert abs(found.offset_v.mean()) < 5.0 * found.offset_v.std() / np.sqrt(20_000)
        assert abs(found.sigma_v.mean() - 1.0) < 0.005


class TestInvariance:
    """Units, signs and the order of rows are the caller's business."""

    Z = np.linspace(-1.7, 2.1, 8)
    ONES = np.array([5, 9, 22, 35, 61, 77, 92, 98])

    @pytest.mark.parametrize(
        ("scale", "shift"), [(1e-9, 0.0), (1e6, 0.0), (1e-3, 0.9), (1.0, -5e3)]
    )
    def test_scale_and_shift(self, scale: float, shift: float) -> None:
        plain = fit_one(self.Z, 100, self.ONES)
        moved = fit_one(self.Z * scale + shift, 100, self.ONES)
        assert moved.sigma_v[0] == pytest.approx(scale * plain.sigma_v[0], rel=1e-7)
        assert moved.sigma_high_v[0] == pytest.approx(scale * plain.sigma_high_v[0], rel=1e-7)
        assert moved.offset_low_v[0] == pytest.approx(
            scale * plain.offset_low_v[0] + shift, abs=1e-6 * scale
        )
        assert moved.deviance[0] == pytest.approx(plain.deviance[0], rel=1e-6)

    def test_exchanging_inputs_and_outcomes(self) -> None:
        plain = fit_one(self.Z, 100, self.ONES)
        mirrored = fit_one(-self.Z, 100, 100 - self.ONES)
        assert mirrored.offset_v[0] == pytest.approx(-plain.offset_v[0], rel=1e-9)
        assert mirrored.offset_low_v[0] == pytest.approx(-plain.offset_high_v[0], rel=1e-7)
        assert mirrored.sigma_low_v[0] == pytest.approx(plain.sigma_low_v[0], rel=1e-7)
        assert mirrored.tail_z[0] == pytest.approx(plain.tail_z[0], rel=1e-6)

    def test_rows_may_come_in_parts(self) -> None:
        """Counts at one level in two rows: same estimates, one more degree of freedom a row."""
        plain = fit_one(self.Z, 100, self.ONES)
        half = self.ONES // 2
        parts = fit_one(np.tile(self.Z, 2), 50, np.concatenate([half, self.ONES - half]))
        assert parts.offset_v[0] == pytest.approx(plain.offset_v[0], abs=1e-9)
        assert parts.sigma_high_v[0] == pytest.approx(plain.sigma_high_v[0], rel=1e-7)
        assert parts.degrees_of_freedom[0] == plain.degrees_of_freedom[0] + 8


def test_every_identified_curve_is_solved() -> None:
    """Wild designs, from 2 to 13 levels, 1 to 10 000 trials, 0.2 to 16 sigmas wide.

    Every fine curve converges, its ends lie on either side, and coverage over all of
    them (n about 17 000) stays within 5 standard errors of 95 %.
    """
    rng = np.random.default_rng(5)
    curves = 30_000
    length = rng.integers(2, 14, curves)
    curve = np.repeat(np.arange(curves), length)
    sigma_v = 10.0 ** rng.uniform(-5, -1, curves)
    offset_v = sigma_v * rng.normal(0.0, 10.0, curves)
    span = 10.0 ** rng.uniform(-0.7, 1.2, curves)
    z = rng.uniform(-1.0, 1.0, curve.size) * span[curve] + rng.normal(0.0, 1.0, curves)[curve]
    trials = np.maximum(1, 10.0 ** rng.uniform(0.0, 4.0, curves)).astype(int)[curve]
    ones = rng.binomial(trials, ndtr(z))
    found = fit_s_curves(offset_v[curve] + sigma_v[curve] * z, trials, ones, curve)
    fine = found.identification.reason == Reason.FINE
    assert fine.sum() > 15_000
    np.testing.assert_array_equal(found.converged, fine)
    assert np.all(
        (found.offset_low_v < found.offset_v) & (found.offset_v < found.offset_high_v) | ~fine
    )
    assert np.all(
        (found.sigma_low_v < found.sigma_v) & (found.sigma_v < found.sigma_high_v) | ~fine
    )
    covers = [
        (found.offset_low_v < offset_v) & (offset_v < found.offset_high_v),
        (found.sigma_low_v < sigma_v) & (sigma_v < found.sigma_high_v),
    ]
    allowed = 5.0 * np.sqrt(0.95 * 0.05 / fine.sum())
    for inside in covers:
        assert np.mean(inside[fine]) == pytest.approx(0.95, abs=allowed)


def test_the_simulated_latch() -> None:
    """Transient noise simulations at five conditions: all identified, none far from Gaussian."""
    with (TESTS / "data" / "latch_130n" / "noise.csv").open(newline="") as file:
        rows = list(csv.DictReader(file))
    conditions = list(dict.fromkeys((r["vdd_V"], r["temp_C"], r["vcm_V"]) for r in rows))
    curve = [conditions.index((r["vdd_V"], r["temp_C"], r["vcm_V"])) for r in rows]
    columns = [[float(r[name]) for r in rows] for name in ("vid_V", "trials", "ones")]
    found = fit_s_curves(*columns, curve)
    assert len(conditions) == 5
    assert found.converged.all()
    assert np.all(found.goodness_p > 0.001)
    # The nominal circuit is symmetrical: its trip point is zero within 4 standard errors.
    assert np.all(np.abs(found.offset_v) < 4.0 * found.offset_error_v)
    assert np.all((found.sigma_v > 2e-4) & (found.sigma_v < 1.5e-3))
