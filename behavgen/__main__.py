"""python -m behavgen: from a command line to an exit code, letting no exception out."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence

from behavgen.cli.parser import Options, command_module, parse

__all__ = ["main"]

INTERRUPTED = 130
BUG = 70


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command.

    Parameters
    ----------
    arguments : sequence of str, optional
        Without the program's name; those of the process when not given.

    Returns
    -------
    int
        Exit code: that of the error (see `behavgen.errors`), 1 for a disagreement,
        130 when interrupted, 70 for a bug.
    """
    words = list(sys.argv[1:] if arguments is None else arguments)
    # A mistake in the command line is told in the manner that the rest of it asks for.
    options = Options(json="--json" in words, verbose="-v" in words or "--verbose" in words)
    try:
        return _run(words, options)
    except SystemExit as leave:  # argparse, after a help text
        return int(leave.code or 0)
    except KeyboardInterrupt:
        _complain(options, "behavgen: interrupted; no file was left half-written")
        return INTERRUPTED
    except Exception as error:  # noqa: BLE001  whatever it is, a user gets two lines
        return _bug(error, options)


def _run(words: Sequence[str], options: Options) -> int:
    parse(words, options)
    # What follows is not for --help, which must cost nothing.
    from behavgen.cli.terminal import Terminal  # noqa: PLC0415
    from behavgen.cli.verdict import Outcome, finish  # noqa: PLC0415
    from behavgen.errors import BehavgenError  # noqa: PLC0415

    terminal = Terminal(options)
    try:
        outcome = command_module(options.command).run(options, terminal)
    except BehavgenError as error:
        outcome = Outcome(errors=(error,))
    return finish(outcome, options, terminal)


if __name__ == "__main__":
    sys.exit(main())
