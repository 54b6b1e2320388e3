"""How far a run of many cells is, and how long it will still take, in words."""

from __future__ import annotations

__all__ = ["progress_text"]


def progress_text(done: int, total: int, elapsed_s: float) -> str:
    """Return e.g. ``"37 of 300 cells, about 2 min left"``.

    Parameters
    ----------
    done, total : int
        Cells; at least one is done.
    elapsed_s : float
        Since the first began; the others are taken to need as long on average.
    """
    if done >= total:
        return f"{done} of {total} cells"
    return f"{done} of {total} cells, {_about(elapsed_s / done * (total - done))} left"


def _about(seconds: float) -> str:
    if seconds < 10.0:
        return "a few seconds"
    if seconds < 90.0:
        return f"about {10 * round(seconds / 10)} s"
    minutes = round(seconds / 60)
    return f"about {minutes} min" if minutes < 90 else f"about {minutes / 60:.1f} h"
