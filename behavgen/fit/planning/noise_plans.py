"""S-curves to measure: those of a model that fall short, or one that is only guessed."""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, log

import numpy as np

from behavgen.fit.intervals import normal_quantile
from behavgen.fit.planning.estimates import estimate_of, half_of
from behavgen.fit.planning.goals import Goals, Guess
from behavgen.fit.planning.s_curve import (
    KnownSCurve,
    PlannedSCurve,
    fewest_decisions,
    plan_s_curve,
)
from behavgen.fit.planning.surface_values import value_at
from behavgen.fit.planning.trip_point import PlannedSearch, find_trip_point
from behavgen.fit.s_curve_goodness import MISFIT_P
from behavgen.model import ComparatorModel, Condition, ConditionFit

__all__ = ["CurvePlan", "misfits", "plan_guessed_curve", "plan_new_curve", "plan_tabulated_curves"]

_SPREAD_OVER_SIGMA = 10.0
"""Offsets scatter about ten times as far as the noise of one decision (common practice)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class CurvePlan:
    """What to measure of one S-curve.

    Parameters
    ----------
    condition : Condition
    search : PlannedSearch or None
        To be done first where the trip point is not known well enough.
    s_curve : PlannedSCurve or None
        None where the search tells enough; after a search its levels move with
        the trip point found.
    fewest_decisions : int
        That no measurement of this precision can do without.
    """

    condition: Condition
    search: PlannedSearch | None
    s_curve: PlannedSCurve | None
    fewest_decisions: int

    @property
    def decisions(self) -> int:
        """In total."""
        parts = (self.search, self.s_curve)
        return sum(part.decisions for part in parts if part is not None)

    @property
    def price(self) -> float:
        """Decisions over the fewest possible."""
        return self.decisions / max(self.fewest_decisions, 1)


def plan_tabulated_curves(model: ComparatorModel, goals: Goals) -> tuple[CurvePlan, ...]:
    """Plan more decisions for the S-curves of a model that fall short of the goals."""
    plans = []
    for fit in model.fits:
        known = _known(fit) if fit.quantity == "noise" and not _is_misfit(fit) else None
        plan = _plan(known, fit.condition, goals) if known else None
        if plan is not None:
            plans.append(plan)
    return tuple(plans)


def plan_new_curve(
    model: ComparatorModel, condition: Condition, goals: Goals, *, sigma_error: float
) -> CurvePlan | None:
    """Plan an S-curve at a condition where there is none, from what the surfaces say of it.

    Parameters
    ----------
    model : ComparatorModel
        With a noise effect.
    condition : Condition
    goals : Goals
    sigma_error : float
        Standard error of ln sigma there.
    """
    assert model.noise is not None
    sigma_v = value_at(model, model.noise.surface, condition)
    offset_v = 0.0 if model.offset is None else value_at(model, model.offset.surface, condition)
    trips = [estimate_of(fit, "offset_v") for fit in model.fits if fit.quantity == "noise"]
    apart_v = float(np.std([trip.value for trip in trips if trip is not None]))
    known = KnownSCurve(
        offset_v=offset_v,
        sigma_v=sigma_v,
        offset_error_v=apart_v + 0.1 * sigma_v,
        sigma_error=sigma_error,
    )
    return _plan(known, condition, goals)


def plan_guessed_curve(guess: Guess, goals: Goals) -> CurvePlan | None:
    """Plan an S-curve from a guess; None without a guess of sigma or without a goal."""
    if guess.sigma_v is None:
        return None
    spread_v = guess.spread_v
    known = KnownSCurve(
        offset_v=guess.offset_v,
        sigma_v=guess.sigma_v,
        offset_error_v=_SPREAD_OVER_SIGMA * guess.sigma_v if spread_v is None else spread_v,
        sigma_error=guess.sigma_error,
    )
    return _plan(known, Condition(), goals)


def misfits(model: ComparatorModel) -> tuple[Condition, ...]:
    """Return where an S-curve does not follow the law, so that more decisions tell little."""
    return tuple(fit.condition for fit in model.fits if _is_misfit(fit))


def _is_misfit(fit: ConditionFit) -> bool:
    return fit.quantity == "noise" and fit.goodness is not None and fit.goodness < MISFIT_P


def _known(fit: ConditionFit) -> KnownSCurve | None:
    """Return what a fitted S-curve knows; None where its intervals have no ends."""
    offset, sigma = estimate_of(fit, "offset_v"), estimate_of(fit, "noise_sigma_v")
    if offset is None or sigma is None or sigma.low is None or sigma.high is None:
        return None
    reach = normal_quantile(sigma.level)
    known = KnownSCurve(
        offset_v=offset.value,
        sigma_v=sigma.value,
        offset_error_v=half_of(offset) / reach,
        sigma_error=0.5 * log(sigma.high / sigma.low) / reach,
        measured=True,
    )
    return known if known.offset_error_v < inf else None


def _plan(known: KnownSCurve, condition: Condition, goals: Goals) -> CurvePlan | None:
    """Return the plan for one curve; None when there is no goal or it is reached."""
    sigma_within = inf if goals.sigma is None else goals.sigma
    offset_within_v = inf if goals.offset_v is None else goals.offset_v
    if sigma_within == offset_within_v == inf:
        return None
    search = None if known.can_place_levels else find_trip_point(known)
    s_curve = plan_s_curve(
        known if search is None else search.found,
        sigma_within=sigma_within,
        offset_within_v=offset_within_v,
        level=goals.level,
    )
    if search is None and s_curve is None:
        return None
    if search is None and s_curve is not None:
        fewest = s_curve.fewest_decisions
    else:
        fewest = fewest_decisions(
            known.sigma_v,
            sigma_within=sigma_within,
            offset_within_v=offset_within_v,
            level=goals.level,
        )
    return CurvePlan(condition=condition, search=search, s_curve=s_curve, fewest_decisions=fewest)
