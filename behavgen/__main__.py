"""python -m behavgen: from a command line to an exit code, letting no exception out."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence

from behavgen.cli.parser import Options, command_module, parse

# Everything else is imported where it is needed: --help needs none of it.

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
    # Even a command line that is not understood is answered in the manner it asks for.
    options = Options(json="--json" in words, verbose="-v" in words or "--verbose" in words)
    try:
        parse(words, options)
        return _run(options)
    except SystemExit as leave:  # argparse, after a help text
        return int(leave.code or 0)
    except (Exception, KeyboardInterrupt) as error:
        return _failed(error, options)


def _run(options: Options) -> int:
    from behavgen.cli.terminal import Terminal  # noqa: PLC0415
    from behavgen.cli.verdict import finish  # noqa: PLC0415

    terminal = Terminal(options)
    return finish(command_module(options.command).run(options, terminal), options, terminal)


def _failed(error: BaseException, options: Options) -> int:
    """Tell what went wrong, in as few lines as that takes."""
    from behavgen.cli.terminal import Terminal  # noqa: PLC0415
    from behavgen.cli.verdict import Outcome, finish  # noqa: PLC0415
    from behavgen.errors import BehavgenError  # noqa: PLC0415

    terminal = Terminal(options)
    if isinstance(error, BehavgenError):
        return finish(Outcome(errors=(error,)), options, terminal)
    if isinstance(error, KeyboardInterrupt):
        terminal.complain("behavgen: interrupted; no file is half-written")
        return INTERRUPTED
    terminal.complain(f"behavgen: this is a bug: {type(error).__name__}: {error}")
    if options.verbose or os.environ.get("BEHAVGEN_DEBUG"):
        from traceback import format_exception  # noqa: PLC0415

        terminal.complain("".join(format_exception(error)).rstrip())
    else:
        terminal.complain("please report it; -v shows where it happened")
    return BUG


if __name__ == "__main__":
    sys.exit(main())
