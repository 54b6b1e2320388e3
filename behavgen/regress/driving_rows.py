"""Which table rows drive a drift: of the new ones those that the old model meets worst."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from typing import Any

import numpy as np
import numpy.typing as npt

from behavgen.model import ComparatorModel, CurvePoints
from behavgen.reference import Reference
from behavgen.regress.comparison import DRIVEN_BY, DrivingRow, Place
from behavgen.regress.places import effect_surface
from behavgen.regress.readings import at_conditions, readings

__all__ = ["driving_rows"]

Floats = npt.NDArray[np.float64]
_Judged = tuple[Floats, Floats]
"""What the old model expects of each row, and how far the row is from it."""

_MOST = 5
"""Rows named for each kind of table."""


def driving_rows(
    old: ComparatorModel, new: ComparatorModel, quantities: Iterable[str]
) -> tuple[DrivingRow, ...]:
    """Return the rows of the new tables farthest from the old model, the farthest first.

    Parameters
    ----------
    old, new : ComparatorModel
    quantities : iterable of str
        What has drifted, keys of `behavgen.limits.DRIFTING`.
    """
    tables = dict.fromkeys(name for of in quantities for name in DRIVEN_BY[of])
    found: list[DrivingRow] = []
    for quantity in tables:
        rows = [
            row
            for points in new.points
            if points.quantity == quantity
            for row in _rows(old, points)
        ]
        rows.sort(key=lambda row: -abs(row.residual))
        found += rows[:_MOST]
    return tuple(found)


def _rows(old: ComparatorModel, points: CurvePoints) -> list[DrivingRow]:
    if effect_surface(old, _TELLS[points.quantity]) is None:
        return []
    expected, residual = _JUDGES.get(points.quantity, _against_old_rows)(old, points)
    before = _old_points(old, points)
    known = set(zip(before.x, before.y, strict=True)) if before else set()
    rows = []
    for k in np.flatnonzero(np.isfinite(residual) & (np.abs(residual) > _ROUNDING)):
        if (points.x[k], points.y[k]) in known:
            continue
        file, line = points.place(int(k))
        rows.append(
            DrivingRow(
                quantity=points.quantity,
                file=file,
                line=line,
                condition=points.condition,
                x=points.x[k],
                y=points.y[k],
                expected=float(expected[k]),
                residual=float(residual[k]),
                in_deviations=points.quantity in _IN_DEVIATIONS,
            )
        )
    return rows


_ROUNDING = 1e-6
_IN_DEVIATIONS = ("noise", "offset")
_TELLS = {
    "noise": "noise",
    "offset": "mismatch",
    "delay": "delay",
    "window": "delay",
    "reset": "reset_delay",
    "memory": "memory",
    "aperture": "aperture",
    "energy": "energy",
    "kickback_common": "kickback",
    "kickback_differential": "kickback",
}
"""What the old model must know to have expected anything of a table."""


def _noise(old: ComparatorModel, points: CurvePoints) -> _Judged:
    """Return Pearson residuals: ones less expected ones, in their standard deviations."""
    share = Reference(old).probability(points.x, **_at(old, points))
    share = np.clip(share, _LEAST_SHARE, 1.0 - _LEAST_SHARE)
    deviation = np.sqrt(share * (1.0 - share) / np.maximum(np.array(points.trials), 1))
    return share, (np.array(points.y) - share) / deviation


def _offset(old: ComparatorModel, points: CurvePoints) -> _Judged:
    """Return distances from the old instances' mean, in the old spread between instances."""
    place = Place(of="mismatch", condition=points.condition)
    (spread,) = readings(old, [place], 0.95)
    before = _old_points(old, points)
    mean = np.mean(before.y) if before else Reference(old).offset(**_at(old, points))
    expected = np.broadcast_to(mean, len(points.y))
    return expected, (np.array(points.y) - expected) / spread.value


def _delay(old: ComparatorModel, points: CurvePoints) -> _Judged:
    return _ratio(Reference(old).delay(points.x, **_at(old, points)), points)


def _window(old: ComparatorModel, points: CurvePoints) -> _Judged:
    return _ratio(Reference(old).window(points.x, **_at(old, points)), points)


def _reset(old: ComparatorModel, points: CurvePoints) -> _Judged:
    return _ratio(Reference(old).reset_delay(**_at(old, points)), points)


def _memory(old: ComparatorModel, points: CurvePoints) -> _Judged:
    return _ratio(Reference(old).memory_shift(points.x, **_at(old, points)), points)


def _energy(old: ComparatorModel, points: CurvePoints) -> _Judged:
    return _ratio(Reference(old).energy(points.x, **_at(old, points)), points)


def _against_old_rows(old: ComparatorModel, points: CurvePoints) -> _Judged:
    """Return differences from the old rows at this condition, over the largest of them."""
    before = _old_points(old, points)
    if before is None:
        nothing = np.full(len(points.x), np.nan)
        return nothing, nothing
    expected = np.interp(points.x, before.x, before.y)
    return expected, (np.array(points.y) - expected) / max(np.max(np.abs(before.y)), 1e-300)


_JUDGES: Mapping[str, Callable[[ComparatorModel, CurvePoints], _Judged]] = {
    "noise": _noise,
    "offset": _offset,
    "delay": _delay,
    "window": _window,
    "reset": _reset,
    "memory": _memory,
    "energy": _energy,
}
_LEAST_SHARE = 1e-12


def _ratio(expected: Floats, points: CurvePoints) -> _Judged:
    expected = np.broadcast_to(expected, len(points.y))
    return expected, np.array(points.y) / expected - 1.0


def _old_points(old: ComparatorModel, points: CurvePoints) -> CurvePoints | None:
    for before in old.points:
        if before.quantity == points.quantity and before.condition == points.condition:
            return before
    return None


def _at(old: ComparatorModel, points: CurvePoints) -> dict[str, Any]:
    return dict(at_conditions(old, [points.condition]))
