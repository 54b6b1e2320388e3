"""Delays and windows to measure: where a model falls short, or from a guess."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import inf

import numpy as np

from behavgen.fit.planning.delays import (
    KnownDelay,
    PlannedDelays,
    delay_halves,
    plan_delays,
)
from behavgen.fit.planning.estimates import estimate_of, half_of
from behavgen.fit.planning.goals import Goals, Guess
from behavgen.fit.planning.surface_values import value_at
from behavgen.fit.planning.windows import PlannedWindows, plan_windows
from behavgen.model import ComparatorModel, Condition, ConditionFit

__all__ = [
    "DelayPlan",
    "delay_half_at",
    "plan_guessed_delays",
    "plan_tabulated_delays",
    "tau_half",
    "widest_tau",
]

_DELAY_OVER_TAU = 3.0
"""The shortest delay is about three time constants (common practice)."""
_LOWEST_V = 1e-6
_HIGHEST_V = 0.3
_SWING_SHARE = 0.15
"""The curve bends where the overdrive is this share of the largest one (common practice)."""
_NODES = 8
_FIRST_NODE_SHARE = 3e-3
"""The law of a guess has free nodes from this share of the largest overdrive on: careful."""
_TAIL_DECADES = 2.0
"""The tail is followed at least so far down."""


@dataclass(frozen=True, slots=True, kw_only=True)
class DelayPlan:
    """What to measure of the delay.

    Parameters
    ----------
    condition : Condition
        Where tau's interval is widest, for which the rows are planned.
    conditions : int
        How many conditions fall short; the same overdrives serve them all.
    delays : PlannedDelays or None
    windows : PlannedWindows or None
        None where there are windows already.
    """

    condition: Condition
    conditions: int
    delays: PlannedDelays | None
    windows: PlannedWindows | None

    @property
    def simulations(self) -> int:
        """In total."""
        rows = 0 if self.delays is None else self.delays.simulations * self.conditions
        return rows + (0 if self.windows is None else self.windows.simulations)


def plan_tabulated_delays(model: ComparatorModel, goals: Goals, guess: Guess) -> DelayPlan | None:
    """Plan more rows where tau or the delay falls short; None where neither does."""
    worst = widest_tau(model)
    if model.delay is None or worst is None or not _is_asked(goals):
        return None
    known = _known(model, worst)
    lowest_v = _lowest_v(known, guess)
    delays = plan_delays(
        known,
        lowest_v=lowest_v,
        tau_within=inf if goals.tau is None else goals.tau,
        delay_within=inf if goals.delay is None else goals.delay,
        level=goals.level,
    )
    seen = any(points.quantity == "window" for points in model.points)
    windows = None if seen or goals.tau is None else plan_windows(known, lowest_v=lowest_v)
    if delays is None and windows is None:
        return None
    return DelayPlan(
        condition=worst.condition,
        conditions=_falling_short(model, worst, known, goals),
        delays=delays,
        windows=windows,
    )


def plan_guessed_delays(guess: Guess, goals: Goals) -> DelayPlan | None:
    """Plan delays and windows from a guess; None without a guess of tau or without a goal."""
    if guess.tau_s is None or not _is_asked(goals):
        return None
    known = _guessed(guess)
    lowest_v = _lowest_v(known, guess)
    return DelayPlan(
        condition=Condition(),
        conditions=1,
        delays=plan_delays(
            known,
            lowest_v=lowest_v,
            tau_within=inf if goals.tau is None else goals.tau,
            delay_within=inf if goals.delay is None else goals.delay,
            level=goals.level,
        ),
        windows=None if goals.tau is None else plan_windows(known, lowest_v=lowest_v),
    )


def widest_tau(model: ComparatorModel) -> ConditionFit | None:
    """Return the condition whose tau has the widest interval; None where there are none."""
    fits = [fit for fit in model.fits if fit.quantity == "delay" and tau_half(fit) < inf]
    return max(fits, key=tau_half, default=None)


def tau_half(fit: ConditionFit) -> float:
    """Return the half width of tau's interval at a condition, relative."""
    tau = estimate_of(fit, "tau_s")
    return half_of(tau) / tau.value if tau is not None else inf


def delay_half_at(model: ComparatorModel, fit: ConditionFit) -> float:
    """Return the half width of the delay's interval where it is widest at a condition, relative."""
    known = _known(model, fit)
    return delay_halves(known, lowest_v=min(known.overdrive_v)).delay


def _falling_short(
    model: ComparatorModel, worst: ConditionFit, known: KnownDelay, goals: Goals
) -> int:
    """Return at how many conditions tau or the delay falls short.

    At conditions with like rows all intervals go with that of tau.
    """
    found = delay_halves(known, lowest_v=min(known.overdrive_v), level=goals.level)
    allowed = min(
        (inf if goals.tau is None else goals.tau) / found.tau,
        (inf if goals.delay is None else goals.delay) / found.delay,
    )
    fits = [fit for fit in model.fits if fit.quantity == "delay"]
    return sum(tau_half(fit) > allowed * tau_half(worst) for fit in fits)


def _is_asked(goals: Goals) -> bool:
    return goals.tau is not None or goals.delay is not None


def _known(model: ComparatorModel, fit: ConditionFit) -> KnownDelay:
    """Return what a model knows of the delay at a tabulated condition.

    The scatter of the rows is the one that gives tau the interval it has there.
    """
    assert model.delay is not None
    effect = model.delay
    known = KnownDelay(
        law=effect.law,
        tau_s=value_at(model, effect.tau, fit.condition),
        node_overdrive_v=effect.node_overdrive_v,
        node_s=tuple(value_at(model, node, fit.condition) for node in effect.nodes),
        scatter=1.0,
        overdrive_v=_overdrives_v(model, fit.condition),
    )
    unit = delay_halves(known, lowest_v=min(known.overdrive_v)).tau
    return replace(known, scatter=tau_half(fit) / unit)


def _overdrives_v(model: ComparatorModel, condition: Condition) -> tuple[float, ...]:
    """Return the magnitudes of the rows at a condition, windows with half their width."""
    found: list[float] = []
    for points in model.points:
        if points.condition == condition and points.quantity == "delay":
            found += [v for v in points.x if v > 0.0]
        if points.condition == condition and points.quantity == "window":
            found += [0.5 * window for window in points.y]
    return tuple(found)


def _guessed(guess: Guess) -> KnownDelay:
    assert guess.tau_s is not None
    highest_v = _HIGHEST_V if guess.highest_v is None else guess.highest_v
    fastest_s = _DELAY_OVER_TAU * guess.tau_s if guess.delay_s is None else guess.delay_s
    node_v = np.geomspace(_FIRST_NODE_SHARE * highest_v, highest_v, _NODES)
    bend = np.log1p(_SWING_SHARE * highest_v / node_v)
    node_s = fastest_s + guess.tau_s * (bend - bend[-1])
    return KnownDelay(
        law=f"{_NODES} nodes",
        tau_s=guess.tau_s,
        node_overdrive_v=tuple(node_v.tolist()),
        node_s=tuple(node_s.tolist()),
        scatter=guess.scatter,
    )


def _lowest_v(known: KnownDelay, guess: Guess) -> float:
    """Return the smallest overdrive to plan for: as asked, else as far down as rows go."""
    if guess.lowest_v is not None:
        return guess.lowest_v
    deep_v = known.tail_end_v / 10.0**_TAIL_DECADES
    return min([*known.overdrive_v, deep_v] if known.overdrive_v else [_LOWEST_V, deep_v])
