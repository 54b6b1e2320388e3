"""How a plan is told: what is known, what to measure, what that promises, what it costs."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import asdict, dataclass
from math import inf

from behavgen.cli.cells import number_of
from behavgen.cli.wording import labelled, percent_text
from behavgen.fit.planning.condition_plans import ConditionPlan
from behavgen.fit.planning.conditions import ThinAxis
from behavgen.fit.planning.delay_plans import DelayPlan
from behavgen.fit.planning.goals import Goals
from behavgen.fit.planning.instances import BRACKET
from behavgen.fit.planning.noise_plans import CurvePlan
from behavgen.fit.planning.pinned import Pinned
from behavgen.fit.planning.plan import CellPlan
from behavgen.fit.wording import condition_words
from behavgen.model import Condition
from behavgen.units import format_celsius, format_si

__all__ = ["Told", "plan_lines"]

_SHOWN = 3
"""Plans of one kind that are shown without ``-v``."""
_DELAY_SHOWN = 4
_MOST = 99
_EVERYWHERE = condition_words(Condition())
_AXES = {"temperature_k": "temperature", "vdd_v": "supply", "vcm_v": "common mode"}
_MISSING = {
    "noise": "noise: no table; give --guess-sigma",
    "delay": "delay: no table; give --guess-tau",
    "mean offset": "mean offset: no spread is known; give --guess-spread",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Told:
    """Lines to print, further ones for ``-v``, and what ``--strict`` does not let pass."""

    lines: tuple[str, ...]
    more: tuple[str, ...]
    warnings: tuple[str, ...]


def plan_lines(plan: CellPlan) -> Told:
    """Tell a plan."""
    shown: list[str] = labelled("wanted", _goals_text(plan.goals))
    more: list[str] = []
    for label, texts, limit in _parts(plan):
        for position, text in enumerate(texts):
            lines = labelled("" if 0 < position < limit else label, text)
            (shown if position < limit else more).extend(lines)
        if len(texts) > limit:
            shown += labelled("", f"and {len(texts) - limit} more like these, shown by -v")
    shown += labelled("cost", _cost_text(plan))
    if plan.delay is not None and plan.delay.delays is not None:
        every = (*plan.delay.delays.tail_v, *plan.delay.delays.curve_v)
        more += labelled("overdrives", ", ".join(format_si(v, "V") for v in every))
    return Told(lines=tuple(shown), more=tuple(more), warnings=tuple(_unplanned(plan)))


def plan_data(plan: CellPlan) -> dict[str, object]:
    """Return a plan for ``--json``, SI units."""
    data: dict[str, object] = asdict(plan)
    for name, curves in (("curves", plan.curves), ("new_curves", plan.new_curves)):
        data[name] = [{**asdict(c), "decisions": c.decisions, "price": c.price} for c in curves]
    return data


def _parts(plan: CellPlan) -> Iterator[tuple[str, list[str], int]]:
    """Yield label, texts, and how many of them are shown without ``-v``."""
    yield "known", [_pinned_text(entry) for entry in plan.pinned], len(plan.pinned)
    yield "no plan", [*_unplanned(plan)], len(_MISSING) + _SHOWN
    yield "noise", [_curve_text(curve) for curve in plan.curves], _SHOWN
    yield "instances", [*_instances_text(plan)], 1
    yield "delay", [*_delay_texts(plan.delay, plan.goals)], _DELAY_SHOWN
    yield "conditions", [text for p in plan.conditions for text in _conditions_text(p)], _MOST
    yield "new noise", [_curve_text(curve) for curve in plan.new_curves], 1
    yield "levels", [text for p in plan.conditions for text in _thin_text(p)], _MOST


def _goals_text(goals: Goals) -> str:
    parts = [
        f"{name} {percent_text(value) if unit == '' else format_si(value, unit)}"
        for name, value, unit in (
            ("noise sigma", goals.sigma, ""),
            ("trip point", goals.offset_v, "V"),
            ("mismatch", goals.mismatch, ""),
            ("mean offset", goals.mean_v, "V"),
            ("tau", goals.tau, ""),
            ("delay", goals.delay, ""),
        )
        if value is not None
    ]
    return f"{', '.join(parts)} (half the width of {100.0 * goals.level:g} % intervals)"


def _pinned_text(entry: Pinned) -> str:
    where = condition_words(entry.condition)
    at = f" at {where}" if where != _EVERYWHERE else ""
    parts = [f"{entry.quantity} within {_half_text(entry.half, entry)}{at}"]
    if entry.of > 1 and entry.median_half is not None:
        parts.append(f"the widest of {entry.of}, usually {_half_text(entry.median_half, entry)}")
    elif entry.of > 1:
        parts.append(f"{entry.of} instances")
    if entry.wanted is not None:
        reached = "reached" if entry.reached else "not yet reached"
        parts.append(f"{_half_text(entry.wanted, entry)} is {reached}")
    return "; ".join(parts)


def _half_text(half: float | None, entry: Pinned) -> str:
    if half is None:
        return "no bound"
    return format_si(half, entry.unit) if entry.absolute else percent_text(half)


def _unplanned(plan: CellPlan) -> Iterator[str]:
    yield from (_MISSING[name] for name in plan.unplanned)
    for condition in plan.misfits:
        yield (
            f"the S-curve at {condition_words(condition)} is not Gaussian: find out why before "
            "taking more decisions"
        )


def _curve_text(curve: CurvePlan) -> str:
    where = condition_words(curve.condition)
    parts = [f"at {where}:"] if where != _EVERYWHERE else []
    search, s_curve = curve.search, curve.s_curve
    if search is not None and search.halvings:
        span = f"{format_si(search.low_v, 'V')}..{format_si(search.high_v, 'V')}"
        parts.append(f"halve {span} {search.halvings} times to find the trip point, then")
    if search is not None:
        step_v = search.sweep_v[1] - search.sweep_v[0]
        parts.append(
            f"sweep {len(search.sweep_v)} levels {format_si(step_v, 'V')} apart around it with "
            f"{search.trials} decisions each;"
        )
    if s_curve is None:
        return " ".join([*parts, "this tells enough"])
    levels = ", ".join(format_si(level_v, "V") for level_v in s_curve.levels_v)
    moved = " (counted from the guessed trip point)" if search is not None else ""
    parts.append(
        f"{'then ' if search else ''}{s_curve.trials[0]} decisions at each of {levels}{moved}: "
        f"sigma within {percent_text(s_curve.sigma_half)}, trip point within "
        f"{format_si(s_curve.offset_half_v, 'V')}; {curve.price:.2f} times the fewest possible"
    )
    return " ".join(parts)


def _instances_text(plan: CellPlan) -> Iterator[str]:
    found, spread_v = plan.instances, plan.spread_v
    if found is None:
        return
    count = f"{found.more} more, {found.instances} in all" if found.measured else str(found.more)
    mean, bracket = f"{found.mean_half:.2g} of it", "a fifth of it"
    if spread_v:
        mean = format_si(found.mean_half * spread_v, "V")
        bracket = format_si(BRACKET * spread_v, "V")
    yield (
        f"{count}: spread within {percent_text(found.sigma_half)}, mean within {mean}; bracket "
        f"each offset to {bracket}, {found.halvings} decisions by halving"
    )


def _delay_texts(plan: DelayPlan | None, goals: Goals) -> Iterator[str]:
    if plan is None:
        return
    delays, windows = plan.delays, plan.windows
    if delays is not None:
        where = condition_words(plan.condition)
        at = (
            f"at {where} and like conditions, {plan.conditions} in all: "
            if (where != _EVERYWHERE)
            else ""
        )
        rows = [_overdrives_text(delays.tail_v, "the tail")]
        rows.append(_overdrives_text(delays.curve_v, "the curve above it"))
        yield (
            f"{at}{' and '.join(row for row in rows if row)}, even in their logarithm: tau within "
            f"{percent_text(delays.tau_half)}, delay within {percent_text(delays.delay_half)}"
        )
        if delays.tau_half > (goals.tau or inf) or delays.delay_half > (goals.delay or inf):
            yield "that is not enough: go to lower overdrives with --lowest-overdrive"
        yield (
            f"if rows scatter {percent_text(delays.scatter)} around the law; without noise that is "
            "lack of fit, and only new overdrives tell anything"
        )
    if windows is not None:
        times = ", ".join(format_si(t, "s") for t in windows.resolve_time_s)
        ends = (
            f"{format_si(windows.window_v[0], 'V')} down to {format_si(windows.window_v[-1], 'V')}"
        )
        yield f"windows at {times} after the edge, to be expected from {ends}"


def _overdrives_text(overdrives_v: Sequence[float], where: str) -> str:
    if not overdrives_v:
        return ""
    ends = [format_si(overdrives_v[i], "V") for i in (0, -1)]
    span = ends[0] if len(overdrives_v) == 1 else "..".join(ends)
    return f"{number_of(len(overdrives_v), 'overdrive')} in {where}, {span}"


def _conditions_text(plan: ConditionPlan) -> Iterator[str]:
    what = f"{plan.quantity}, {plan.process}" if plan.process else plan.quantity
    if plan.conditions is None:
        if not plan.measured:
            yield f"{what}: not measured, taken as another process"
        return
    if not plan.conditions.following:
        return
    now, then = percent_text(plan.conditions.half_now), percent_text(plan.conditions.half_then)
    order = "; ".join(condition_words(added.condition) for added in plan.conditions.following)
    yield (
        f"{what}: {number_of(plan.measured, 'condition')} measured, elsewhere within about {now}; "
        f"measure in this order: {order}; then within about {then}"
    )


def _thin_text(plan: ConditionPlan) -> Iterator[str]:
    for axis in plan.thin:
        levels = ", ".join(_level_text(axis, level) for level in axis.levels)
        wanted = ", ".join(_level_text(axis, level) for level in axis.missing)
        tells = "so its influence is unknown" if len(axis.levels) == 1 else "so a bend is unknown"
        more = f": measure at {wanted}" if wanted else ""
        yield f"{plan.quantity}: {_AXES[axis.name]} only at {levels}, {tells}{more}"


def _level_text(axis: ThinAxis, level: float) -> str:
    return format_celsius(level) if axis.name == "temperature_k" else format_si(level, "V")


def _cost_text(plan: CellPlan) -> str:
    cost = plan.cost
    parts = []
    if cost.decisions:
        parts.append(f"{cost.decisions} decisions with noise")
    if cost.instances:
        parts.append(f"{number_of(cost.instances, 'instance')} ({cost.halvings} decisions)")
    if cost.simulations:
        parts.append(f"{number_of(cost.simulations, 'simulation')} of delays and windows")
    return ", ".join(parts) or "nothing to measure"
