"""Planned S-curves against published information, and against what measuring them gives.

Simulated tests use fixed seeds; each states how far its mean would stray by chance
with a fresh one.
"""

from __future__ import annotations

import json
from math import inf
from pathlib import Path

import numpy as np
import pytest
from scipy.special import ndtr

from behavgen.fit.intervals import normal_quantile
from behavgen.fit.planning.s_curve import (
    KnownSCurve,
    PlannedSCurve,
    expected_halves,
    fewest_decisions,
    plan_s_curve,
)
from behavgen.fit.planning.trip_point import PlannedSearch, find_trip_point
from behavgen.fit.s_curve import SCurveFits, fit_s_curves

# Recomputed from the expected information of a probit regression (D. J. Finney,
# Probit Analysis, 1971) with a general statistics package.
FISHER = json.loads((Path(__file__).parents[1] / "published" / "fisher_power.json").read_text())

SIGMA_V = 0.5e-3
OFFSET_V = 1e-3


def known(offset_error: float, sigma_error: float, *, measured: bool = False) -> KnownSCurve:
    """Offset error in sigmas, sigma error relative."""
    return KnownSCurve(
        offset_v=OFFSET_V,
        sigma_v=SIGMA_V,
        offset_error_v=offset_error * SIGMA_V,
        sigma_error=sigma_error,
        measured=measured,
    )


class TestFewestDecisions:
    """Closed-form bounds."""

    @pytest.mark.parametrize("row", FISHER["N_table"])
    def test_published_numbers_of_decisions(self, row: dict[str, float]) -> None:
        """A test of given power needs what an interval of the same number of errors needs."""
        reach = normal_quantile(1.0 - row["alpha"]) + normal_quantile(2.0 * row["power"] - 1.0)
        level = float(2.0 * ndtr(reach) - 1.0)
        for within, name in ((0.02, "sigma2pct_opt"), (0.05, "sigma5pct_opt"),
                             (0.1, "sigma10pct_opt")):  # fmt: skip
            found = fewest_decisions(1.0, sigma_within=within, level=level)
            assert found == pytest.approx(row[name], rel=1e-4, abs=1)
        for within_v, name in ((0.1, "mu01_opt"), (0.05, "mu005_opt")):
            found = fewest_decisions(1.0, offset_within_v=within_v, level=level)
            assert found == pytest.approx(row[name], rel=1e-4, abs=1)

    def test_both_at_once_lie_at_one_pair_of_levels(self) -> None:
        """Goals in the ratio of the published pair +-1.138 need just what that pair needs."""
        pair = FISHER["designs"][0]
        assert pair["name"] == "2pt D +-1.138"
        reach, decisions = normal_quantile(0.95), 10_000
        found = fewest_decisions(
            1.0,
            sigma_within=reach * (pair["nvar_sigma"] / decisions) ** 0.5,
            offset_within_v=reach * (pair["nvar_mu"] / decisions) ** 0.5,
        )
        assert found == pytest.approx(decisions, rel=1e-3)

    def test_no_levels_whatever_need_fewer(self) -> None:
        rng = np.random.default_rng(1)
        exact = known(0.0, 0.0)
        for _ in range(200):
            levels_v = OFFSET_V + SIGMA_V * rng.uniform(-3.0, 3.0, rng.integers(2, 9))
            offset_half_v, sigma_half = expected_halves(exact, levels_v, 1000)
            fewest = fewest_decisions(
                SIGMA_V, sigma_within=sigma_half, offset_within_v=offset_half_v
            )
            assert fewest <= 1000 * len(levels_v) + 1

    def test_measured_rows_are_deducted(self) -> None:
        """Half of the information there: half of the decisions to go."""
        alone = fewest_decisions(1.0, sigma_within=0.02)
        error = 0.02 / normal_quantile(0.95) * 2.0**0.5
        assert fewest_decisions(1.0, sigma_within=0.02, sigma_error=error) == pytest.approx(
            alone / 2, abs=1
        )


@pytest.mark.parametrize("design", FISHER["designs"], ids=lambda design: design["name"])
def test_information_of_published_designs(design: dict[str, object]) -> None:
    name = str(design["name"])
    if name.startswith("2pt"):
        z = np.array([-1.0, 1.0]) * FISHER["z_D" if " D " in name else "z_sigma"]
    elif name.startswith("3pt"):
        z = np.array([-1.5, 0.0, 1.5])
    else:
        low, high = (float(part) for part in name.split()[1].split(".."))
        z = np.linspace(low, high, int(name.split("pt", maxsplit=1)[0]))
        z += 1.0 if name.endswith("by 1 sigma") else 2.0 if name.endswith("2 sigma") else 0.0
    offset_half_v, sigma_half = expected_halves(known(0.0, 0.0), OFFSET_V + SIGMA_V * z, 1000)
    decisions, reach = 1000 * len(z), normal_quantile(0.95)
    assert decisions * (offset_half_v / reach / SIGMA_V) ** 2 == pytest.approx(design["nvar_mu"])
    assert decisions * (sigma_half / reach) ** 2 == pytest.approx(design["nvar_sigma"])


class TestPlan:
    """What a plan must be, whatever its promise is worth."""

    @pytest.mark.parametrize(
        ("sigma_within", "offset_within_v"),
        [(0.05, inf), (inf, 30e-6), (0.05, 30e-6), (0.001, inf)],
    )
    @pytest.mark.parametrize("errors", [(0.02, 0.02), (0.3, 0.2), (0.5, 0.35)])
    def test_it_reaches_what_is_wanted_and_states_its_price(
        self, errors: tuple[float, float], sigma_within: float, offset_within_v: float
    ) -> None:
        plan = plan_s_curve(
            known(*errors), sigma_within=sigma_within, offset_within_v=offset_within_v
        )
        assert plan is not None
        assert plan.sigma_half <= sigma_within
        assert plan.offset_half_v <= offset_within_v
        assert plan.decisions >= plan.fewest_decisions
        assert len(set(plan.levels_v)) >= 4
        assert list(plan.levels_v) == sorted(plan.levels_v)

    def test_levels_placed_by_a_sure_guess_cost_little(self) -> None:
        """Four levels instead of two: a ninth more for sigma alone, less for both."""
        sure = known(0.02, 0.02)
        alone = plan_s_curve(sure, sigma_within=0.02)
        both = plan_s_curve(sure, sigma_within=0.02, offset_within_v=0.02 * SIGMA_V)
        assert alone is not None
        assert both is not None
        assert alone.decisions / alone.fewest_decisions < 1.15
        assert both.decisions / both.fewest_decisions < 1.1

    def test_a_doubtful_guess_costs_more(self) -> None:
        costs = []
        for errors in ((0.05, 0.05), (0.3, 0.2), (0.5, 0.35)):
            plan = plan_s_curve(known(*errors), sigma_within=0.05)
            assert plan is not None
            costs.append(plan.decisions)
        assert costs == sorted(costs)

    def test_nothing_to_do(self) -> None:
        error = 0.04 / normal_quantile(0.95)
        reached = known(error, error, measured=True)
        assert plan_s_curve(reached, sigma_within=0.05, offset_within_v=0.05 * SIGMA_V) is None
        assert plan_s_curve(reached, sigma_within=0.03) is not None

    def test_scale_does_not_matter(self) -> None:
        """A thousandth of sigma: the same decisions at a thousandth of the levels."""
        plan = plan_s_curve(known(0.1, 0.1), sigma_within=0.05)
        small = plan_s_curve(
            KnownSCurve(offset_v=1e-6, sigma_v=0.5e-6, offset_error_v=0.05e-6, sigma_error=0.1),
            sigma_within=0.05,
        )
        assert plan is not None
        assert small is not None
        assert small.trials == plan.trials
        np.testing.assert_allclose(np.array(small.levels_v) * 1e3, plan.levels_v, rtol=1e-9)


def measure(
    levels_v: np.ndarray,
    trials: np.ndarray,
    offset_v: np.ndarray,
    sigma_v: np.ndarray,
    rng: np.random.Generator,
) -> np.ndarray:
    """Count ones at levels, shape (R, L), of R true curves."""
    ones: np.ndarray = rng.binomial(trials, ndtr((levels_v - offset_v[:, None]) / sigma_v[:, None]))
    return ones


def fit(levels_v: np.ndarray, trials: np.ndarray, ones: np.ndarray) -> SCurveFits:
    """Fit curves of shape (R, L)."""
    curve = np.repeat(np.arange(len(ones)), ones.shape[1])
    trials = np.broadcast_to(trials, ones.shape)
    return fit_s_curves(levels_v.ravel(), trials.ravel(), ones.ravel(), curve)


def drawn(
    about: KnownSCurve, curves: int, rng: np.random.Generator
) -> tuple[np.ndarray, np.ndarray]:
    """Return offsets and sigmas that may be true as far as is known."""
    offset_v = about.offset_v + about.offset_error_v * rng.standard_normal(curves)
    return offset_v, about.sigma_v * np.exp(about.sigma_error * rng.standard_normal(curves))


def kept_promise(fits: SCurveFits, sigma_v: np.ndarray, plan: PlannedSCurve) -> tuple[float, float]:
    """Return mean half widths of offset and sigma over the promised ones.

    A few of few decisions are refused or taken for no S-curve; they are left out.
    """
    lawful = fits.overdispersion == 1.0
    assert lawful.mean() > 0.98
    offset_half_v = 0.5 * (fits.offset_high_v - fits.offset_low_v)
    sigma_half = 0.5 * (fits.sigma_high_v - fits.sigma_low_v) / sigma_v
    return (
        float(np.mean(offset_half_v[lawful])) / plan.offset_half_v,
        float(np.mean(sigma_half[lawful])) / plan.sigma_half,
    )


class TestPromise:
    """Means over 300 curves: by chance they stray by 2 % at most (one standard deviation)."""

    @pytest.mark.parametrize(
        ("sigma_within", "offset_within_v"),
        [(0.05, inf), (0.15, inf), (inf, 30e-6), (0.05, 30e-6)],
    )
    @pytest.mark.parametrize("errors", [(0.05, 0.05), (0.3, 0.2), (0.5, 0.3)])
    def test_of_a_first_measurement(
        self, errors: tuple[float, float], sigma_within: float, offset_within_v: float
    ) -> None:
        about = known(*errors)
        plan = plan_s_curve(about, sigma_within=sigma_within, offset_within_v=offset_within_v)
        assert plan is not None
        rng = np.random.default_rng(3)
        offset_v, sigma_v = drawn(about, 300, rng)
        levels_v = np.tile(plan.levels_v, (300, 1))
        trials = np.array(plan.trials)
        fits = fit(levels_v, trials, measure(levels_v, trials, offset_v, sigma_v, rng))
        np.testing.assert_allclose(kept_promise(fits, sigma_v, plan), 1.0, atol=0.1)

    def test_of_rows_added_to_a_table(self) -> None:
        """Pilot curves of 7 levels x 200, each planned on by its own fit."""
        rng = np.random.default_rng(4)
        curves = 40
        offset_v, sigma_v = drawn(known(0.2, 0.2), curves, rng)
        pilot_v = np.tile(OFFSET_V + SIGMA_V * np.linspace(-2.0, 2.0, 7), (curves, 1))
        pilot_trials = np.full(7, 200)
        pilot_ones = measure(pilot_v, pilot_trials, offset_v, sigma_v, rng)
        pilot = fit(pilot_v, pilot_trials, pilot_ones)
        ratios = []
        for c in range(curves):
            plan = plan_s_curve(
                KnownSCurve(
                    offset_v=float(pilot.offset_v[c]),
                    sigma_v=float(pilot.sigma_v[c]),
                    offset_error_v=float(pilot.offset_error_v[c]),
                    sigma_error=float(pilot.sigma_error_v[c] / pilot.sigma_v[c]),
                    measured=True,
                ),
                sigma_within=0.04,
            )
            assert plan is not None
            levels_v = np.array([[*pilot_v[c], *plan.levels_v]])
            trials = np.array([*pilot_trials, *plan.trials])
            own = offset_v[c : c + 1], sigma_v[c : c + 1]
            new = measure(levels_v[:, 7:], trials[7:], *own, rng)
            fits = fit(levels_v, trials, np.column_stack([pilot_ones[c : c + 1], new]))
            ratios.append(kept_promise(fits, own[1], plan))
        np.testing.assert_allclose(np.mean(ratios, axis=0), 1.0, atol=0.1)

    def test_after_a_search_for_the_trip_point(self) -> None:
        """Offsets scatter 12 sigmas: halve, sweep, fit, plan on, measure, fit all."""
        rough = KnownSCurve(
            offset_v=0.0, sigma_v=SIGMA_V, offset_error_v=12.0 * SIGMA_V, sigma_error=0.3
        )
        assert not rough.can_place_levels
        search = find_trip_point(rough)
        assert search.halvings == 7  # 96 sigmas down to one
        promised = plan_s_curve(search.found, sigma_within=0.05)
        assert promised is not None
        rng = np.random.default_rng(5)
        ratios, decisions = [], []
        for _ in range(40):
            (offset_v,), (sigma_v,) = drawn(rough, 1, rng)
            levels_v, trials, ones = searched(search, offset_v, sigma_v, rng)
            swept = fit(levels_v[None], trials, ones[None])
            about = KnownSCurve(
                offset_v=float(swept.offset_v[0]),
                sigma_v=float(swept.sigma_v[0]),
                offset_error_v=float(swept.offset_error_v[0]),
                sigma_error=float(swept.sigma_error_v[0] / swept.sigma_v[0]),
                measured=True,
            )
            assert about.can_place_levels
            plan = plan_s_curve(about, sigma_within=0.05)
            assert plan is not None
            decisions.append(plan.decisions)
            levels_v, trials = np.append(levels_v, plan.levels_v), np.append(trials, plan.trials)
            truth = np.array([offset_v]), np.array([sigma_v])
            new = measure(levels_v[None, len(ones) :], trials[len(ones) :], *truth, rng)
            fits = fit(levels_v[None], trials, np.append(ones, new)[None])
            ratios.append(kept_promise(fits, truth[1], plan))
        np.testing.assert_allclose(np.mean(ratios, axis=0), 1.0, atol=0.1)
        assert np.mean(decisions) == pytest.approx(promised.decisions, rel=0.1)


def searched(
    search: PlannedSearch, offset_v: float, sigma_v: float, rng: np.random.Generator
) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Follow a planned search with noisy decisions; return the rows of its sweep."""
    low_v, high_v = search.low_v, search.high_v
    for _ in range(search.halvings):
        middle_v = 0.5 * (low_v + high_v)
        one = middle_v + sigma_v * rng.standard_normal() > offset_v
        low_v, high_v = (low_v, middle_v) if one else (middle_v, high_v)
    levels_v = 0.5 * (low_v + high_v) + np.array(search.sweep_v)
    trials = np.full(levels_v.size, search.trials)
    truth = np.array([offset_v]), np.array([sigma_v])
    return levels_v, trials, measure(levels_v[None], trials, *truth, rng)[0]


def test_a_near_guess_is_swept_around_at_once() -> None:
    search = find_trip_point(known(0.4, 0.5))
    assert search.halvings == 0
    assert search.found.can_place_levels
