"""Find where a simulated outcome flips, for many searches at once."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import numpy.typing as npt

__all__ = ["narrowed"]

Floats = npt.NDArray[np.float64]


def narrowed(
    low: Floats,
    high: Floats,
    ask: Callable[[Floats], npt.NDArray[np.bool_]],
    *,
    rounds: int,
    points: int,
) -> Floats:
    """Return where each outcome turns from no to yes, shape (S,).

    Every round asks at points spread evenly over what is left, so that a
    simulator is started once a round and not once a bit.

    Parameters
    ----------
    low, high : ndarray, shape (S,)
        Between which the outcome turns; where it does not, the nearer end is returned.
    ask : callable
        From values of shape (S, points) to outcomes of that shape.
    rounds, points : int
        The interval shrinks by ``points - 1`` a round.
    """
    rows = np.arange(len(low))
    for _ in range(rounds if len(low) else 0):
        grid = low[:, None] + (high - low)[:, None] * np.linspace(0.0, 1.0, points)
        yes = ask(grid)
        first = np.where(yes.any(axis=1), yes.argmax(axis=1), points - 1)
        low, high = grid[rows, np.maximum(first - 1, 0)], grid[rows, first]
    return 0.5 * (low + high)
