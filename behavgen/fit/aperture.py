"""Aperture table -> ApertureEffect: when the input counts, and over how long.

The share of weight after a step is one less the distribution of the weight over
time. Its mean is the centre: for an input that moves evenly while it is weighed,
sampling it there is exact whatever the shape of the weight.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault, FitError
from behavgen.fit.centred_surfaces import centred_family, missed_squared
from behavgen.fit.conditions import conditions_of, find_sites
from behavgen.fit.wording import condition_words
from behavgen.model import (
    ApertureEffect,
    Condition,
    ConditionFit,
    Estimate,
    Parameter,
    significant,
)
from behavgen.tables.characterisation import ApertureTable

__all__ = ["ApertureFit", "fall_between", "fit_aperture", "weight_centre"]

Floats = npt.NDArray[np.float64]
Truths = npt.NDArray[np.bool_]

_HIGH, _LOW = 0.9, 0.1
"""Weights between which the width is told and which a table has to span."""
_NOTABLE_SHARE = 0.1
"""Centres that differ by more than this share of the width between steps are worth a notice."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ApertureFit:
    """The aperture effect and how it came about."""

    effect: ApertureEffect
    fits: tuple[ConditionFit, ...]
    notices: tuple[str, ...]


def weight_centre(time_s: Floats, weight: Floats) -> float:
    """Return the mean of a weight over time in s, from its share after each time.

    Between rows the share falls along a straight line; what lies outside the
    rows is unknown and left out.

    Parameters
    ----------
    time_s : ndarray, shape (R,)
        Rising.
    weight : ndarray, shape (R,)
        Share after each time.
    """
    middle = 0.5 * (time_s[1:] + time_s[:-1])
    falls = weight[:-1] - weight[1:]
    return float(middle @ falls / falls.sum())


def fall_between(time_s: Floats, weight: Floats, high: float, low: float) -> float:
    """Return the time in s in which the share falls from `high` to `low`, for good."""
    start, end = (_last_crossing(time_s, weight, level) for level in (high, low))
    return end - start


def _last_crossing(time_s: Floats, weight: Floats, level: float) -> float:
    k = int(np.flatnonzero(weight[:-1] >= level)[-1])
    share = (weight[k] - level) / (weight[k] - weight[k + 1])
    return float(time_s[k] + share * (time_s[k + 1] - time_s[k]))


def fit_aperture(table: ApertureTable | None, processes: tuple[str, ...]) -> ApertureFit | None:
    """Find centre and width at every condition, and surfaces through them.

    Raises
    ------
    FitError
        When at no condition the weight is followed from nearly all to nearly nothing.
    """
    if table is None:
        return None
    sites = find_sites(table.conditions)
    curves = [_curves(table, sites.of_row == c) for c in range(sites.count)]
    usable = np.array([len(curve) > 0 for curve in curves])
    if not usable.any():
        raise FitError(_refusal(table))
    kept = find_sites(table.conditions.taken(usable[sites.of_row]))
    found = [np.array(curve) for curve in curves if curve]
    centre, width = np.array([curve.mean(axis=0) for curve in found]).T
    targets = np.column_stack([centre, np.log(width)])
    family = centred_family(kept, targets, processes, unit=(float(width.mean()), 1.0))
    variance = [float(v) if np.isfinite(v) else None for v in missed_squared(family)]
    conditions = conditions_of(kept)
    return ApertureFit(
        effect=ApertureEffect(
            centre=family.surface(0, "s", "plain", variance[0]),
            width=family.surface(1, "s", "log", variance[1]),
        ),
        fits=tuple(
            _condition_fit(condition, int((kept.of_row == c).sum()), centre[c], width[c])
            for c, condition in enumerate(conditions)
        ),
        notices=(*_left_out(usable), *_by_step(found, conditions)),
    )


def _curves(table: ApertureTable, here: Truths) -> list[tuple[float, float]]:
    """Return centre and width at one condition, for each height of the step that tells them."""
    found = []
    heights = np.nan_to_num(table.step_v, nan=0.0)
    for height in np.unique(heights[here]):
        rows = here & (heights == height)
        time_s, alike = np.unique(table.step_time_s[rows], return_inverse=True)
        weight = np.bincount(alike, weights=table.step_weight[rows]) / np.bincount(alike)
        if len(time_s) > 2 and weight[0] >= _HIGH and weight[-1] <= _LOW:
            found.append((weight_centre(time_s, weight), fall_between(time_s, weight, _HIGH, _LOW)))
    return found


def _refusal(table: ApertureTable) -> Fault:
    return Fault(
        file=table.sources[0].file if table.sources else "",
        what=f"at no condition does the weight fall from {_HIGH:g} or more at the first step time "
        f"to {_LOW:g} or less at the last",
        allowed="step the input from well before the decision edge until long after it, at three "
        "or more times",
    )


def _condition_fit(condition: Condition, rows: int, centre: float, width: float) -> ConditionFit:
    words, source = condition_words(condition), "share of weight after a step; linear between rows"
    return ConditionFit(
        quantity="aperture",
        condition=condition,
        rows=rows,
        parameters=(
            Parameter(
                name="aperture_centre_s",
                estimate=Estimate(value=significant(float(centre))),
                unit="s",
                description=f"mean of the input's weight over time at {words}",
                source=source,
            ),
            Parameter(
                name="aperture_width_s",
                estimate=Estimate(value=significant(float(width))),
                unit="s",
                low=0.0,
                description=f"fall of the weight from 90 % to 10 % at {words}",
                source=source,
            ),
        ),
    )


def _left_out(usable: Truths) -> list[str]:
    lost = int((~usable).sum())
    if not lost:
        return []
    return [
        f"At {lost} of {len(usable)} conditions the aperture table does not follow the weight from "
        f"{_HIGH:g} to {_LOW:g}; they are left out."
    ]


def _by_step(found: list[Floats], conditions: tuple[Condition, ...]) -> list[str]:
    """Say where the centre hangs on the height of the step."""
    apart = [float(np.ptp(curve[:, 0]) / curve[:, 1].mean()) for curve in found]
    worst = int(np.argmax(apart))
    if apart[worst] <= _NOTABLE_SHARE:
        return []
    return [
        f"The aperture's centre hangs on the height of the step: at "
        f"{condition_words(conditions[worst])} by {np.ptp(found[worst][:, 0]) * 1e12:.3g} ps, "
        f"{apart[worst]:.0%} of its width; the mean is taken."
    ]
