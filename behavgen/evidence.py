"""How far the tables behind a model went, to hold against how far an answer goes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.special import ndtri

from behavgen.model import ComparatorModel, Condition, Range, Surface

__all__ = ["Evidence", "Outside", "evidence", "outside"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Evidence:
    """What was counted or simulated; None where a table does not say.

    Parameters
    ----------
    sigmas : float or None
        How far from the trip point decisions of both kinds were counted: the largest
        normal quantile of a share of ones that is neither 0 nor 1.
    overdrive_v : Range or None
        Overdrives whose delay is tabulated, half the tabulated windows included, V.
    resolve_time_s : float or None
        The longest tabulated delay or resolve time, s.
    """

    sigmas: float | None
    overdrive_v: Range | None
    resolve_time_s: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Outside:
    """A condition at which a quantity was not measured, and where it is taken instead.

    Parameters
    ----------
    quantity : str
        ``"offset"``, ``"mismatch"``, ``"noise"`` or ``"delay"``.
    condition : str
        ``"vdd_v"``, ``"temperature_k"`` or ``"vcm_v"``.
    measured : Range
        Where it was measured.
    """

    quantity: str
    condition: str
    measured: Range


def evidence(model: ComparatorModel) -> Evidence:
    """Return how far the table points went that the model carries, over all conditions."""
    shares = _points(model, "noise", "y")
    counted = shares[(shares > 0.0) & (shares < 1.0)]
    overdrives = np.concatenate([_points(model, "delay", "x"), 0.5 * _points(model, "window", "y")])
    overdrives = overdrives[overdrives > 0.0]
    times = np.concatenate([_points(model, "delay", "y"), _points(model, "window", "x")])
    return Evidence(
        sigmas=float(np.max(np.abs(ndtri(counted)))) if len(counted) else None,
        overdrive_v=Range(low=float(overdrives.min()), high=float(overdrives.max()))
        if len(overdrives)
        else model.box.overdrive_v,
        resolve_time_s=float(times.max()) if len(times) else None,
    )


def outside(model: ComparatorModel, condition: Condition) -> tuple[Outside, ...]:
    """Return what was not measured at a condition; None in the condition is inside.

    Raises
    ------
    KeyError
        For a process that the model does not know.
    """
    found = []
    for quantity, surface in _surfaces(model):
        box = surface.variant(condition.process or model.processes[0].name).box
        for name in ("vdd_v", "temperature_k", "vcm_v"):
            measured: Range | None = getattr(box, name)
            asked: float | None = getattr(condition, name)
            if measured is not None and asked is not None and not _holds(measured, asked):
                found.append(Outside(quantity=quantity, condition=name, measured=measured))
    return tuple(found)


def _holds(span: Range, value: float) -> bool:
    slack = 1e-6 * max(abs(span.low), abs(span.high))  # rounding of the asker's arithmetic
    return span.low - slack <= value <= span.high + slack


def _surfaces(model: ComparatorModel) -> list[tuple[str, Surface]]:
    found: list[tuple[str, Surface]] = []
    if model.delay is not None:
        found.append(("delay", model.delay.tau))
    if model.noise is not None:
        found.append(("noise", model.noise.surface))
    if model.offset is not None:
        found.append(("offset", model.offset.surface))
    if model.mismatch is not None and model.mismatch.components:
        found.append(("mismatch", model.mismatch.components[0]))
    return found


def _points(model: ComparatorModel, quantity: str, axis: str) -> np.ndarray:
    rows = [getattr(points, axis) for points in model.points if points.quantity == quantity]
    return np.concatenate([np.asarray(row, dtype=float) for row in rows] or [np.empty(0)])
