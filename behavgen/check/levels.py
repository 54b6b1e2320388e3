"""Levels applied to a block over time: when each decision's levels come."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.check.moves import Moves

__all__ = ["Levels", "applied_levels"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

_ROOM_TICKS = 3


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Levels:
    """Levels over time, shape (M,) each.

    Parameters
    ----------
    moment : ndarray of int
        When they are applied, in ticks, rising.
    inp_v, inn_v, vdd_v : ndarray
    """

    moment: Integers
    inp_v: Floats
    inn_v: Floats
    vdd_v: Floats


def applied_levels(
    moves: Moves, edge: Integers, end: Integers, aperture: Integers, rng: np.random.Generator
) -> Levels:
    """Return when each level is applied: never at a decision edge or when one is sampled.

    Parameters
    ----------
    moves : Moves
    edge, end, aperture : ndarray of int, shape (N,)
        Decision edges, ends of the decision phases, and the sampling instant after the edge.
    rng : Generator
    """
    free = _free_from(edge, end, aperture)
    last = np.append(edge[1:], free[-1] + 8) - 1
    room = last - free
    disturbed = moves.disturbed & (room >= _ROOM_TICKS)
    late = edge + rng.integers(1, np.maximum(aperture, 2))
    disturb = free + np.where(rng.random(len(edge)) < 0.5, 0, rng.integers(0, room // 2 + 1))
    disturb += disturb == end
    after = np.where(disturbed, disturb + 1, free)[:-1]
    before = after + rng.integers(0, last[:-1] - after + 1)
    before = np.where(before == end[:-1], _beside(before, after, last[:-1]), before)
    moment = np.stack([np.append(0, before), late, disturb], axis=1)
    used = np.stack([np.full(len(edge), True), moves.sampled_late, disturbed], axis=1)
    level = moves.level_v[used]
    return Levels(moment=moment[used], inp_v=level[:, 0], inn_v=level[:, 1], vdd_v=level[:, 2])


def _free_from(edge: Integers, end: Integers, aperture: Integers) -> Integers:
    """Return from when on each decision's input may change without a meaning."""
    sampled = end - edge > aperture
    return edge + 1 + np.where(sampled, aperture, 0)


def _beside(moment: Integers, earliest: Integers, latest: Integers) -> Integers:
    """Return the tick before or the tick after, where there is room."""
    return np.where(moment > earliest, moment - 1, np.minimum(moment + 1, latest))
