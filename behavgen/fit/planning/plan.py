"""Everything to measure next for one cell, and what it costs."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import inf
from statistics import median

from behavgen.fit.intervals import normal_quantile
from behavgen.fit.planning.condition_plans import ConditionPlan, plan_all_conditions
from behavgen.fit.planning.conditions import NextCondition
from behavgen.fit.planning.delay_plans import (
    DelayPlan,
    plan_guessed_delays,
    plan_tabulated_delays,
)
from behavgen.fit.planning.goals import Goals, Guess
from behavgen.fit.planning.instances import PlannedInstances, plan_instances
from behavgen.fit.planning.noise_plans import (
    CurvePlan,
    misfits,
    plan_guessed_curve,
    plan_new_curve,
    plan_tabulated_curves,
)
from behavgen.fit.planning.pinned import Pinned, mismatch_sigma_v, pinned
from behavgen.fit.planning.surface_values import value_at
from behavgen.model import ComparatorModel, Condition

__all__ = ["CellPlan", "Cost", "plan_cell"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Cost:
    """What a plan takes.

    Parameters
    ----------
    decisions : int
        With noise, of S-curves and searches.
    instances : int
    halvings : int
        Decisions without noise that find the offsets of the instances.
    simulations : int
        Delays and windows.
    """

    decisions: int
    instances: int
    halvings: int
    simulations: int


@dataclass(frozen=True, slots=True, kw_only=True)
class CellPlan:
    """What a cell's tables pin down, and what to measure next.

    Parameters
    ----------
    goals : Goals
    pinned : tuple of Pinned
    curves : tuple of CurvePlan
        S-curves that fall short.
    new_curves : tuple of CurvePlan
        S-curves at conditions to add.
    misfits : tuple of Condition
        S-curves that more decisions do not help.
    instances : PlannedInstances or None
    spread_v : float or None
        Spread of the offset between instances, as known or guessed, V.
    delay : DelayPlan or None
    conditions : tuple of ConditionPlan
    unplanned : tuple of str
        Quantities asked for of which neither table nor guess knows enough:
        ``"noise"``, ``"mean offset"``, ``"delay"``.
    cost : Cost
    """

    goals: Goals
    pinned: tuple[Pinned, ...]
    curves: tuple[CurvePlan, ...]
    new_curves: tuple[CurvePlan, ...]
    misfits: tuple[Condition, ...]
    instances: PlannedInstances | None
    spread_v: float | None
    delay: DelayPlan | None
    conditions: tuple[ConditionPlan, ...]
    unplanned: tuple[str, ...]
    cost: Cost

    @property
    def is_done(self) -> bool:
        """Whether nothing is left to measure for the goals."""
        added = [p.conditions.following for p in self.conditions if p.conditions is not None]
        open_parts = (self.curves, self.misfits, self.instances, self.delay, self.unplanned)
        return not any(open_parts) and not any(added)


def plan_cell(model: ComparatorModel, goals: Goals, guess: Guess) -> CellPlan:
    """Plan what a model needs; guesses fill in what it does not know.

    Parameters
    ----------
    model : ComparatorModel
        For a first measurement one without any effect.
    goals : Goals
    guess : Guess
    """
    conditions = plan_all_conditions(model, goals)
    curves = _curves(model, goals, guess)
    new_curves = _new_curves(model, goals, conditions)
    spread_v = mismatch_sigma_v(model) or guess.spread_v
    instances = _instances(model, goals, spread_v)
    if model.delay is None:
        delay = plan_guessed_delays(guess, goals)
    else:
        delay = plan_tabulated_delays(model, goals, guess)
    return CellPlan(
        goals=goals,
        pinned=pinned(model, goals),
        curves=curves,
        new_curves=new_curves,
        misfits=misfits(model),
        instances=instances,
        spread_v=spread_v,
        delay=delay,
        conditions=conditions,
        unplanned=_unplanned(model, goals, guess, spread_v),
        cost=Cost(
            decisions=sum(curve.decisions for curve in (*curves, *new_curves)),
            instances=instances.more if instances else 0,
            halvings=instances.decisions if instances else 0,
            simulations=(delay.simulations if delay else 0)
            + _usual_rows(model) * len(_added(conditions, "delay")),
        ),
    )


def _curves(model: ComparatorModel, goals: Goals, guess: Guess) -> tuple[CurvePlan, ...]:
    if _has_curves(model):
        return plan_tabulated_curves(model, goals)
    if model.noise is not None:
        if all(entry.reached is not False for entry in pinned(model, goals)):
            return ()
        guess = replace(guess, sigma_v=value_at(model, model.noise.surface, Condition()))
    plan = plan_guessed_curve(guess, goals)
    return (plan,) if plan else ()


def _new_curves(
    model: ComparatorModel, goals: Goals, conditions: tuple[ConditionPlan, ...]
) -> tuple[CurvePlan, ...]:
    if not _has_curves(model):
        return ()
    plans = (
        plan_new_curve(
            model, added.condition, goals, sigma_error=added.half / normal_quantile(goals.level)
        )
        for added in _added(conditions, "noise")
    )
    return tuple(plan for plan in plans if plan is not None)


def _instances(
    model: ComparatorModel, goals: Goals, spread_v: float | None
) -> PlannedInstances | None:
    mean_within = inf
    if goals.mean_v is not None and spread_v:
        mean_within = goals.mean_v / spread_v
    if goals.mismatch is None and mean_within == inf:
        return None
    return plan_instances(
        sigma_within=inf if goals.mismatch is None else goals.mismatch,
        mean_within=mean_within,
        measured=model.mismatch.instances if model.mismatch is not None else 0,
        level=goals.level,
    )


def _unplanned(
    model: ComparatorModel, goals: Goals, guess: Guess, spread_v: float | None
) -> tuple[str, ...]:
    asked_of_noise = goals.sigma is not None or goals.offset_v is not None
    asked_of_delay = goals.tau is not None or goals.delay is not None
    found = (
        ("noise", asked_of_noise and model.noise is None and guess.sigma_v is None),
        ("mean offset", goals.mean_v is not None and not spread_v),
        ("delay", asked_of_delay and model.delay is None and guess.tau_s is None),
    )
    return tuple(name for name, missing in found if missing)


def _has_curves(model: ComparatorModel) -> bool:
    return any(fit.quantity == "noise" for fit in model.fits)


def _added(conditions: tuple[ConditionPlan, ...], quantity: str) -> list[NextCondition]:
    plans = [plan.conditions for plan in conditions if plan.quantity == quantity]
    return [added for plan in plans if plan is not None for added in plan.following]


def _usual_rows(model: ComparatorModel) -> int:
    rows = [len(points.x) for points in model.points if points.quantity == "delay"]
    return round(median(rows)) if rows else 0
