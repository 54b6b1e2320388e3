"""Two temperatures seen as overdrives, where a straight line between them is all they tell.

Delays bend between a cold and a hot corner because thresholds fall as it gets
warmer: much as if supply and common mode rose by somewhat less than a millivolt
a kelvin. How delays bend over these the table tells. Supply and common mode are
therefore taken as overdrives of a latch and of an input pair, smoothed below
threshold as a transistor's are (C. Enz, F. Krummenacher, E. Vittoz, Analog
Integrated Circuits and Signal Processing 8, 1995, 83-114), and in logarithms:
currents are powers of them.
"""

from __future__ import annotations

import itertools
from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

__all__ = ["Overdrives", "overdrive_views"]

Floats = npt.NDArray[np.float64]

_TEMPERATURE, _SUPPLY, _COMMON = range(3)
_DRIFT_V_PER_K = 0.8e-3
"""By how much a threshold falls (common practice: 0.5 to 1 mV/K)."""
_REFERENCE_K = 300.0
_SMOOTHING_V_PER_K = 2.0 * 1.35 * 8.617333e-5
"""Twice a usual slope factor times Boltzmann's constant over the elementary charge (CODATA)."""
_PAIR_V = (-0.05, 0.0, 0.05, 0.1, 0.2, 0.3)
_LATCH_V = (0.05, 0.2, 0.4, 0.7)
"""Candidates for the smallest overdrive in the table."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Overdrives:
    """How supply and common mode look from the devices' gates.

    Parameters
    ----------
    below_supply : bool
        The pair's overdrive counts from the supply down, not from ground up.
    pair_threshold_v, latch_threshold_v : float
        At 300 K.
    """

    below_supply: bool
    pair_threshold_v: float
    latch_threshold_v: float

    @property
    def powers(self) -> dict[str, int]:
        """Highest powers of a term."""
        return {"vdd_v": 2, "vcm_v": 2}

    @property
    def highest_order(self) -> int:
        """Highest total power of a term."""
        return 3

    @property
    def clearly_better(self) -> float:
        """Left-out errors of the plain surface over those of this one from which on it is taken."""
        return 1.3

    def seen(self, values: Floats) -> Floats:
        """Return logarithms: of temperature, of which mobility is a power, and of overdrives."""
        warmth_v = _DRIFT_V_PER_K * (values[:, _TEMPERATURE] - _REFERENCE_K)
        smoothing_v = _SMOOTHING_V_PER_K * values[:, _TEMPERATURE]

        def log_overdrive(level_v: Floats, threshold_v: float) -> Floats:
            above = (level_v - threshold_v + warmth_v) / smoothing_v
            return np.log(smoothing_v * np.logaddexp(0.0, above))

        seen = values.copy()
        seen[:, _TEMPERATURE] = np.log(values[:, _TEMPERATURE] / _REFERENCE_K)
        seen[:, _SUPPLY] = log_overdrive(values[:, _SUPPLY], self.latch_threshold_v)
        seen[:, _COMMON] = log_overdrive(
            _at_gate(values, below_supply=self.below_supply), self.pair_threshold_v
        )
        return seen


def overdrive_views(values: Floats, targets: Floats) -> Iterator[Overdrives]:
    """Return the candidates for a table of two temperatures and several of the others.

    Parameters
    ----------
    values : ndarray, shape (C, 3)
    targets : ndarray, shape (C, L)
        Logarithms of delays: where they rise with the common mode on the whole, the pair's
        overdrive counts from the supply down.
    """
    levels = [0 if np.isnan(v).any() else len(np.unique(v)) for v in values.T]
    if levels[_TEMPERATURE] != 2 or min(levels[_SUPPLY], levels[_COMMON]) < 2:
        return
    below_supply = bool(np.cov(values[:, _COMMON], targets.mean(axis=-1))[0, 1] > 0.0)
    warmth_v = _DRIFT_V_PER_K * (values[:, _TEMPERATURE] - _REFERENCE_K)
    lowest_v = float((values[:, _SUPPLY] + warmth_v).min())
    at_gate_v = float((_at_gate(values, below_supply=below_supply) + warmth_v).min())
    for pair_v, latch_v in itertools.product(_PAIR_V, _LATCH_V):
        yield Overdrives(
            below_supply=below_supply,
            pair_threshold_v=at_gate_v - pair_v,
            latch_threshold_v=lowest_v - latch_v,
        )


def _at_gate(values: Floats, *, below_supply: bool) -> Floats:
    common: Floats = values[:, _COMMON]
    return values[:, _SUPPLY] - common if below_supply else common
