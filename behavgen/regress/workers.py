"""What holds for all workers, wherever they are."""

from __future__ import annotations

from behavgen.errors import Fault, ToolError

__all__ = ["AHEAD", "lost_worker"]

AHEAD = 2
"""Tasks under way or waiting for each worker."""


def lost_worker() -> ToolError:
    """Return the error of a task that costs every worker its life."""
    fault = Fault(
        what="the worker that did this was lost, and so was the next one",
        allowed="give workers more memory, or look for what ends them",
    )
    return ToolError(fault)
