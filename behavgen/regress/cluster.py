"""Spreads work over the workers of a Dask cluster that exists already.

The scheduler runs a task anew when the worker that had it is lost. Needs the
package ``distributed``, which only the extra ``cluster`` installs.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Callable, Iterable, Iterator
from itertools import islice
from types import ModuleType
from typing import Any, TypeVar

from behavgen.errors import Fault, ToolError
from behavgen.regress.workers import AHEAD, lost_worker

__all__ = ["spread_over_cluster"]

Task = TypeVar("Task")
Result = TypeVar("Result")
Client = Any  # distributed.Client and Future, which are typed in part only
Submitted = Any

ANSWER_WITHIN_S = 20
"""For a scheduler to answer, and for a first worker to appear."""
ALONE_FOR_S = 60
"""How long a run waits for a new worker once all are lost."""


def spread_over_cluster(
    work: Callable[[Task], Result], tasks: Iterable[Task], *, scheduler: str
) -> Iterator[Result | ToolError]:
    """Do the work on every task; `behavgen.regress.spread.spread` says what is yielded.

    Raises
    ------
    ToolError
        When ``distributed`` is missing, the scheduler does not answer or has no workers.
    """
    distributed = _distributed()
    source = iter(tasks)
    waiting: deque[Submitted] = deque()
    client = _connected(distributed, scheduler)
    try:
        while True:
            room = AHEAD * sum(client.nthreads().values()) - len(waiting)
            for task in islice(source, max(room, 0 if waiting else 1)):
                waiting.append(client.submit(work, task, pure=False))
            if not waiting:
                return
            yield _made(distributed, client, waiting.popleft())
    finally:
        client.close()


def _made(distributed: ModuleType, client: Client, future: Submitted) -> Any:
    """Wait for a result for as long as there are workers to make it."""
    alone_s = 0
    while True:
        try:
            return future.result(timeout=ANSWER_WITHIN_S)
        except distributed.KilledWorker:
            return lost_worker()
        except (TimeoutError, distributed.TimeoutError):
            alone_s = 0 if client.nthreads() else alone_s + ANSWER_WITHIN_S
        if alone_s >= ALONE_FOR_S:
            raise _unusable(client.scheduler_info()["address"], "has lost all its workers")


def _connected(distributed: ModuleType, scheduler: str) -> Client:
    try:
        client = distributed.Client(scheduler, timeout=ANSWER_WITHIN_S, set_as_default=False)
    except (OSError, ValueError, distributed.TimeoutError) as error:
        raise _unusable(scheduler, f"does not answer: {error}") from None
    try:
        client.wait_for_workers(1, timeout=ANSWER_WITHIN_S)
    except (TimeoutError, distributed.TimeoutError):
        client.close()
        raise _unusable(scheduler, "has no workers") from None
    return client


def _distributed() -> ModuleType:
    try:
        import distributed  # noqa: PLC0415  an extra, and slow to import
    except ImportError:
        fault = Fault(
            what="the Python package distributed is missing, which spreads work over a cluster",
            allowed="install it with: pip install behavgen[cluster]",
        )
        raise ToolError(fault) from None
    return distributed


def _unusable(scheduler: str, what: str) -> ToolError:
    allowed = "start its scheduler and workers, or leave --scheduler away"
    return ToolError(Fault(what=f"the Dask scheduler {scheduler} {what}", allowed=allowed))
