"""Operating conditions to add, quantity by quantity and process by process."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.intervals import normal_quantile
from behavgen.fit.planning.conditions import (
    PlannedConditions,
    ThinAxis,
    plan_conditions,
    thin_axes,
)
from behavgen.fit.planning.estimates import estimate_of, half_of
from behavgen.fit.planning.goals import Goals
from behavgen.fit.planning.surface_values import candidate_levels, log_effects, tabulated
from behavgen.model import ComparatorModel, Surface

__all__ = ["ConditionPlan", "plan_all_conditions"]

Floats = npt.NDArray[np.float64]

_LIKENESS = 0.3
"""Taken as the effect of a condition on the ratio of two processes over its effect on each."""
_LEAST_SCATTER = 1e-3


@dataclass(frozen=True, slots=True, kw_only=True)
class ConditionPlan:
    """Where to measure a quantity in a process, each condition once.

    Parameters
    ----------
    quantity : str
        ``"delay"``, ``"noise"``, ``"offset"`` or ``"reset"``.
    process : str
        "" for all.
    measured : int
        Distinct conditions there are.
    conditions : PlannedConditions or None
        None where no interval was asked for, or the model says too little.
    thin : tuple of ThinAxis
    """

    quantity: str
    process: str
    measured: int
    conditions: PlannedConditions | None
    thin: tuple[ThinAxis, ...]


def plan_all_conditions(model: ComparatorModel, goals: Goals) -> tuple[ConditionPlan, ...]:
    """Return a plan for every quantity that has rows in the model."""
    found: list[ConditionPlan] = []
    for quantity in ("delay", "noise", "offset", "reset"):
        if any(points.quantity == quantity for points in model.points):
            found += _of_quantity(model, quantity, goals)
    return tuple(found)


def _of_quantity(model: ComparatorModel, quantity: str, goals: Goals) -> Iterator[ConditionPlan]:
    rows = {process: tabulated(model, quantity, process) for process in _processes(model, quantity)}
    primary = max(rows, key=lambda process: len(rows[process]))
    surface, scatter, within = _wanted(model, quantity, goals)
    levels = candidate_levels(model)
    for process, measured in rows.items():
        planned = None
        if surface is not None and within is not None:
            effects = log_effects(model, surface, process)
            planned = plan_conditions(
                measured,
                levels,
                effects=effects if process == primary else _LIKENESS * effects,
                scatter=scatter,
                within=within,
                process=process,
                level=goals.level,
            )
        yield ConditionPlan(
            quantity=quantity,
            process=process,
            measured=len(measured),
            conditions=planned,
            thin=thin_axes(measured, levels) if process == primary else (),
        )


def _processes(model: ComparatorModel, quantity: str) -> tuple[str, ...]:
    """Return the processes to plan for: one without a name where no row names any."""
    named = {p.condition.process for p in model.points if p.quantity == quantity} - {""}
    return tuple(process.name for process in model.processes) if named else ("",)


def _wanted(
    model: ComparatorModel, quantity: str, goals: Goals
) -> tuple[Surface | None, float, float | None]:
    """Return what is predicted between conditions, its scatter, and the wanted half width."""
    if quantity == "delay" and model.delay is not None:
        own = model.delay.scatter[0][0] ** 0.5 if model.delay.scatter else 0.0
        within = goals.delay if goals.tau is None else goals.tau
        return model.delay.tau, max(own, _LEAST_SCATTER), within
    if quantity == "noise" and model.noise is not None:
        return model.noise.surface, max(_sigma_error(model), _LEAST_SCATTER), goals.sigma
    return None, 1.0, None


def _sigma_error(model: ComparatorModel) -> float:
    """Return the typical standard error of ln sigma at a tabulated condition."""
    found = []
    for fit in model.fits:
        sigma = estimate_of(fit, "noise_sigma_v")
        if fit.quantity == "noise" and sigma is not None:
            found.append(half_of(sigma) / sigma.value / normal_quantile(sigma.level))
    return float(np.median(found)) if found else 0.0
