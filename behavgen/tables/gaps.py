"""What the tables of a cell leave open, in words."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

import numpy as np

from behavgen.tables.characterisation import Characterisation, DelayTable
from behavgen.tables.condition_sets import (
    CONDITION_NAMES,
    ConditionSet,
    count_covered,
    names_not_given,
    per_process,
)

__all__ = ["gaps"]


def gaps(tables: Characterisation, sets: Mapping[str, ConditionSet]) -> Iterable[str]:
    """Yield what the tables leave open, in words."""
    if tables.window is not None and (empty := int((tables.window.window_v == 0.0).sum())):
        yield f"window rows without an unresolved trial: {empty}; more trials would tell the width"
    if tables.delay is not None:
        yield from _delay_gaps(tables.delay, sets["delay"])
        for name, what in _ELSEWHERE.items():
            if name in sets and (few := _few_of(sets[name], sets["delay"])):
                yield f"{name} covers {few} conditions; elsewhere {what} is interpolated or clamped"


_ELSEWHERE = {
    "offset": "mismatch",
    "noise": "sigma",
    "window": "the window",
    "memory": "the memory",
    "reset": "the reset delay",
    "aperture": "the aperture",
    "energy": "the energy",
    "kickback": "the kickback",
}


def _few_of(conditions: ConditionSet, among: ConditionSet) -> str:
    covered = count_covered(conditions, among)
    given_nothing = len(names_not_given(conditions)) == len(CONDITION_NAMES)
    return f"{covered} of {len(among)}" if covered < len(among) and not given_nothing else ""


def _delay_gaps(table: DelayTable, conditions: ConditionSet) -> Iterable[str]:
    counts = per_process(conditions)
    for process, count in counts.items():
        most, largest = next(iter(counts.items()))
        if count < largest:
            yield f"process {process} at {count} of {largest} conditions: {most} is scaled to it"
    unresolved = np.isnan(table.delay_s)
    if unwatched := int((unresolved & np.isnan(table.observed_for_s)).sum()):
        yield f"delay rows not resolved within an unknown time, not used: {unwatched}"
    signs = np.unique(np.sign(table.overdrive_v[~unresolved]))
    if signs.size == 1:
        sign = "positive" if signs[0] > 0 else "negative"
        yield f"delay at {sign} overdrive only: the other direction is taken to be alike"
    else:
        yield from _contradictions(table)
    if not table.measured:
        yield 'how delay is measured is not said: add measured = "from where to where"'


def _contradictions(table: DelayTable) -> Iterable[str]:
    """Say how many decisions went against the sign of their overdrive."""
    stated = (table.decision >= 0) & ~np.isnan(table.delay_s)
    wrong = stated & (np.sign(table.overdrive_v) != 2 * table.decision - 1)
    if count := int(wrong.sum()):
        yield f"delay rows decided against the sign of their overdrive: {count}; inputs swapped?"
