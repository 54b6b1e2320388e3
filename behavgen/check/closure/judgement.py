"""How near the tables what was measured must come, row by row and as a whole.

A model is not asked to be better than its fit: where the fit states a larger
error than the limit here, that error with some room is the limit.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from behavgen.check.closure.places import Place, TableRow, place_of
from behavgen.check.closure.recharacterise import MOST_TRIALS, Characterised
from behavgen.check.verdict import ClosureResult, ClosureRow
from behavgen.formulas.counting import fisher_exact_p
from behavgen.model import ComparatorModel
from behavgen.units import ZERO_CELSIUS_K, format_celsius, format_si

__all__ = ["FAMILY_RATE", "judged"]

FAMILY_RATE = 1e-3
"""How often a right model may fail all points of its S-curves together."""
SHOWN_ROWS = 3
_ROOM = 1.2
"""Times the stated error of a fit."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Limit:
    """What a quantity is held to.

    Parameters
    ----------
    relative : float
    as_a_whole : bool
        The root mean square of all rows is, not each row.
    x_unit, unit : str
    """

    relative: float
    as_a_whole: bool = False
    x_unit: str = "s"
    unit: str = "s"


_LIMITS = {
    "delay": _Limit(relative=0.02, as_a_whole=True, x_unit="V"),
    "energy": _Limit(relative=0.05, as_a_whole=True, x_unit="V", unit="J"),
    "window": _Limit(relative=0.05, unit="V"),
    "reset": _Limit(relative=0.05),
    "memory": _Limit(relative=0.05, unit="V"),
    "memory_at_least": _Limit(relative=0.02, unit="V"),
    "aperture": _Limit(relative=0.05),
    "noise": _Limit(relative=math.inf, x_unit="V", unit=""),
}


def judged(
    model: ComparatorModel, found: Characterised
) -> tuple[tuple[ClosureResult, ...], tuple[ClosureRow, ...]]:
    """Return one result for each quantity that was measured, and every row.

    Parameters
    ----------
    model : ComparatorModel
    found : Characterised
    """
    quantities = dict.fromkeys(row.quantity for row, _ in found)
    rows = tuple(_row(model, row, value) for row, value in found)
    results = tuple(
        _result(
            model, quantity, [pair for pair in found if pair[0].quantity == quantity],
            tuple(row for row in rows if row.quantity == quantity),
        )
        for quantity in quantities
    )  # fmt: skip
    return results, rows


def _result(
    model: ComparatorModel, quantity: str, found: Characterised, rows: tuple[ClosureRow, ...]
) -> ClosureResult:
    limit = _LIMITS[quantity]
    measured = [row for row in rows if row.relative_error is not None]
    errors = [abs(row.relative_error or 0.0) for row in measured]
    rms = math.sqrt(float(np.mean(np.square(errors)))) if errors else None
    missing = len(rows) - len(measured)
    if quantity == "noise":
        passed, words = _counted(found)
    else:
        passed, words = _within(model, quantity, limit, rows, rms)
    return ClosureResult(
        quantity=quantity, rows=len(rows), passed=passed and missing == 0,
        rms_relative=None if quantity == "noise" else rms,
        limit=words + (f"; {missing} could not be measured" if missing else ""),
        worst=tuple(sorted(rows, key=_badness, reverse=True)[:SHOWN_ROWS]),
    )  # fmt: skip


def _badness(row: ClosureRow) -> float:
    if row.relative_error is None:
        return math.inf
    return abs(row.z) if row.quantity == "noise" and row.z is not None else abs(row.relative_error)


def _within(
    model: ComparatorModel, quantity: str, limit: _Limit, rows: Sequence[ClosureRow],
    rms: float | None,
) -> tuple[bool, str]:  # fmt: skip
    stated = _stated(model, quantity, worst=not limit.as_a_whole)
    bound = max(limit.relative, _ROOM * stated)
    size = math.inf if rms is None else rms
    if not limit.as_a_whole:
        size = max((abs(row.relative_error or 0.0) for row in rows), default=math.inf)
    what = "rms" if limit.as_a_whole else "in each row"
    return size <= bound, f"{100.0 * size:.3g} % {what}, at most {100.0 * bound:.3g} %"


def _stated(model: ComparatorModel, quantity: str, *, worst: bool) -> float:
    """Return the largest error that the fit itself states of a quantity."""
    fits = [fit for fit in model.fits if fit.quantity == quantity.removesuffix("_at_least")]
    stated = [fit.worst_relative if worst else fit.rms_relative for fit in fits]
    return max((error for error in stated if error is not None), default=0.0)


def _counted(found: Characterised) -> tuple[bool, str]:
    """Compare counts with counts: each point by Fisher's exact test, all by Bonferroni."""
    p = [
        fisher_exact_p(round(row.value * row.trials), row.trials,
                       round(value * min(row.trials, MOST_TRIALS)), min(row.trials, MOST_TRIALS))
        for row, value in found
    ]  # fmt: skip
    least = FAMILY_RATE / max(len(p), 1)
    words = f"smallest p-value {min(p):.2g} of {len(p)} points, at least {least:.2g}"
    return min(p) >= least, words


def _row(model: ComparatorModel, row: TableRow, value: float) -> ClosureRow:
    known = math.isfinite(value)
    error = (value - row.value) / row.value if known and row.value != 0.0 else None
    if row.quantity == "memory_at_least" and error is not None:
        error = min(error, 0.0)
    if row.quantity == "noise":
        error = value - row.value
    return ClosureRow(
        quantity=row.quantity, condition=_words(row.place), point=row.number, x=row.x,
        table=row.value, measured=value if known else None, relative_error=error,
        z=_z(model, row, value, error),
        told=_told(row, value),
    )  # fmt: skip


def _z(model: ComparatorModel, row: TableRow, value: float, error: float | None) -> float | None:
    """Return the error in its standard errors: of both counts, or of the fit's scatter there."""
    if row.quantity == "noise":
        again = min(row.trials, MOST_TRIALS)
        pooled = (row.value * row.trials + value * again) / (row.trials + again)
        variance = pooled * (1.0 - pooled) * (1.0 / row.trials + 1.0 / again)
        return (value - row.value) / math.sqrt(variance) if variance > 0.0 else 0.0
    for fit in model.fits:
        if fit.quantity == row.quantity and place_of(model, fit.condition) == row.place:
            stated = fit.rms_relative
            return error / stated if error is not None and stated else None
    return None


def _words(place: Place) -> str:
    return (
        f"process {place.process}, supply {format_si(place.vdd_v, 'V', 6)}, "
        f"{format_celsius(place.temperature_c + ZERO_CELSIUS_K)}, "
        f"common mode {format_si(place.vcm_v, 'V', 6)}"
    )


def _told(row: TableRow, value: float) -> str:
    limit = _LIMITS[row.quantity]
    if row.quantity == "noise":
        return f"{row.value:.4g} of {row.trials} at {format_si(row.x, 'V', 4)}, {value:.4g} again"
    table, got = format_si(row.value, limit.unit, 5), format_si(value, limit.unit, 5)
    again = got if math.isfinite(value) else "nothing"
    return f"{table} at {format_si(row.x, limit.x_unit, 4)}, {again} again"
