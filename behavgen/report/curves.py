"""Table points of one condition beside what the emitted model gives there."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.model import ComparatorModel, Condition, CurvePoints, Range
from behavgen.reference import Reference
from behavgen.report.conditions import reference_keywords

__all__ = ["Curve", "curves", "drawn_overdrives", "rms", "worst"]

Floats = npt.NDArray[np.float64]

_LINE_POINTS = 41


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Curve:
    """One condition of one quantity.

    Parameters
    ----------
    condition : Condition
    x, y : ndarray, shape (N,)
        Table points, as in `CurvePoints`.
    model_y : ndarray, shape (N,)
        The emitted model at the table's x.
    line_x, line_y : ndarray, shape (M,)
        The emitted model as a line.
    error : ndarray, shape (N,)
        Relative error of the model, NaN where it has none: for a delay of the
        delay; for a window of the time at which the model's window is as wide,
        since window and delay are one curve; for a memory or an energy of itself; for
        shares of ones the difference.
    trials : ndarray of int, shape (N,) or (0,)
    """

    condition: Condition
    x: Floats
    y: Floats
    model_y: Floats
    line_x: Floats
    line_y: Floats
    error: Floats
    trials: npt.NDArray[np.int64]


def curves(model: ComparatorModel, reference: Reference, quantity: str) -> tuple[Curve, ...]:
    """Return one curve for each condition of a quantity that the reference can draw.

    These are ``"delay"``, ``"window"``, ``"noise"``, ``"memory"`` and ``"energy"``.
    """
    found = (p for p in model.points if p.quantity == quantity and len(p.x) > 0)
    return tuple(_curve(points, reference) for points in found)


def drawn_overdrives(model: ComparatorModel) -> Floats:
    """Return overdrives in V at which to draw a model that carries no table points."""
    span = model.box.overdrive_v or Range(low=1e-6, high=0.1)
    places: Floats = np.geomspace(span.low, span.high, _LINE_POINTS)
    return places


def worst(members: Sequence[Curve]) -> float:
    """Return the largest magnitude of the errors; NaN without any."""
    values = _errors(members)
    return float(np.abs(values).max()) if len(values) else float("nan")


def rms(members: Sequence[Curve]) -> float:
    """Return the root mean square of the errors; NaN without any."""
    values = _errors(members)
    return float(np.sqrt(np.mean(values**2))) if len(values) else float("nan")


def _errors(members: Sequence[Curve]) -> Floats:
    values = np.concatenate([c.error for c in members]) if members else np.empty(0)
    return values[np.isfinite(values)]


def _curve(points: CurvePoints, reference: Reference) -> Curve:
    x, y = np.array(points.x), np.array(points.y)
    keywords = reference_keywords(points.condition)
    law = _law(points.quantity, reference)
    line_x = _line_places(x, logarithmic=points.quantity in ("delay", "energy"))
    model_y = law(x, **keywords)
    if points.quantity == "window":
        error = _relative(reference.delay(0.5 * y, **keywords), x)
    else:
        error = model_y - y if points.quantity == "noise" else _relative(model_y, y)
    return Curve(condition=points.condition, x=x, y=y, model_y=model_y, error=error, line_x=line_x,
                 line_y=law(line_x, **keywords),
                 trials=np.array(points.trials, dtype=np.int64))  # fmt: skip


def _law(quantity: str, reference: Reference) -> Callable[..., Floats]:
    laws: dict[str, Callable[..., Floats]] = {
        "delay": reference.delay, "window": reference.window, "noise": reference.probability,
        "memory": reference.memory_shift, "energy": reference.energy,
    }  # fmt: skip
    return laws[quantity]


def _relative(model: Floats, table: Floats) -> Floats:
    usable = np.isfinite(model) & (table != 0.0)
    return np.where(usable, model, np.nan) / np.where(usable, table, 1.0) - 1.0


def _line_places(x: Floats, *, logarithmic: bool) -> Floats:
    low, high = float(x.min()), float(x.max())
    if low == high:  # a single point still deserves a line through it
        low, high = (0.5 * low, 2.0 * high) if low > 0.0 else (low - 1e-3, high + 1e-3)
    if logarithmic and low > 0.0:
        return np.geomspace(low, high, _LINE_POINTS)
    return np.linspace(low, high, _LINE_POINTS)
