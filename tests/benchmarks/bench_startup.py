"""What ``behavgen --help`` costs, relative to a bare interpreter.

Prints the ratio of CPU times, medians of runs taken in turn; fails above the
bound. Run it as a script.
"""

from __future__ import annotations

import os
import statistics
import sys
from pathlib import Path

ROOT = Path(__file__).parents[2]
RUNS = 15
BOUND = 4.0
# Both start alike: no user site, no variables from outside.
INTERPRETER = (sys.executable, "-E", "-s")
BARE = (*INTERPRETER, "-c", "pass")
HELP = (*INTERPRETER, "-m", "behavgen", "--help")


def cpu_time_s(command: tuple[str, ...]) -> float:
    """Return user and system time of one run of `command`, s."""
    quiet = (os.POSIX_SPAWN_OPEN, 1, os.devnull, os.O_WRONLY, 0)
    child = os.posix_spawn(command[0], command, os.environ, file_actions=[quiet])
    _, status, usage = os.wait4(child, 0)
    if status != 0:
        sys.exit(f"{' '.join(command)} failed with status {os.waitstatus_to_exitcode(status)}")
    return usage.ru_utime + usage.ru_stime


def main() -> None:
    """Measure, print, judge."""
    os.chdir(ROOT)
    for command in (BARE, HELP):  # compiled files and disk caches
        cpu_time_s(command)
    pairs = [(cpu_time_s(BARE), cpu_time_s(HELP)) for _ in range(RUNS)]
    bare_s, help_s = (statistics.median(times) for times in zip(*pairs, strict=True))
    ratio = help_s / bare_s
    print(
        f"startup: behavgen --help {help_s * 1e3:.0f} ms, bare interpreter {bare_s * 1e3:.0f} ms, "
        f"ratio {ratio:.2f}, at most {BOUND:g}"
    )
    sys.exit(ratio > BOUND)


if __name__ == "__main__":
    main()
