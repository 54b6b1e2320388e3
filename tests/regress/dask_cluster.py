"""A real Dask scheduler and workers on this machine, reachable from this machine alone."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

__all__ = ["Cluster", "running_cluster"]

ROOT = Path(__file__).parents[2]
START_WITHIN_S = 40


@dataclass(frozen=True, slots=True, kw_only=True)
class Cluster:
    """The scheduler's address, and the processes of its workers."""

    address: str
    workers: tuple[subprocess.Popen[bytes], ...]


@contextmanager
def running_cluster(folder: Path, workers: int) -> Iterator[Cluster]:
    """Run a scheduler and some workers with one thread each, and end them."""
    file, log = folder / "scheduler.json", (folder / "cluster.log").open("wb")
    local = ["--host", "127.0.0.1", "--no-dashboard", "--scheduler-file", str(file)]
    started = [_started("scheduler", [*local, "--port", "0"], log)]
    try:
        alone = ["--nthreads", "1", "--no-nanny", "--local-directory", str(folder)]
        started += [_started("worker", [*local, *alone], log) for _ in range(workers)]
        yield Cluster(address=_address(file), workers=tuple(started[1:]))
    finally:
        for process in started:
            process.kill()
            process.wait()
        log.close()


def _started(what: str, arguments: list[str], log) -> subprocess.Popen[bytes]:
    command = [sys.executable, "-m", f"distributed.cli.dask_{what}", *arguments]
    environment = os.environ | {"PYTHONPATH": str(ROOT)}
    return subprocess.Popen(command, env=environment, stdout=log, stderr=log)


def _address(file: Path) -> str:
    for _ in range(10 * START_WITHIN_S):
        try:
            return json.loads(file.read_text(encoding="utf-8"))["address"]
        except (OSError, ValueError, KeyError):
            time.sleep(0.1)
    raise TimeoutError("the scheduler does not start")
