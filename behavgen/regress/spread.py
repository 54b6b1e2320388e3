"""Spreads independent pieces of work over workers: none, processes of this machine, or a cluster.

Results come back in the order of the tasks, whoever made them and when, so
that nothing that follows can depend on where the work was done. Only a few
tasks more than there are workers are under way at any time: neither tasks nor
results pile up. A worker that is lost costs a retry.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from typing import TypeVar

from behavgen.errors import ToolError

__all__ = ["CELLS_OF_A_WORKER", "spread"]

Task = TypeVar("Task")
Result = TypeVar("Result")

CELLS_OF_A_WORKER = 6
"""Fewer are fitted in less time than a process of its own takes to begin."""


def spread(
    work: Callable[[Task], Result],
    tasks: Iterable[Task],
    *,
    jobs: int = 1,
    scheduler: str = "",
) -> Iterator[Result | ToolError]:
    """Do the work on every task, and yield the results in the order of the tasks.

    Parameters
    ----------
    work : callable
        A function of a module, without side effects: it may be called more than
        once for a task.
    tasks : iterable
        Taken one by one as workers become free.
    jobs : int
        Processes of this machine; with one, the work is done in this process.
    scheduler : str
        Address of a Dask scheduler, whose workers are used instead.

    Yields
    ------
    result or ToolError
        An error in place of the result where every worker that tried was lost.

    Raises
    ------
    ToolError
        When the scheduler cannot be used.
    """
    if scheduler:
        from behavgen.regress.cluster import spread_over_cluster  # noqa: PLC0415  an extra

        yield from spread_over_cluster(work, tasks, scheduler=scheduler)
    elif jobs > 1:
        from behavgen.regress.processes import spread_over_processes  # noqa: PLC0415  not always

        yield from spread_over_processes(work, tasks, jobs=jobs)
    else:
        yield from map(work, tasks)
