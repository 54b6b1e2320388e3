"""Spreads work over processes of this machine; a worker that dies costs a retry."""

from __future__ import annotations

import multiprocessing
import os
import signal
import threading
from collections import deque
from collections.abc import Callable, Iterable, Iterator
from concurrent.futures import Future, ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from itertools import islice
from typing import TypeVar

from behavgen.errors import ToolError
from behavgen.regress.workers import AHEAD, lost_worker

__all__ = ["spread_over_processes"]

Task = TypeVar("Task")
Result = TypeVar("Result")

_SINGLE_THREADED = ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS")


def spread_over_processes(
    work: Callable[[Task], Result], tasks: Iterable[Task], *, jobs: int
) -> Iterator[Result | ToolError]:
    """Do the work on every task; `behavgen.regress.spread.spread` says what is yielded."""
    source = iter(tasks)
    waiting: deque[tuple[Task, Future[Result]]] = deque()
    pool = _pool(jobs)
    try:
        while True:
            for task in islice(source, AHEAD * jobs - len(waiting)):
                waiting.append((task, _submit(pool, work, task)))
            if not waiting:
                return
            task, future = waiting.popleft()
            if not isinstance(future.exception(), BrokenProcessPool):
                yield future.result()
                continue
            # Which of the tasks under way killed its worker is not known. The first one
            # is tried alone, then the others together again: the culprit comes first once.
            pool.shutdown()
            yield _alone(work, task)
            pool = _pool(jobs)
            waiting = deque((t, f if _is_made(f) else _submit(pool, work, t)) for t, f in waiting)
    finally:
        pool.shutdown(cancel_futures=True)


def _alone(work: Callable[[Task], Result], task: Task) -> Result | ToolError:
    with _pool(1) as pool:
        future = _submit(pool, work, task)
        return (
            lost_worker() if isinstance(future.exception(), BrokenProcessPool) else future.result()
        )


def _is_made(future: Future[Result]) -> bool:
    return future.done() and not isinstance(future.exception(), BrokenProcessPool)


def _submit(
    pool: ProcessPoolExecutor, work: Callable[[Task], Result], task: Task
) -> Future[Result]:
    try:
        return pool.submit(_interruptible, work, task)
    except BrokenProcessPool as error:
        failed: Future[Result] = Future()
        failed.set_exception(error)
        return failed


def _pool(jobs: int) -> ProcessPoolExecutor:
    """Return processes begun from nothing: a fork would copy locks that threads may hold."""
    return ProcessPoolExecutor(
        jobs,
        mp_context=multiprocessing.get_context("spawn"),
        initializer=_begin_worker,
        initargs=(max((os.cpu_count() or 1) // jobs, 1),),
    )


def _begin_worker(threads: int) -> None:
    """Let a worker use its share of the cores, and neither outlive nor outshout its parent."""
    # Read by libraries that are imported later, with the work.
    os.environ |= dict.fromkeys(_SINGLE_THREADED, "1") | {"POLARS_MAX_THREADS": str(threads)}
    signal.signal(signal.SIGINT, signal.SIG_IGN)
    threading.Thread(target=_leave_with_parent, daemon=True).start()


def _leave_with_parent() -> None:
    parent = multiprocessing.parent_process()
    if parent is not None:
        parent.join()
        os._exit(1)


def _interruptible(work: Callable[[Task], Result], task: Task) -> Result:
    signal.signal(signal.SIGINT, signal.default_int_handler)
    try:
        return work(task)
    finally:
        signal.signal(signal.SIGINT, signal.SIG_IGN)
