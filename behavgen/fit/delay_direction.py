"""Two things that a delay table must not do: rise with the overdrive, or take sides.

A larger overdrive decides faster, whatever the circuit. Where delays do not
fall, columns were mistaken or overdrives were counted from another point than
the trip point; no law should be drawn through them. Ones that take another
time than zeros are modelled by one law all the same, and the reader is told.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault
from behavgen.fit.conditions import conditions_of, find_sites
from behavgen.fit.delay_rows import TimedRows
from behavgen.fit.wording import condition_words
from behavgen.tables.characterisation import DelayTable

__all__ = ["asymmetry_words", "rising_faults"]

Floats = npt.NDArray[np.float64]

_FEWEST = 3
"""Distinct overdrives from which on a direction can be told."""
_LEAST_FALL = -0.5
"""Rank correlation (C. Spearman, Am. J. Psychology 15, 1904) of delay and overdrive that is
still a fall; delays without scatter have -1."""
_NOTABLE_GAP = 0.02
_NOTABLE_ERRORS = 3.0


def rising_faults(rows: TimedRows, file: str) -> list[Fault]:
    """Return a fault for the condition whose delays fall least, if they do not fall.

    Parameters
    ----------
    rows : TimedRows
        That resolved.
    file : str
        Of the table that they came from.
    """
    sites = find_sites(rows.conditions)
    correlation = np.array(
        [
            _rank_correlation(rows.overdrive_v[here], rows.delay_s[here])
            for here in (sites.of_row == c for c in range(sites.count))
        ]
    )
    rising = correlation > _LEAST_FALL
    if not rising.any():
        return []
    worst = int(np.argmax(np.where(rising, correlation, -np.inf)))
    place = condition_words(conditions_of(sites)[worst])
    more = f", and at {rising.sum() - 1} more conditions" if rising.sum() > 1 else ""
    return [
        Fault(
            file=file,
            what=f"at {place}{more}, delays do not fall as the overdrive rises (rank correlation "
            f"{correlation[worst]:+.2f})",
            allowed="a larger overdrive decides faster: see whether columns are mistaken, and "
            "whether overdrives count from the trip point (`vdiff` with `offset`)",
        )
    ]


def _rank_correlation(overdrive_v: Floats, delay_s: Floats) -> float:
    """Return the rank correlation; 0 for equal delays, -1 where too few rows tell."""
    if len(np.unique(overdrive_v)) < _FEWEST:
        return -1.0
    x, y = _ranks(overdrive_v), _ranks(delay_s)
    size = float(np.sqrt((x @ x) * (y @ y)))
    return float(x @ y) / size if size > 0.0 else 0.0


def _ranks(values: Floats) -> Floats:
    """Return ranks less their mean; equal values share theirs."""
    _, place, count = np.unique(values, return_inverse=True, return_counts=True)
    rank = (np.cumsum(count) - 0.5 * (count - 1.0))[place]
    centred: Floats = rank - rank.mean()
    return centred


def asymmetry_words(table: DelayTable, relative_error: Floats) -> list[str]:
    """Return what is to be said of ones and zeros that take different times.

    Parameters
    ----------
    table : DelayTable
    relative_error : ndarray, shape (N,)
        Of the model at each row, model over table less one; NaN where it has none.
    """
    known = np.isfinite(relative_error)
    ones = relative_error[known & (table.overdrive_v > 0.0)]
    zeros = relative_error[known & (table.overdrive_v < 0.0)]
    if min(len(ones), len(zeros)) < _FEWEST:
        return []
    log_ratio = float(np.log1p(zeros.mean()) - np.log1p(ones.mean()))
    error = float(np.sqrt(ones.var(ddof=1) / len(ones) + zeros.var(ddof=1) / len(zeros)))
    if abs(log_ratio) < max(_NOTABLE_GAP, _NOTABLE_ERRORS * error):
        return []
    slower, faster = ("ones", "zeros") if log_ratio > 0.0 else ("zeros", "ones")
    return [
        f"In the delay table {slower} take {np.expm1(abs(log_ratio)):.1%} longer than {faster} at "
        "the same overdrive; the model gives both the same delay, between the two."
    ]
