"""Where results, diagnostics and progress go, and how they look there."""

from __future__ import annotations

import json
import os
import sys
from collections.abc import Callable, Iterator, Mapping, Sequence
from contextlib import contextmanager
from typing import TextIO

from behavgen.cli.parser import Options

__all__ = ["Terminal", "aligned"]

_STYLES = {"strong": "1", "quiet": "2", "bad": "1;31", "good": "1;32", "careful": "33"}
"""What a text is, to its select graphic rendition (ECMA-48, 8.3.117)."""


class Terminal:
    """Prints results on stdout and diagnostics on stderr.

    Parameters
    ----------
    options : Options
        Its `json`, `quiet`, `verbose` and `color` decide what is printed and how.
    """

    def __init__(self, options: Options) -> None:
        self._json = options.json
        self._quiet = options.quiet or options.json
        self._verbose = options.verbose and not self._quiet
        self._stdout: TextIO | None = sys.stdout
        self._stderr = sys.stderr
        self._coloured = _wants_colour(options.color, self._stdout)
        _never_refuse_a_character(self._stdout)

    def say(self, line: str = "") -> None:
        """Print a line of results; nothing under ``-q`` and ``--json``."""
        if not self._quiet:
            self._write(line)

    def say_more(self, line: str) -> None:
        """Print a line of results that only ``-v`` asks for."""
        if self._verbose:
            self._write(line)

    def conclude(self, line: str) -> None:
        """Print a line that ``-q`` shows too."""
        if not self._json:
            self._write(line)

    def give(self, data: Mapping[str, object]) -> None:
        """Print the one object of ``--json``."""
        if self._json:
            self._write(json.dumps(data, indent=2, sort_keys=True, allow_nan=False))

    def complain(self, line: str) -> None:
        """Print a diagnostic, after the results that came before it."""
        self.flush()
        print(line, file=self._stderr, flush=True)

    def paint(self, text: str, style: str) -> str:
        """Colour a text, where colours are wanted."""
        return f"\033[{_STYLES[style]}m{text}\033[0m" if self._coloured else text

    @contextmanager
    def progress(self, what: str) -> Iterator[Callable[[str], None] | None]:
        """Show that something is going on; only where somebody is watching.

        Yields
        ------
        callable or None
            Takes what happens now, in words.
        """
        if self._quiet or not self._stderr.isatty():
            yield None
            return
        from rich.console import Console  # noqa: PLC0415  only on a terminal

        console = Console(file=self._stderr, no_color=not self._coloured)
        with console.status(what, spinner="line") as status:
            yield lambda now: status.update(f"{what}: {now}")

    def flush(self) -> None:
        """Hand over what was printed."""
        self._write(None)

    def _write(self, line: str | None) -> None:
        """Write to stdout; a reader who has left, as `head` does, does not stop the work."""
        if self._stdout is None:
            return
        try:
            if line is not None:
                print(line, file=self._stdout)
            else:
                self._stdout.flush()
        except BrokenPipeError:
            self._stdout = None
            # Nor may the interpreter fail when it flushes at its end.
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())


def aligned(rows: Sequence[Sequence[str]], *, indent: int = 2) -> list[str]:
    """Return one line a row, the columns but the last padded to a common width."""
    count = max((len(row) for row in rows), default=0)
    widths = [
        max((len(row[i]) for row in rows if i < len(row) - 1), default=0) for i in range(count)
    ]
    return [
        " " * indent
        + "  ".join(cell.ljust(w) for cell, w in zip(row, widths, strict=False)).rstrip()
        for row in rows
    ]


def _wants_colour(choice: str, stream: TextIO) -> bool:
    if choice != "auto":
        return choice == "always"
    plain = os.environ.get("NO_COLOR") or os.environ.get("TERM") == "dumb"
    return stream.isatty() and not plain


def _never_refuse_a_character(stream: TextIO) -> None:
    """Escape what the stream's encoding cannot show: no result is lost for it."""
    reconfigure = getattr(stream, "reconfigure", None)
    if reconfigure is not None:
        reconfigure(errors="backslashreplace")
