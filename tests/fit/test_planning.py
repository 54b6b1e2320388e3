"""A cell's whole plan: from a real latch's model, from hand-made ones, and from guesses."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from statistics import median

import pytest

from behavgen.fit.fit import fit
from behavgen.fit.planning.goals import Goals, Guess
from behavgen.fit.planning.plan import plan_cell
from behavgen.model import Box, Cell, ComparatorModel, Condition, Estimate, Parameter
from behavgen.project import load_project
from behavgen.tables.read import read_tables
from tests.example_models import full_model, minimal_model

ALL = Goals(sigma=0.05, offset_v=50e-6, mismatch=0.1, mean_v=0.5e-3, tau=0.003, delay=0.002)
NOTHING_KNOWN = ComparatorModel(cell=Cell(name=""), processes=(), box=Box())


@pytest.fixture(scope="module")
def latch() -> ComparatorModel:
    project = load_project(Path(__file__).parents[1] / "data" / "latch_130n")
    return fit(read_tables(project, "latch_130n"), project.cells[0])


def halves(model: ComparatorModel, quantity: str, name: str, *, relative: bool) -> list[float]:
    """Return the half widths of the intervals in a model's fits."""
    found = [
        parameter.estimate
        for entry in model.fits
        if entry.quantity == quantity
        for parameter in entry.parameters
        if parameter.name == name
    ]
    return [0.5 * (e.high - e.low) / (e.value if relative else 1.0) for e in found]


class TestPinned:
    """What is known now is what the fit says."""

    def test_intervals_are_those_of_the_fit(self, latch: ComparatorModel) -> None:
        known = {entry.quantity: entry for entry in plan_cell(latch, ALL, Guess()).pinned}
        for quantity, of, name, relative in (
            ("noise sigma", "noise", "noise_sigma_v", True),
            ("trip point", "noise", "offset_v", False),
            ("tau", "delay", "tau_s", True),
        ):
            expected = halves(latch, of, name, relative=relative)
            assert known[quantity].of == len(expected)
            assert known[quantity].half == pytest.approx(max(expected))
            assert known[quantity].median_half == pytest.approx(median(expected))

    def test_mismatch_has_its_chi_square_interval(self, latch: ComparatorModel) -> None:
        """The fit subtracts what brackets add, a few parts in a thousand."""
        (parameter,) = (p for p in latch.parameters if p.name == "mismatch_sigma_v")
        known = {entry.quantity: entry for entry in plan_cell(latch, ALL, Guess()).pinned}
        expected = 0.5 * (parameter.estimate.high - parameter.estimate.low)
        assert known["mismatch"].half == pytest.approx(
            expected / parameter.estimate.value, rel=0.01
        )

    def test_goals_are_judged(self, latch: ComparatorModel) -> None:
        loose = Goals(sigma=0.5, tau=1e-6)
        known = {entry.quantity: entry.reached for entry in plan_cell(latch, loose, Guess()).pinned}
        assert known["noise sigma"] is True
        assert known["tau"] is False
        assert known["mismatch"] is None


class TestFromAModel:
    """What falls short is planned, nothing else."""

    def test_every_s_curve_that_falls_short(self, latch: ComparatorModel) -> None:
        plan = plan_cell(latch, Goals(sigma=0.05), Guess())
        short = [half > 0.05 for half in halves(latch, "noise", "noise_sigma_v", relative=True)]
        assert len(plan.curves) == sum(short) > 0
        assert all(curve.search is None for curve in plan.curves)
        assert plan.instances is None
        assert plan.delay is None

    def test_s_curves_at_new_conditions(self, latch: ComparatorModel) -> None:
        """Each planned condition of the noise gets its S-curve; the table lies in one plane."""
        plan = plan_cell(latch, Goals(sigma=0.05), Guess())
        (noise,) = (entry for entry in plan.conditions if entry.quantity == "noise")
        assert noise.conditions is not None
        wanted = [added.condition for added in noise.conditions.following]
        assert [curve.condition for curve in plan.new_curves] == wanted != []
        assert noise.conditions.half_then < noise.conditions.half_now

    def test_what_is_wanted_less_costs_less(self, latch: ComparatorModel) -> None:
        close, loose = (plan_cell(latch, Goals(sigma=s), Guess()).cost for s in (0.02, 0.06))
        assert close.decisions > 4 * loose.decisions > 0

    def test_nothing_is_left_when_all_is_reached(self, latch: ComparatorModel) -> None:
        plan = plan_cell(latch, Goals(mismatch=0.3), Guess())
        assert plan.is_done
        assert (plan.cost.decisions, plan.cost.instances, plan.cost.simulations) == (0, 0, 0)

    def test_more_decisions_do_not_mend_a_misfit(self, latch: ComparatorModel) -> None:
        first = next(k for k, entry in enumerate(latch.fits) if entry.quantity == "noise")
        bent = replace(latch.fits[first], goodness=1e-6)
        model = replace(latch, fits=(*latch.fits[:first], bent, *latch.fits[first + 1 :]))
        plan = plan_cell(model, Goals(sigma=0.01), Guess())
        assert plan.misfits == (bent.condition,)
        assert bent.condition not in {curve.condition for curve in plan.curves}

    def test_the_cost_is_the_sum(self, latch: ComparatorModel) -> None:
        plan = plan_cell(latch, ALL, Guess())
        assert plan.instances is not None
        assert plan.delay is not None
        assert plan.delay.delays is not None
        curves = (*plan.curves, *plan.new_curves)
        assert plan.cost.decisions == sum(
            sum(c.s_curve.trials) + (c.search.decisions if c.search else 0)
            for c in curves
            if c.s_curve
        )
        assert plan.cost.instances == plan.instances.instances - latch.mismatch.instances
        rows = len(plan.delay.delays.tail_v) + len(plan.delay.delays.curve_v)
        assert plan.cost.simulations >= rows * plan.delay.conditions

    def test_delays_for_those_conditions_that_fall_short(self, latch: ComparatorModel) -> None:
        goals = Goals(tau=0.002)
        short = [half > 0.002 for half in halves(latch, "delay", "tau_s", relative=True)]
        plan = plan_cell(latch, goals, Guess())
        assert plan.delay is not None
        assert plan.delay.conditions == sum(short)
        assert plan.delay.windows is None  # there are windows already


class TestHandMade:
    """Models with little in them."""

    def test_a_delay_and_nothing_else(self) -> None:
        plan = plan_cell(minimal_model(), ALL, Guess())
        assert plan.unplanned == ("noise", "mean offset")
        assert plan.curves == ()

    def test_every_effect_but_few_fits(self) -> None:
        plan = plan_cell(full_model(), ALL, Guess())
        assert plan.spread_v == pytest.approx((6e-3**2 + 8e-4**2) ** 0.5, rel=0.1)
        assert {entry.quantity for entry in plan.pinned} >= {"tau", "mismatch"}

    @pytest.mark.parametrize(("half", "planned"), [(0.01, 0), (0.2, 1)])
    def test_a_ready_made_sigma_is_judged_by_its_error(self, half: float, planned: int) -> None:
        sigma = Parameter(
            name="noise_sigma_v",
            unit="V",
            estimate=Estimate(value=5e-4, low=5e-4 * (1.0 - half), high=5e-4 * (1.0 + half)),
        )
        model = replace(full_model(), parameters=(sigma,))
        assert len(plan_cell(model, Goals(sigma=0.05), Guess()).curves) == planned


class TestFromGuesses:
    """A first measurement."""

    def test_all_of_it(self) -> None:
        guess = Guess(sigma_v=0.5e-3, spread_v=6e-3, tau_s=15e-12)
        plan = plan_cell(NOTHING_KNOWN, replace(ALL, tau=0.01, delay=0.02), guess)
        assert plan.unplanned == ()
        assert plan.pinned == ()
        (curve,) = plan.curves
        assert curve.search is not None
        assert curve.search.high_v == pytest.approx(24e-3)
        assert curve.s_curve is not None
        assert curve.s_curve.sigma_half <= 0.05
        assert curve.s_curve.offset_half_v <= 50e-6
        assert plan.instances is not None
        assert plan.instances.mean_half * 6e-3 <= 0.5e-3
        assert plan.delay is not None
        assert plan.delay.delays is not None
        assert plan.delay.delays.tau_half <= 0.01
        assert plan.delay.windows is not None

    def test_a_guess_near_enough_needs_no_search(self) -> None:
        guess = Guess(sigma_v=0.5e-3, spread_v=0.1e-3, offset_v=2e-3)
        (curve,) = plan_cell(NOTHING_KNOWN, Goals(sigma=0.05), guess).curves
        assert curve.search is None
        assert curve.condition == Condition()
        assert curve.s_curve is not None
        assert sum(curve.s_curve.levels_v) / 4 == pytest.approx(2e-3)
        assert 1.0 < curve.price < 1.6

    def test_what_is_missing_is_named(self) -> None:
        plan = plan_cell(NOTHING_KNOWN, ALL, Guess())
        assert plan.unplanned == ("noise", "mean offset", "delay")
        assert not plan.is_done

    def test_the_range_asked_for(self) -> None:
        guess = Guess(tau_s=15e-12, lowest_v=1e-5, highest_v=0.1)
        plan = plan_cell(NOTHING_KNOWN, Goals(tau=0.02), guess)
        assert plan.delay is not None
        assert plan.delay.delays is not None
        rows = (*plan.delay.delays.tail_v, *plan.delay.delays.curve_v)
        assert (min(rows), max(rows)) == (pytest.approx(1e-5), pytest.approx(0.1))
