"""At which times to look for the metastable window.

The window is the delay read the other way, ``W(t) = 2 delay^-1(t)``: measured down the
tail it tells tau a second time, independently of the delays.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, log2, log10

import numpy as np

from behavgen.fit.planning.delays import KnownDelay

__all__ = ["PlannedWindows", "plan_windows"]

_A_DECADE = 2
_FEWEST = 4
_EDGE_STEPS = ceil(log2(4.0 / 0.01))
"""Simulations that find one edge of a window to 1 %, known before within a factor of 4."""


@dataclass(frozen=True, slots=True, kw_only=True)
class PlannedWindows:
    """Times at which to look for the metastable window.

    Parameters
    ----------
    resolve_time_s, window_v : tuple of float
        Times after the edge and the windows expected then.
    simulations : int
        Decisions that find both edges of all of them to 1 %.
    """

    resolve_time_s: tuple[float, ...]
    window_v: tuple[float, ...]
    simulations: int


def plan_windows(known: KnownDelay, *, lowest_v: float) -> PlannedWindows:
    """Return times that step evenly down the tail.

    Parameters
    ----------
    known : KnownDelay
    lowest_v : float
        Smallest overdrive, V, below the tail's end.
    """
    tail_end_v = known.tail_end_v
    count = max(ceil(_A_DECADE * log10(tail_end_v / lowest_v)), _FEWEST)
    half_v = np.geomspace(tail_end_v, lowest_v, count)
    return PlannedWindows(
        resolve_time_s=tuple(float(t) for t in known.delay_s(half_v)),
        window_v=tuple(float(2.0 * v) for v in half_v),
        simulations=2 * _EDGE_STEPS * count,
    )
