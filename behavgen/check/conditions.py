"""Operating conditions spread through the characterised range, its edges and a little beyond."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from behavgen.model import ComparatorModel, Range

__all__ = ["spread", "spread_conditions"]

Floats = npt.NDArray[np.float64]

_BEYOND = 0.1
"""How far outside the range conditions go, as a share of its span."""
_UNCHARACTERISED_VDD = Range(low=0.9, high=1.1)
_UNCHARACTERISED_VCM = Range(low=0.3, high=0.7)


def spread(count: int, dimensions: int, *, start: int = 0) -> Floats:
    """Return points that fill the unit cube evenly, shape (count, dimensions).

    Additive recurrence with the powers of 1/phi, phi the positive root of
    ``phi^(dimensions + 1) = phi + 1`` (M. Roberts, "The unreasonable
    effectiveness of quasirandom sequences", 2018).

    Parameters
    ----------
    start : int
        Number of the first point.
    """
    phi = 2.0
    for _ in range(40):
        phi = (1.0 + phi) ** (1.0 / (dimensions + 1))
    steps = phi ** -np.arange(1.0, dimensions + 1.0)
    return (0.5 + (start + 1 + np.arange(count))[:, None] * steps) % 1.0


def spread_conditions(model: ComparatorModel, count: int, *, start: int) -> tuple[Floats, Floats]:
    """Return supply and common mode of each decision in V, shape (count,) each.

    The first four are the corners of the range; one in three of the others is
    brought back onto its edge where it lies outside. The supply stays high
    enough for the cell to be on; without a supply pin it is the middle of the
    range, as in the emitted modules.
    """
    place = -_BEYOND + (1.0 + 2.0 * _BEYOND) * spread(count, 2, start=start)
    place[2::3] = np.clip(place[2::3], 0.0, 1.0)
    corners = np.array([[0.0, 0.0], [0.0, 1.0], [1.0, 0.0], [1.0, 1.0]])[:count]
    place[: len(corners)] = corners
    vcm = _inside(model.box.vcm_v or _UNCHARACTERISED_VCM, place[:, 1])
    if model.cell.pins.vdd is None:
        middle = 0.0 if model.box.vdd_v is None else model.box.vdd_v.middle
        return np.full(count, middle), vcm
    vdd = _inside(model.box.vdd_v or _UNCHARACTERISED_VDD, place[:, 0])
    return np.maximum(vdd, model.cell.supply_off_v or 0.0), vcm


def _inside(span: Range, place: Floats) -> Floats:
    """Map 0..1 to the range, both ends exactly; a range of one value gets some width."""
    width = span.high - span.low or 0.1 * abs(span.high)
    return np.where(place == 1.0, span.high, span.low + width * place)
