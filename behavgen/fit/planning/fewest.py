"""The smallest whole number that is large enough."""

from __future__ import annotations

from collections.abc import Callable

__all__ = ["MOST", "fewest"]

MOST = 10**12
"""A measurement of more parts than this is as good as none."""


def fewest(enough: Callable[[int], bool], *, start: int = 1, most: int = MOST) -> int | None:
    """Return the smallest number from `start` on that is enough; None beyond `most`.

    Parameters
    ----------
    enough : callable
        False up to some number and True from there on.
    start, most : int
        First and last number tried.
    """
    short, step = start - 1, 1
    while short + step <= most and not enough(short + step):
        short, step = short + step, 2 * step
    found = min(short + step, most + 1)
    while found - short > 1:
        middle = (short + found) // 2
        short, found = (short, middle) if enough(middle) else (middle, found)
    return found if found <= most else None
