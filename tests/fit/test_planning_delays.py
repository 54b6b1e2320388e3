"""Planned overdrives and windows, against closed forms and against fitting what they give."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from behavgen.fit.intervals import student_quantile
from behavgen.fit.law import LawFit, fit_law
from behavgen.fit.law_solution import DelayRows
from behavgen.fit.planning.delays import (
    MOST_ROWS,
    KnownDelay,
    delay_halves,
    plan_delays,
)
from behavgen.fit.planning.sample_deviation import mean_deviation
from behavgen.fit.planning.windows import plan_windows

TAU_S = 15e-12
HIGHEST_V = 0.3
LOGARITHMIC = KnownDelay(
    law="logarithmic law",
    tau_s=TAU_S,
    node_overdrive_v=(HIGHEST_V,),
    node_s=(40e-12,),
    scatter=0.01,
)


def curve_s(overdrive_v: np.ndarray, kind: str) -> np.ndarray:
    """Return the delay of invented latches by textbook laws."""
    if kind == "logarithmic":
        return 40e-12 + TAU_S * np.log(HIGHEST_V / overdrive_v)
    soft = 40e-12 + TAU_S * np.log1p(0.05 / overdrive_v)
    return soft if kind == "soft" else soft + 20e-12 / (1.0 + overdrive_v / 0.03)


def fitted(
    overdrive_v: np.ndarray, kind: str, scatter: float, conditions: int, seed: int
) -> LawFit:
    """Fit delays with random relative scatter, alike at all conditions."""
    rng = np.random.default_rng(seed)
    shape = (conditions, len(overdrive_v))
    delay_s = curve_s(overdrive_v, kind) * (1.0 + scatter * rng.standard_normal(shape))
    return fit_law(
        DelayRows(
            overdrive_v=np.broadcast_to(overdrive_v, shape), delay_s=delay_s, weight=np.ones(shape)
        )
    )


def tau_halves(law: LawFit) -> np.ndarray:
    """Return the half widths of tau at every condition, relative, as the fit states them."""
    errors = np.sqrt(law.covariance[:, 0, 0]) / law.parameters[:, 0]
    halves: np.ndarray = student_quantile(0.95, law.freedom) * errors
    return halves


class TestHalves:
    """The logarithmic law is a straight line in ln(overdrive): textbook regression."""

    def test_weighted_straight_line(self) -> None:
        overdrive_v = np.geomspace(1e-6, HIGHEST_V, 20)
        found = delay_halves(replace(LOGARITHMIC, overdrive_v=tuple(overdrive_v)), lowest_v=1e-6)
        x, weight = -np.log(overdrive_v), curve_s(overdrive_v, "logarithmic") ** -2
        centred = x - np.average(x, weights=weight)
        error_s = 0.01 / math.sqrt(weight @ centred**2)
        reach = float(student_quantile(0.95, 18)) * mean_deviation(18)
        assert found.tau == pytest.approx(reach * error_s / TAU_S, rel=1e-5)

    def test_the_delay_is_known_least_at_an_end(self) -> None:
        overdrive_v = tuple(np.geomspace(1e-4, 0.1, 20))
        found = delay_halves(replace(LOGARITHMIC, overdrive_v=overdrive_v), lowest_v=1e-6)
        assert found.widest_v in (pytest.approx(1e-6), pytest.approx(HIGHEST_V))


class TestPromise:
    """Rows added to a pilot table, all fitted by the same law; 6 conditions, 6 tables.

    Means over 36 conditions stray by 2 % by chance (one standard deviation); the
    pilot's own scatter is known here.
    """

    @pytest.mark.parametrize(
        ("kind", "law"),
        [
            ("logarithmic", "logarithmic law"),
            ("soft", "soft regeneration law"),
            ("integrating", "integration and regeneration law"),
        ],
    )
    def test_of_tau(self, kind: str, law: str) -> None:
        scatter = 0.002
        pilot_v = np.geomspace(1e-6, HIGHEST_V, 24)
        pilot = fitted(pilot_v, kind, scatter, 6, seed=1)
        assert pilot.chosen.name == law
        known = KnownDelay(
            law=law,
            tau_s=float(pilot.parameters[0, 0]),
            node_overdrive_v=tuple(np.exp(pilot.log_node)),
            node_s=tuple(pilot.parameters[0, 1:]),
            scatter=scatter,
            overdrive_v=tuple(pilot_v),
        )
        now = delay_halves(known, lowest_v=1e-6)
        assert np.mean(tau_halves(pilot)) == pytest.approx(now.tau, rel=0.2)
        plan = plan_delays(known, lowest_v=1e-6, tau_within=now.tau / 1.6)
        assert plan is not None
        assert plan.tau_half <= now.tau / 1.6
        every_v = np.array([*pilot_v, *plan.tail_v, *plan.curve_v])
        halves = []
        for seed in range(2, 8):
            again = fitted(every_v, kind, scatter, 6, seed)
            assert again.chosen.name == law
            halves.append(np.mean(tau_halves(again)))
        assert np.mean(halves) == pytest.approx(plan.tau_half, rel=0.1)

    def test_of_the_delay(self) -> None:
        """What a logarithmic fit misses at the ends of the range, over 200 tables."""
        known = replace(LOGARITHMIC, overdrive_v=tuple(np.geomspace(1e-6, HIGHEST_V, 9)))
        plan = plan_delays(known, lowest_v=1e-6, delay_within=0.008)
        assert plan is not None
        every_v = np.array([*known.overdrive_v, *plan.tail_v, *plan.curve_v])
        law = fitted(every_v, "logarithmic", 0.01, 200, seed=3)
        assert law.chosen.name == "logarithmic law"
        fastest = law.parameters[:, 1] / 40e-12 - 1.0
        slowest_s = law.parameters[:, 1] + law.parameters[:, 0] * math.log(HIGHEST_V / 1e-6)
        slowest = slowest_s / curve_s(np.array([1e-6]), "logarithmic")[0] - 1.0
        widest = 1.96 * max(np.std(fastest), np.std(slowest))
        assert widest == pytest.approx(plan.delay_half, rel=0.12)


class TestPlan:
    """What a plan must be."""

    def test_a_first_table(self) -> None:
        plan = plan_delays(LOGARITHMIC, lowest_v=1e-6, tau_within=0.01, delay_within=0.02)
        assert plan is not None
        assert plan.tau_half <= 0.01
        assert plan.delay_half <= 0.02
        rows = (*plan.tail_v, *plan.curve_v)
        assert list(rows) == sorted(set(rows))
        assert rows[0] == pytest.approx(1e-6)
        assert plan.simulations == len(rows)

    def test_nothing_to_do(self) -> None:
        known = replace(LOGARITHMIC, overdrive_v=tuple(np.geomspace(1e-6, HIGHEST_V, 50)))
        now = delay_halves(known, lowest_v=1e-6)
        assert plan_delays(known, lowest_v=1e-6, tau_within=1.01 * now.tau) is None
        assert plan_delays(known, lowest_v=1e-6, tau_within=0.9 * now.tau) is not None

    def test_a_longer_tail_takes_fewer_rows(self) -> None:
        rows = []
        for lowest_v in (1e-4, 1e-6, 1e-8):
            plan = plan_delays(LOGARITHMIC, lowest_v=lowest_v, tau_within=0.01)
            assert plan is not None
            rows.append(plan.simulations)
        assert rows == sorted(rows, reverse=True)
        assert rows[0] > 1.5 * rows[2]

    def test_rows_for_tau_go_into_the_tail(self) -> None:
        """The integration law is straight far below its voltages of 50 mV and 30 mV."""
        pilot_v = np.geomspace(1e-6, HIGHEST_V, 24)
        pilot = fitted(pilot_v, "integrating", 0.002, 6, seed=1)
        known = KnownDelay(
            law=pilot.chosen.name,
            tau_s=TAU_S,
            node_overdrive_v=tuple(np.exp(pilot.log_node)),
            node_s=tuple(curve_s(np.exp(pilot.log_node), "integrating")),
            scatter=0.002,
            overdrive_v=tuple(pilot_v),
        )
        assert 0.5e-3 < known.tail_end_v < 5e-3
        plan = plan_delays(known, lowest_v=1e-6, tau_within=0.004)
        assert plan is not None
        assert len(plan.tail_v) > 4 * len(plan.curve_v)
        assert max(plan.tail_v) < known.tail_end_v

    def test_what_cannot_be_reached_is_not_promised(self) -> None:
        plan = plan_delays(LOGARITHMIC, lowest_v=1e-6, tau_within=1e-6)
        assert plan is not None
        assert plan.tau_half > 1e-6
        assert plan.simulations == MOST_ROWS


def test_windows_are_the_delays_read_the_other_way() -> None:
    """On the logarithmic law ``W(t) = 2 v exp(-(t - t_v) / tau)`` in closed form."""
    planned = plan_windows(LOGARITHMIC, lowest_v=1e-6)
    for time_s, window_v in zip(planned.resolve_time_s, planned.window_v, strict=True):
        assert window_v == pytest.approx(
            2.0 * HIGHEST_V * math.exp(-(time_s - 40e-12) / TAU_S), rel=1e-9
        )
    assert list(planned.resolve_time_s) == sorted(planned.resolve_time_s)
    assert planned.window_v[-1] == pytest.approx(2e-6)
