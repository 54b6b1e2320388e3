"""Delay rows that contradict the other rows of their condition.

Each delay is compared with what its neighbours in overdrive let expect: the
cubic through the two on either side (the parabola through the next three at the
ends), in logarithms. A row is left out when it differs by more than 30 % (60 %
at the ends) and by more than six standard deviations of all such differences,
taken robustly from their median (common practice). Of several, the one goes
first without which the others agree best. No delay law is assumed, so that a
bad row cannot bend the law that judges it.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import Sites, conditions_of, find_sites
from behavgen.fit.delay_rows import TimedRows
from behavgen.fit.wording import condition_words

__all__ = ["without_outlying"]

Floats = npt.NDArray[np.float64]
Indices = npt.NDArray[np.intp]
Mask = npt.NDArray[np.bool_]

_GROSS = float(np.log(1.25))
"""Times the root of the standard deviation that unit errors of all rows cause: ln 1.3 between
even neighbours, ln 1.6 at the ends."""
_DEVIATIONS = 6.0
_MEDIAN_OF_NORMAL = 0.6745
"""Median magnitude of a standard normal number."""
_FEWEST = 6
"""Overdrives of a condition from which on neighbours can be trusted."""
_FARTHEST = float(np.log(16.0))
"""Of the neighbours that may let expect something: delays bend too much beyond."""
_MOST_SHARE = 0.2
"""Of a condition's rows; where more contradict, none is known to be wrong."""
_MOST_NAMED = 3
_BESIDE = np.array([-2, -1, 1, 2])


def without_outlying(rows: TimedRows) -> tuple[TimedRows, list[str]]:
    """Give weight 0 to rows that contradict the others, and name them.

    Parameters
    ----------
    rows : TimedRows

    Returns
    -------
    TimedRows
    list of str
        A notice; none where no row is left out.
    """
    sites = find_sites(rows.conditions)
    curves = [
        _Curve(rows=np.flatnonzero(sites.of_row == c), table=rows) for c in range(sites.count)
    ]
    scale = _scale([np.divide(*curve.differences(curve.used)) for curve in curves])
    factors: dict[int, float] = {}
    for curve in curves:
        factors |= curve.outlying(_DEVIATIONS * scale)
    if not factors:
        return rows, []
    weight = rows.weight.copy()
    weight[list(factors)] = 0.0
    return replace(rows, weight=weight), [_words(rows, sites, factors)]


def _scale(deviations: list[Floats]) -> float:
    together = np.abs(np.concatenate(deviations))
    known = together[np.isfinite(together)]
    return float(np.median(known)) / _MEDIAN_OF_NORMAL if len(known) else 0.0


class _Curve:
    """The rows of one condition."""

    def __init__(self, rows: Indices, table: TimedRows) -> None:
        self.rows = rows
        # Overdrives within a percent are one: tables give both signs.
        self.log_v = 0.01 * np.rint(100.0 * np.log(table.overdrive_v[rows]))
        self.log_delay = np.log(table.delay_s[rows])
        self.used = table.weight[rows] > 0.0

    def differences(self, used: Mask) -> tuple[Floats, Floats]:
        """Return ln(delay / expected delay) and its standard deviation for unit errors.

        NaN where nothing can be expected or the row is not used.
        """
        gap, error = np.full((2, len(self.rows)), np.nan)
        x, of_row = np.unique(self.log_v[used], return_inverse=True)
        if len(x) >= _FEWEST:
            mean = np.bincount(of_row, weights=self.log_delay[used]) / np.bincount(of_row)
            expected, deviation = _from_neighbours(x, mean)
            gap[used] = self.log_delay[used] - expected[of_row]
            error[used] = deviation[of_row]
        return gap, error

    def outlying(self, limit: float) -> dict[int, float]:
        """Return rows that contradict the others, with their delays over the expected ones."""
        used = self.used.copy()
        gone: list[int] = []
        while len(gone) <= _MOST_SHARE * len(self.rows):
            gap, error = self.differences(used)
            beyond = np.abs(gap) > np.maximum(_GROSS * np.sqrt(error), limit * error)
            if not beyond.any():
                return {int(self.rows[k]): self._factor(used, k) for k in gone}
            gone.append(min(np.flatnonzero(beyond).tolist(), key=lambda k: self._rest(used, k)))
            used[gone[-1]] = False
        return {}

    def _rest(self, used: Mask, without: int) -> float:
        """Return the sum of squared deviations that is left without one more row."""
        left = used.copy()
        left[without] = False
        gap, error = self.differences(left)
        return float(np.nansum((gap / error) ** 2))

    def _factor(self, used: Mask, row: int) -> float:
        together = used.copy()
        together[row] = True
        return float(np.exp(self.differences(together)[0][row]))


def _from_neighbours(x: Floats, y: Floats) -> tuple[Floats, Floats]:
    """Return what the neighbours of each point let expect, and the difference's deviation."""
    last = len(x) - 1
    beside = np.arange(len(x))[:, None] + _BESIDE
    beside[0], beside[-1] = (1, 2, 3, -1), (last - 1, last - 2, last - 3, -1)
    inside = (beside >= 0) & (beside <= last)
    at = x[np.clip(beside, 0, last)]
    weights = np.where(inside, 1.0, 0.0)
    for k in range(len(_BESIDE)):
        others = inside & inside[:, k : k + 1] & (np.arange(len(_BESIDE)) != k)
        factors = (x[:, None] - at) / np.where(others, at[:, k : k + 1] - at, 1.0)
        weights[:, k] *= np.where(others, factors, 1.0).prod(axis=1)
    reach = np.where(inside, np.abs(at - x[:, None]), 0.0).max(axis=1)
    expected = (weights * y[np.clip(beside, 0, last)]).sum(axis=1)
    error = np.sqrt(1.0 + (weights**2).sum(axis=1))
    return np.where(reach <= _FARTHEST, expected, np.nan), error


def _words(rows: TimedRows, sites: Sites, factors: dict[int, float]) -> str:
    conditions = conditions_of(sites)
    worst = sorted(factors, key=lambda row: -abs(np.log(factors[row])))
    named = [
        f"{rows.overdrive_v[row] * 1e3:.4g} mV at {condition_words(conditions[sites.of_row[row]])} "
        f"({factors[row]:.3g} times the delay expected)"
        for row in worst[:_MOST_NAMED]
    ]
    more = f"; and {len(factors) - _MOST_NAMED} more" if len(factors) > _MOST_NAMED else ""
    rows_words = "1 row contradicts" if len(factors) == 1 else f"{len(factors)} rows contradict"
    have = "has" if len(factors) == 1 else "have"
    return (
        f"{rows_words} the other rows of the same condition and {have} no part in the delay fit: "
        f"{'; '.join(named)}{more}."
    )
