"""Where a mutant changes a text, and what can be asked about the change."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

from behavgen.check.mutation.inertness import Inertness
from behavgen.check.mutation.mutants import Mutant

__all__ = [
    "LIMIT_CHORDS",
    "Applies",
    "Place",
    "allowed_chords",
    "becomes",
    "both",
    "has_floor",
    "in_a_task",
    "in_last_segment",
    "is_looser",
    "is_value",
    "larger",
    "one_percent",
    "repeated_later",
    "tie",
    "whole_femtoseconds",
    "within",
]

LIMIT_CHORDS = 3.0
"""To which slopes are limited, in chords beside their node."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """Where a mutant changes the text.

    Parameters
    ----------
    mutant : Mutant
    line : str
        Without indent.
    column : int
        Of the change in it.
    task : str
        Text of the task or function around it; of the whole module outside.
    text : str
        Everything.
    inertness : Inertness
        What the model never makes use of.
    """

    mutant: Mutant
    line: str
    column: int
    task: str
    text: str
    inertness: Inertness


Applies = Callable[[Place], bool]


def is_value(place: Place) -> bool:
    """Tell whether the change is in the value that a declaration gives."""
    return place.column > place.line.index("=")


def whole_femtoseconds(place: Place) -> bool:
    """Tell whether the text counts in the finest unit that there is."""
    return "timeprecision 1fs;" in place.text


def becomes(*values: str) -> Applies:
    """Return what tells whether one of some texts takes the place."""
    return lambda place: place.mutant.becomes in values


def tie(place: Place) -> bool:
    """Tell whether a comparison only takes the other side where both are equal."""
    was, becomes = place.mutant.was, place.mutant.becomes
    return was != becomes and was.rstrip("=") == becomes.rstrip("=")


def within(pattern: str) -> Applies:
    """Return what tells whether the change lies within a part of the line."""

    def applies(place: Place) -> bool:
        found = re.search(pattern, place.line)
        return found is not None and found.start() <= place.column < found.end()

    return applies


def one_percent(place: Place) -> bool:
    """Tell whether a real constant changed by a hundredth."""
    try:
        return 0.98 < float(place.mutant.becomes) / float(place.mutant.was) < 1.02
    except (ValueError, ZeroDivisionError):
        return False


def both(*all_of: Applies) -> Applies:
    """Return what tells whether everything given holds."""
    return lambda place: all(one(place) for one in all_of)


def larger(place: Place) -> bool:
    """Tell whether a constant becomes larger."""
    return float(place.mutant.becomes) > float(place.mutant.was)


def repeated_later(place: Place) -> bool:
    """Tell whether the supply's part sets what the common mode's part sets again."""
    after = re.search(r"task take_conditions;.*?endtask", place.text, re.DOTALL)
    own = place.mutant.was if place.mutant.kind == "statement" else place.line
    return (
        place.task.startswith("  task fold_supply")
        and after is not None
        and re.sub(r"\s+", "", own) in re.sub(r"\s+", "", after[0])
    )


def has_floor(place: Place) -> bool:
    """Tell whether the memory never fades to nothing, so that 1e-300 V are lost in it."""
    found = re.search(r"memory_floor_v = (exact_exp|[1-9]|0\.0*[1-9])", place.text)
    return found is not None


def in_a_task(place: Place) -> bool:
    """Tell whether the change is in a task, not at the decision edge."""
    return place.task is not place.text


def in_last_segment(place: Place) -> bool:
    """Tell whether the change is in the cubic part of the last segment."""
    segments = re.findall(r"\bcubic_3\[(\d+)\]\)\);", place.text)
    if not segments or f"cubic_3[{max(map(int, segments))}]" not in place.line:
        return False
    return within(r"(?:\+ x_ln )?\* cubic_3\[\d+\]|\+ x_ln \* cubic_3")(place)


def is_looser(place: Place) -> bool:
    """Tell whether a changed limit acts at most on slopes that are far too steep, or never."""
    return one_percent(place) or place.mutant.becomes in ("(1'b0)", ";", "/")


def allowed_chords(place: Place) -> float:
    """Return how many chords a slope may have for a changed limit to make no difference."""
    if one_percent(place):
        return min(LIMIT_CHORDS, float(place.mutant.becomes))
    return LIMIT_CHORDS
