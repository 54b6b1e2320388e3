"""What the reference says of a sequence of decisions."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
import numpy.typing as npt

__all__ = ["Decisions", "Trace"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]


class Decisions(NamedTuple):
    """Outcome of decisions, shape (N,) each.

    Parameters
    ----------
    bits : ndarray of int
        1 or 0; of an unresolved decision the coin's result, else -1.
    ready_times_s : ndarray
        When the outputs are valid, s; NaN if unresolved.
    unresolved : ndarray of bool
    """

    bits: Integers
    ready_times_s: Floats
    unresolved: npt.NDArray[np.bool_]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Trace:
    """Decisions in the simulator's terms, shape (N,) each.

    Parameters
    ----------
    overdrive_v : ndarray
        Effective overdrive `e`, signed, V.
    leaning : ndarray of int
        1 if ``e > 0``, else 0: the bit if it resolves.
    delay_ticks : ndarray of int
        Delay in units of the time precision, at least 1.
    unresolved : ndarray of bool
    bits : ndarray of int
        As in `Decisions`.
    reset_ticks : ndarray of int
        Reset delay in units of the time precision.
    aperture_ticks : ndarray of int
        When the input is sampled, after the edge.
    memory_v : ndarray
        What the previous decision adds to the trip point, signed, V.
    energy_j : ndarray
        Energy of each decision, J; 0 where not characterised.
    """

    overdrive_v: Floats
    leaning: Integers
    delay_ticks: Integers
    unresolved: npt.NDArray[np.bool_]
    bits: Integers
    reset_ticks: Integers
    aperture_ticks: Integers
    memory_v: Floats
    energy_j: Floats
