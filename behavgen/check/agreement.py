"""Compare what an instance showed with what it should have shown, decision by decision."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.check.waveform import ANY, CAUSE, FLAG, Expectation, Record, States

__all__ = ["FAULTS", "INEXACT_SHARE", "Agreement", "compare"]

Integers = npt.NDArray[np.int64]
Mask = npt.NDArray[np.bool_]

FAULTS = ("", "bit", "unresolved", "delay", "reset", "x_cause", "energy", "stray change")
"""What can be wrong with a decision; the first that applies counts."""
INEXACT_SHARE = 0.01
"""Delays may differ by a tick where a last place decides, which is rare: a larger share
means that they are rounded otherwise."""
ENERGY_TOLERANCE = 1e-9
"""Relative; simulators may use their own logarithms in it."""
_TOTAL_ROUNDING = 4.0 * 2.0**-52

_SHOWN = slice(0, CAUSE)  # outputs and flag: what pins show
_OUTPUTS = slice(0, FLAG)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Agreement:
    """Outcome of a run, shape (N,) each.

    Parameters
    ----------
    fault : ndarray of int
        Index into `FAULTS`; 0 where the decision agrees.
    compared : ndarray of bool
        False where a boundary is too close.
    delay_error : ndarray of int
        Observed minus expected delay in ticks; 0 where the ready cannot be seen.
    timed : ndarray of bool
        Whether the ready could be seen.
    """

    fault: npt.NDArray[np.int8]
    compared: Mask
    delay_error: Integers
    timed: Mask

    @property
    def rounds_alike(self) -> bool:
        """Whether hardly any delay is off by a tick."""
        return int((self.delay_error != 0).sum()) <= 1 + INEXACT_SHARE * int(self.timed.sum())


def compare(expected: Expectation, record: Record) -> Agreement:
    """Compare a run's record with its expectation.

    Parameters
    ----------
    expected : Expectation
        Pins that the cell does not have must be `ANY` in its states.
    record : Record
    """
    in_time = record.at(expected.end - 1)
    at_end = record.at(expected.end)
    flagged = expected.resolved & (at_end[:, FLAG] == 1) & (expected.shown[:, FLAG] != ANY)
    other = expected.resolved & _differ(in_time, expected.shown, _OUTPUTS)
    early = ~expected.resolved & _differ(in_time, expected.before, _OUTPUTS)
    wrong_end = ~expected.resolved & _differ(at_end, expected.after, _SHOWN)
    mistimed = expected.resolved & _mistimed(expected, record)
    timed = expected.resolved & ~expected.excluded & ~other & ~flagged
    timed &= _differ(expected.before, expected.shown, _SHOWN)
    seen = record.first_change(expected.edge)
    error = np.where(timed & (seen >= 0), seen - expected.ready, 0)
    masks = (
        other & ~flagged,
        flagged | early | wrong_end,
        mistimed,
        _reset_wrong(expected, record),
        _cause_wrong(expected, record),
        _energy_wrong(expected, record, timed, error),
        _strays(expected, record),
    )
    fault = np.select(masks, range(1, len(FAULTS)), default=0).astype(np.int8)
    fault[expected.excluded] = 0
    return Agreement(fault=fault, compared=~expected.excluded, delay_error=error, timed=timed)


def _differ(observed: States, expected: States, columns: slice) -> Mask:
    """Return where a state is not as expected; what is `ANY` on either side fits."""
    a, b = observed[:, columns], expected[:, columns]
    differ: Mask = (a != b) & (a != ANY) & (b != ANY)
    wrong = differ[:, 0]
    for column in range(1, differ.shape[1]):
        wrong = wrong | differ[:, column]
    return wrong


def _mistimed(expected: Expectation, record: Record) -> Mask:
    slack = expected.delay_tolerance
    just_before = np.maximum(expected.ready - slack - 1, expected.edge)
    late = _differ(record.at(expected.ready + slack), expected.shown, _SHOWN)
    return late | _differ(record.at(just_before), expected.before, _SHOWN)


def _reset_wrong(expected: Expectation, record: Record) -> Mask:
    slack = expected.reset_tolerance
    before = expected.reset - np.where(expected.returns, slack, 0) - 1
    early = (before >= expected.end) & _differ(record.at(before), expected.after, _SHOWN)
    rest = record.at(expected.reset + slack)
    return early | (expected.returns & _differ(rest, expected.rest, _SHOWN))


def _cause_wrong(expected: Expectation, record: Record) -> Mask:
    def wrong(time: Integers, state: States) -> Mask:
        return _differ(record.at(time), state, slice(CAUSE, CAUSE + 1))

    ready = wrong(expected.ready + expected.delay_tolerance, expected.shown)
    end = wrong(expected.end, expected.after)
    reset = wrong(expected.reset + expected.reset_tolerance, expected.rest)
    return np.where(expected.resolved, ready, end) | (expected.returns & reset)


def _energy_wrong(
    expected: Expectation, record: Record, timed: Mask, delay_error: Integers
) -> Mask:
    """Return where the running total grew by another energy; a tick of delay may tell in it."""
    reached = np.where(expected.resolved, expected.ready + expected.delay_tolerance, expected.end)
    total = record.energy_at(np.minimum(reached, expected.end))
    grown = total - record.energy_at(expected.edge)
    slack = np.where(timed, np.abs(delay_error), expected.delay_tolerance)
    share = ENERGY_TOLERANCE + np.where(expected.resolved, slack / expected.delay_ticks, 0.0)
    rounding = _TOTAL_ROUNDING * np.abs(total)
    off: Mask = np.abs(grown - expected.energy_j) > share * expected.energy_j + rounding
    return off


def _strays(expected: Expectation, record: Record) -> Mask:
    """Return where an output moved at a time at which nothing may move."""
    delay_slack, reset_slack = expected.delay_tolerance, expected.reset_tolerance
    quiet_from_reset = expected.reset + np.where(expected.returns, reset_slack, 0)
    next_edge = np.append(expected.edge[1:], expected.reset[-1:] + reset_slack)
    spans = (
        (expected.edge, np.minimum(expected.ready - delay_slack, expected.end) - 1),
        (np.minimum(expected.ready + delay_slack, expected.end - 1), expected.end - 1),
        (expected.end, expected.reset - reset_slack - 1),
        (quiet_from_reset, next_edge),
    )
    moved: Mask = np.sum([record.changes(*span) for span in spans], axis=0) > 0
    return moved
