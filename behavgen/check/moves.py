"""Levels of a decision at, soon after and long after its edge.

A decision takes its conditions at the edge and its input a little later, at the
aperture. Levels that move are, at the edge, those of the wanted conditions
with an input that would decide otherwise; then the input that is to be sampled,
at another common mode and supply; then, once they must not matter any more,
others again.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.check.aims import ZERO
from behavgen.model import ComparatorModel

__all__ = ["Away", "Moves", "draw_away"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Mask = npt.NDArray[np.bool_]

MOVING_SHARE = 0.3
_SMALLEST_V, _LARGEST_V = 1e-3, 0.1
_COMMON_V = 0.05
_SUPPLY_SHARE = 0.1
_FEW = 10


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Moves:
    """Levels of each decision.

    Parameters
    ----------
    level_v : ndarray, shape (N, 3, 3)
        At the edge, when it is sampled, afterwards; of inp, inn and vdd.
    sampled_late, disturbed : ndarray of bool, shape (N,)
        Whether the second is applied, and the third where there is room for it.
    """

    level_v: Floats
    sampled_late: Mask
    disturbed: Mask


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Away:
    """By how much the levels of each decision move, where they do, shape (N,).

    Parameters
    ----------
    moving : ndarray of bool
    differential_v, common_v : ndarray
    supply_factor : ndarray
    aperture : ndarray of int
        When the input is sampled, ticks after the edge.
    """

    moving: Mask
    differential_v: Floats
    common_v: Floats
    supply_factor: Floats
    aperture: Integers

    def moves(self, wanted_v: Floats, phase: Integers) -> Moves:
        """Return levels by which a wanted input is sampled at wanted conditions.

        Parameters
        ----------
        wanted_v : ndarray, shape (N, 3)
            Of inp, inn and vdd.
        phase : ndarray of int, shape (N,)
            Decisions that end before they sample hold their levels.
        """
        disturbed = self.moving & (phase > self.aperture)
        sampled_late = disturbed & (self.aperture >= 2)
        moving, late = np.flatnonzero(disturbed), np.flatnonzero(sampled_late)
        apart = np.stack([0.5 * self.differential_v, -0.5 * self.differential_v], axis=1)
        level = np.repeat(wanted_v[:, None], 3, axis=1)
        level[late, 0, :2] += apart[late]
        level[late, 1, :2] += self.common_v[late, None]
        level[moving, 2, :2] += apart[moving] - self.common_v[moving, None]
        level[late, 1, 2] *= self.supply_factor[late]
        level[moving, 2, 2] *= self.supply_factor[moving]
        return Moves(level_v=level, sampled_late=sampled_late, disturbed=disturbed)


def draw_away(
    model: ComparatorModel, aim: Integers, aperture: Integers, rng: np.random.Generator
) -> Away:
    """Return how some of a block's decisions move; exact zeros and single draws hold still.

    Parameters
    ----------
    model : ComparatorModel
    aim : ndarray of int, shape (N,)
    aperture : ndarray of int, shape (N,)
        When the input is sampled, ticks after the edge.
    rng : Generator
    """
    count = len(aim)
    size = np.exp(rng.uniform(np.log(_SMALLEST_V), np.log(_LARGEST_V), count))
    steps = rng.uniform(0.0, _SUPPLY_SHARE, count) * (model.cell.pins.vdd is not None)
    return Away(
        moving=(rng.random(count) < MOVING_SHARE) & (aim != ZERO) & (count > _FEW),
        differential_v=size * rng.choice([-1.0, 1.0], count),
        common_v=rng.uniform(-_COMMON_V, _COMMON_V, count),
        supply_factor=1.0 + steps,
        aperture=aperture,
    )
