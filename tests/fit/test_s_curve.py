"""S-curve fits against published sets, another package, their own promises and simulation.

Simulated tests use fixed seeds; each states how often it would fail by chance
with a fresh one.
"""

from __future__ import annotations

import csv
import json
import re
from pathlib import Path

import numpy as np
import numpy.typing as npt
import pytest
from scipy.optimize import brentq, minimize_scalar
from scipy.special import gammaln, log_ndtr, ndtr

from behavgen.fit.s_curve import SCurveFits, fit_s_curves, misfit_notice
from behavgen.fit.s_curve_identification import Reason
from behavgen.formulas.noise import decision_information

TESTS = Path(__file__).parents[1]
# Sets of C. I. Bliss 1935, D. J. Finney 1971 and two textbooks; fits recomputed with
# a general statistics package, intervals by its likelihood.
PUBLISHED = json.loads((TESTS / "published" / "probit_refs.json").read_text())
FISHER = json.loads((TESTS / "published" / "fisher_power.json").read_text())


def fit_one(
    vdiff_v: npt.ArrayLike, trials: npt.ArrayLike, ones: npt.ArrayLike, level: float = 0.95
) -> SCurveFits:
    vdiff_v = np.asarray(vdiff_v, dtype=float)
    counts = np.broadcast_to(trials, vdiff_v.shape)
    return fit_s_curves(vdiff_v, counts, ones, np.zeros(vdiff_v.size, int), level=level)


def simulate(
    z: np.ndarray, trials: int, curves: int, seed: int, share: object = ndtr
) -> tuple[SCurveFits, np.ndarray]:
    """Fit curves with offset 0 and sigma 1 measured at levels `z`; also return the ones."""
    rng = np.random.default_rng(seed)
    ones = rng.binomial(trials, share(z), (curves, z.size))
    curve = np.repeat(np.arange(curves), z.size)
    counts = np.full(curve.size, trials)
    return fit_s_curves(np.tile(z, curves), counts, ones.ravel(), curve), ones


def reason_of(fits: SCurveFits, curve: int = 0) -> Reason:
    return Reason(fits.identification.reason[curve])


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
    """The definition, with another optimiser: the best likelihood there is half a quantile lower."""
    z, trials = np.array([-1.4, -0.9, -0.2, 0.5, 0.8, 1.9]), 25
    found, ones = simulate(z, trials, 5, seed=5)
    for i in range(5):

        def loglik(offset: float, sigma: float, k: np.ndarray = ones[i]) -> float:
            at = (z - offset) / sigma
            return float(np.sum(k * log_ndtr(at) + (trials - k) * log_ndtr(-at)))

        def of_offset(offset: float) -> float:
            best = minimize_scalar(
                lambda s: -loglik(offset, np.exp(s)), bounds=(-4, 4), options={"xatol": 1e-10}
            )
            return float(found.loglik[i] - 1.9207294 + best.fun)

        def of_sigma(sigma: float) -> float:
            best = minimize_scalar(
                lambda o: -loglik(o, sigma), bounds=(-5, 5), options={"xatol": 1e-10}
            )
            return float(found.loglik[i] - 1.9207294 + best.fun)

        offset, sigma = found.offset_v[i], found.sigma_v[i]
        ends = [
            brentq(of_offset, offset - 4 * sigma, offset),
            brentq(of_offset, offset, offset + 4),
        ]
        ends += [brentq(of_sigma, 0.1 * sigma, sigma), brentq(of_sigma, sigma, 20 * sigma)]
        ours = [found.offset_low_v, found.offset_high_v, found.sigma_low_v, found.sigma_high_v]
        np.testing.assert_allclose([end[i] for end in ours], ends, atol=2e-6)


class TestPromises:
    """What intervals and errors say of themselves."""

    @pytest.mark.parametrize("trials", [100, 150, 200])
    def test_intervals_cover_as_often_as_they_say(self, trials: int) -> None:
        """94..96 % of 4000: 2.9 standard errors, fails by chance once in 270 seeds."""
        found, _ = simulate(np.linspace(-2.0, 2.0, 7), trials, 4000, seed=trials)
        assert found.converged.all()
        offset = np.mean((found.offset_low_v < 0.0) & (0.0 < found.offset_high_v))
        sigma = np.mean((found.sigma_low_v < 1.0) & (1.0 < found.sigma_high_v))
        assert 0.94 <= offset <= 0.96
        assert 0.94 <= sigma <= 0.96

    def test_other_levels_cover_too(self) -> None:
        """80 % of 4000: 4.4 standard errors, fails by chance once in 1e5 seeds."""
        z = np.tile(np.linspace(-1.8, 2.2, 6), 4000)
        rng = np.random.default_rng(80)
        ones = rng.binomial(120, ndtr(z))
        curve = np.repeat(np.arange(4000), 6)
        found = fit_s_curves(z, np.full(z.size, 120), ones, curve, level=0.8)
        inside = (found.sigma_low_v < 1.0) & (1.0 < found.sigma_high_v)
        assert np.mean(inside) == pytest.approx(0.8, abs=4.4 * np.sqrt(0.16 / 4000))
        assert found.level == 0.8

    @pytest.mark.parametrize("name", ["5pt -2..2", "7pt -2..2", "11pt -3..3"])
    def test_variances_reach_the_least_possible(self, name: str) -> None:
        """Within 5 % of the Cramer-Rao bound at 100 decisions a level.

        20 000 curves: a variance's own error is 1 %, so chance fails once in 1e5 seeds;
        the bound is asymptotic, what it misses at this size must fit in, too.
        """
        design = next(entry for entry in FISHER["designs"] if entry["name"] == name)
        points = int(name.split("pt")[0])
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


class TestIdentification:
    """What cannot be fitted is refused in words, and nothing more is."""

    LEVELS_V = np.array([-1.5e-3, -1e-3, -0.5e-3, 0.0, 0.5e-3, 1e-3, 1.5e-3])

    def test_separated_counts_are_refused_and_bounded(self) -> None:
        found = fit_one(self.LEVELS_V, 200, [0, 0, 0, 200, 200, 200, 200])
        assert reason_of(found) is Reason.SEPARATED
        assert np.isnan(found.sigma_v[0])
        assert not found.converged[0]
        # By symmetry the best offset is half way: 400 ln Phi(h/sigma) = -1.9207, h 0.25 mV.
        bound_v = brentq(lambda s: 400 * log_ndtr(0.25e-3 / s) + 1.9207294, 1e-5, 1e-3)
        assert found.identification.sigma_bound_v[0] == pytest.approx(bound_v, rel=1e-6)
        fault = found.identification.fault(0)
        assert "only zeros up to -0.5 mV, only ones from 0 mV on" in fault.what
        assert f"sigma is at most {bound_v * 1e3:.4g} mV (95 %)" in fault.what
        assert "from -0.5 mV to 0 mV" in fault.allowed

    def test_one_level_with_both_outcomes_is_still_separated(self) -> None:
        found = fit_one(self.LEVELS_V, 200, [0, 0, 0, 77, 200, 200, 200])
        assert reason_of(found) is Reason.SEPARATED
        assert "only the level 0 mV gave both" in found.identification.fault(0).what
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
    def test_the_nearest_counts_that_are_fine_are_fitted(self, ones: list[int]) -> None:
        found = fit_one(self.LEVELS_V, 200, ones)
        assert reason_of(found) is Reason.FINE
        assert found.converged[0]
        assert 0.0 < found.sigma_low_v[0] < found.sigma_v[0] < found.sigma_high_v[0] < 1e-3

    def test_two_levels_are_enough(self) -> None:
        # Closed form: the line through both probits, z = Phi^-1(0.16), Phi^-1(0.84).
        found = fit_one([-1e-3, 1e-3], 100, [16, 84])
        assert found.offset_v[0] == pytest.approx(0.0, abs=1e-12)
        assert found.sigma_v[0] == pytest.approx(1e-3 / 0.9944579, rel=1e-6)
        assert found.deviance[0] == pytest.approx(0.0, abs=1e-9)
        assert np.isnan(found.goodness_p[0])
        assert np.isnan(found.tail_z[0])

    def test_one_level_is_too_few(self) -> None:
        found = fit_one([1e-3, 1e-3, 2e-3], [50, 50, 0], [10, 12, 0])
        assert reason_of(found) is Reason.TOO_FEW
        fault = found.identification.fault(0)
        assert "all 100 decisions are at 1 mV" in fault.what
        assert "two levels or more" in fault.allowed

    def test_a_curve_without_rows_is_too_few(self) -> None:
        found = fit_s_curves([0.0, 1.0], [9, 9], [2, 7], [1, 1])
        assert reason_of(found, 0) is Reason.TOO_FEW
        assert "no decision" in found.identification.fault(0).what

    @pytest.mark.parametrize(("ones", "side"), [(0, "above 1.5 mV"), (200, "below -1.5 mV")])
    def test_decisions_all_alike(self, ones: int, side: str) -> None:
        found = fit_one(self.LEVELS_V, 200, np.full(7, ones))
        assert reason_of(found) is Reason.ONE_SIDED
        assert side in found.identification.fault(0).allowed

    @pytest.mark.parametrize("ones", [[199, 180, 150, 100, 60, 20, 3], [200, 200, 200, 0, 0, 0, 0]])
    def test_falling_curves_are_reversed(self, ones: list[int]) -> None:
        found = fit_one(self.LEVELS_V, 200, ones)
        assert reason_of(found) is Reason.REVERSED
        assert "V(inp) - V(inn)" in found.identification.fault(0).allowed

    @pytest.mark.parametrize(
        "ones", [[100] * 7, [96, 104, 99, 103, 95, 101, 104], [104, 101, 95, 103, 99, 104, 96]]
    )
    def test_flat_curves(self, ones: list[int]) -> None:
        found = fit_one(self.LEVELS_V, 200, ones)
        assert reason_of(found) is Reason.FLAT
        assert "does not rise from -1.5 mV to 1.5 mV" in found.identification.fault(0).what

    def test_slope_test_agrees_with_the_published_trend_statistic(self) -> None:
        """P. Armitage's trend test equals N times the squared correlation of bit and level."""
        trials, ones = np.full(7, 40), np.array([15, 17, 19, 22, 20, 25, 24])
        bits = np.concatenate([np.repeat([1.0, 0.0], [k, 40 - k]) for k in ones])
        levels = np.repeat(self.LEVELS_V, trials)
        expected = np.sqrt(bits.size) * np.corrcoef(bits, levels)[0, 1]
        found = fit_one(self.LEVELS_V, trials, ones)
        assert found.identification.slope_z[0] == pytest.approx(expected, rel=1e-9)

    def test_noise_alone_is_hardly_ever_a_curve(self) -> None:
        """0.05 % of 20 000 coin-tossing curves rise by 3.291: at most 30 seen (p 1e-6)."""
        found, _ = simulate(
            np.linspace(-2, 2, 7), 100, 20_000, seed=50, share=lambda z: 0.5 + 0 * z
        )
        assert np.sum(found.identification.reason == Reason.FINE) <= 30

    def test_the_bound_on_sigma_holds(self) -> None:
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

    def test_a_refused_curve_leaves_its_neighbours_alone(self) -> None:
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

    def test_no_rows_at_all(self) -> None:
        found = fit_s_curves([], [], [], [])
        assert found.offset_v.shape == (0,)

    @pytest.mark.parametrize("reason", [r for r in Reason if r is not Reason.FINE])
    def test_every_refusal_says_what_was_found_and_what_to_do(self, reason: Reason) -> None:
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


class TestGoodness:
    """Misfit is seen, rarely where there is none, and widens the intervals."""

    @pytest.mark.parametrize(
        ("z", "trials"),
        [
            (np.linspace(-2, 2, 7), 100),
            (np.linspace(-4, 4, 9), 200),  # levels where no wrong decision is expected
            (np.linspace(-2.5, 2.5, 400), 1),  # a ramp: single decisions
        ],
        ids=["usual", "wide", "ramp"],
    )
    def test_false_alarms(self, z: np.ndarray, trials: int) -> None:
        """At 1 % and 0.1 % of 20 000 curves: no more than 1.3 and 2 times as many."""
        curves = 20_000 if z.size < 100 else 2_000
        found, _ = simulate(z, trials, curves, seed=z.size)
        p = found.goodness_p[found.identification.reason == Reason.FINE]
        assert np.mean(p < 0.01) <= 0.013
        assert np.mean(p < 0.001) <= 0.002
        assert np.mean(p < 0.05) >= 0.02
        tails = found.tail_z[found.identification.reason == Reason.FINE]
        assert np.mean(np.abs(tails) > 2.576) == pytest.approx(0.01, abs=0.005)

    def test_one_stray_decision_far_out_is_no_misfit(self) -> None:
        """Pearson's statistic alone would refuse this curve: one zero in 200 at 4 sigma."""
        z = np.array([-4.0, -1.5, -0.75, 0.0, 0.75, 1.5, 4.0])
        ones = np.round(200 * ndtr(z)).astype(int)
        ones[-1] = 199
        found = fit_one(z, 200, ones)
        assert found.pearson[0] > 20.5  # chi-square, 5 degrees of freedom, p 0.001
        assert found.goodness_p[0] > 0.01
        assert found.overdispersion[0] == 1.0

    def test_drift_between_levels_is_seen_and_covered(self) -> None:
        """Offset moves by 0.4 sigma rms between levels: intervals must still cover.

        4000 curves at 95 %: allowed is 92 % and more. Plain intervals cover far less.
        """
        rng = np.random.default_rng(44)
        z = np.linspace(-2.0, 2.0, 9)
        ones = rng.binomial(400, ndtr(z + rng.normal(0.0, 0.4, (4000, 9))))
        curve = np.repeat(np.arange(4000), 9)
        found = fit_s_curves(np.tile(z, 4000), np.full(curve.size, 400), ones.ravel(), curve)
        assert np.mean(found.overdispersion > 1.0) > 0.99
        offset = (found.offset_low_v < 0.0) & (0.0 < found.offset_high_v)
        assert np.mean(offset) > 0.92
        plain_error = found.offset_error_v / np.sqrt(found.overdispersion)
        assert np.mean(np.abs(found.offset_v) < 1.96 * plain_error) < 0.6

    def test_errors_grow_with_the_intervals(self) -> None:
        z = np.linspace(-2.0, 2.0, 7)
        ones = np.array([10, 2, 60, 80, 190, 150, 199])
        found = fit_one(z, 200, ones)
        assert found.overdispersion[0] > 5.0
        notice = misfit_notice(found, 0)
        assert f"multiplied by {found.overdispersion[0]:.3g}" in notice
        assert f"deviance {found.deviance[0]:.3g} on 5 degrees of freedom" in notice

    def test_a_good_fit_gives_no_notice(self) -> None:
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
    def test_the_shape_of_the_noise_is_named(self, share: object, word: str) -> None:
        found, _ = simulate(np.linspace(-2.5, 2.5, 11), 4000, 20, seed=2, share=share)
        notices = [misfit_notice(found, i) for i in range(20)]
        assert all(f"tails {word} than Gaussian" in notice for notice in notices)


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
