"""What a cell's headline was in a past run, and what of it is different now."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from datetime import datetime

from behavgen.errors import Fault, ProjectError
from behavgen.regress.history import History
from behavgen.regress.past import PastRun, PastValue

__all__ = ["Since", "changes", "past_run"]

_SAME = 1e-6
"""Relative difference that rounding may make."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Since:
    """One number then and now."""

    parameter: str
    unit: str
    old: PastValue
    new: PastValue


def past_run(history: History, moment: datetime) -> PastRun:
    """Return the last finished run that had begun by a moment.

    Raises
    ------
    ProjectError
        When there is none.
    """
    found = history.run_at(moment)
    if found is None:
        past = [run for run in history.runs() if run.passed is not None]
        first = f"the first one began {past[0].began:%Y-%m-%dT%H:%M}" if past else "there is none"
        raise ProjectError(
            Fault(what=f"no finished run by {moment:%Y-%m-%dT%H:%M}", allowed=f"{first}, in UTC")
        )
    return found


def changes(old: Iterable[PastValue], new: Iterable[PastValue]) -> tuple[Since, ...]:
    """Return the numbers of both that differ, in the new order."""
    before = {value.parameter: value for value in old}
    return tuple(
        Since(parameter=now.parameter, unit=now.unit, old=was, new=now)
        for now in new
        if (was := before.get(now.parameter)) is not None
        and abs(now.value - was.value) > _SAME * max(abs(now.value), abs(was.value))
    )
