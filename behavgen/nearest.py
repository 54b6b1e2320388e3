"""Near misses: what a mistyped name was probably meant to be."""

from __future__ import annotations

import difflib
from collections.abc import Iterable

__all__ = ["did_you_mean", "nearest_name"]


def nearest_name(name: str, known: Iterable[str]) -> str | None:
    """Return the known name most like `name`, or None when nothing is."""
    by_lower = {item.lower(): item for item in known}
    found = difflib.get_close_matches(name.lower(), by_lower, n=1, cutoff=0.6)
    return by_lower[found[0]] if found else None


def did_you_mean(name: str, known: Iterable[str]) -> str:
    """Return ``, did you mean 'delay'?``, or nothing, to put behind what was found."""
    nearest = nearest_name(name, known)
    return f", did you mean '{nearest}'?" if nearest else ""
