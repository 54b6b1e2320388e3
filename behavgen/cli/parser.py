"""What the command line understands.

A command is a module of this package with ``ABOUT``, ``ARGUMENTS``, ``EXAMPLE``,
``add_arguments`` and ``run``. Only the module of the command asked for is
imported, and its parser built from its own options and those all commands share.
"""

from __future__ import annotations

import argparse
import os
from collections.abc import Iterable, Sequence
from importlib import import_module
from types import ModuleType

TYPE_CHECKING = False  # that of `typing` would cost an import of 4 ms
if TYPE_CHECKING:
    from typing import NoReturn

__all__ = ["BARE", "COMMANDS", "Options", "Parser", "build_parser", "command_module", "parse"]

COMMANDS = {
    "demo": "walk the whole path on an invented project",
    "new": "start a project",
    "tables": "show what was understood of the tables, and their gaps",
    "fit": "fit a model to the tables",
    "emit": "write the behavioural models",
    "check": "simulate the models against their reference",
    "report": "write the report page",
    "predict": "predict error rates, waits and delays to decide with",
    "plan": "say what to measure next",
    "baseline": "record the present models",
    "regress": "hold all cells against the baseline and the limits",
    "compare": "say what changed between two model files",
    "pack": "write the package that others verify with",
    "tools": "list simulators and compilers, found and missing",
    "completion": "print a script that completes commands in a shell",
}
"""In the order in which one meets them."""

BARE = "overview"
"""What runs when no command is given."""

_TAKE_A_VALUE = frozenset({"-C", "--jobs", "--color"})
_BEGIN = """\
A command works on all cells of the project unless cells are named, does the steps
it needs first, and leaves alone what is current.

to begin:
  behavgen demo                        look at it with invented numbers
  behavgen new mine --from delay.csv   start from a table of yours
"""


class Options(argparse.Namespace):
    """A parsed command line; what was not given has the value below."""

    command: str = BARE
    folder: str = "."
    json: bool = False
    quiet: bool = False
    verbose: bool = False
    strict: bool = False
    color: str = "auto"
    jobs: int = os.cpu_count() or 1
    version: bool = False
    cells: Sequence[str] = ()
    out: str = "behavgen-demo"
    target: str = ""
    tables: Sequence[str] = ()
    model: str = ""
    shell: str = ""
    input: str = ""
    overdrive: str = ""
    span: str = ""
    levels: str = ""
    weights: str = ""
    expect: str = ""
    resolve_time: str = ""
    clock: str = ""
    vdd: str = ""
    temp: str = ""
    vcm: str = ""
    process: str = ""
    corners: bool = False
    mismatch: str = ""
    confidence: str = ""
    csv: str = ""
    check: bool = False
    languages: bool = False
    mutants: int | None = None
    simulator: str = "icarus"
    run: str = ""
    decision: int | None = None
    waveforms: str = ""
    only: Sequence[str] | None = None
    fresh_seeds: int | None = None
    since: str = ""
    trends: bool = False
    keep_runs: str = ""
    scheduler: str = ""
    old: str = ""
    new: str = ""
    unchecked: bool = False
    disclose: bool = False
    ipxact: str = "2022"


class Parser(argparse.ArgumentParser):
    """Raises what it has to complain about, instead of printing it and exiting."""

    def error(self, message: str) -> NoReturn:
        """Raise a usage error."""
        _refuse(message, see=self.prog)


def parse(words: Sequence[str], options: Options) -> None:
    """Read the command line into `options`; a call for help prints it and exits.

    Raises
    ------
    ProjectError
        When it is not understood; near misses are suggested.
    """
    command, others = _take_command(words)
    if command is not None and command not in COMMANDS:
        _refuse(f"no command '{command}'", command, COMMANDS)
    options.command = command or BARE
    parser = build_parser(options.command)
    _, unknown = parser.parse_known_intermixed_args(others, options)
    if unknown:
        word, _, _ = unknown[0].partition("=")
        what = "option" if word.startswith("-") else "argument"
        known = [name for action in parser._actions for name in action.option_strings]
        _refuse(f"{parser.prog} has no {what} '{word}'", word, known, see=parser.prog)


def command_module(command: str) -> ModuleType:
    """Import the module of a command."""
    return import_module(f"behavgen.cli.{command}")


def build_parser(command: str) -> Parser:
    """Return the parser of one command, or of the bare program."""
    if command == BARE:
        parser = _parser("behavgen", "[COMMAND] [CELL ...]", _list_of_commands(), _BEGIN)
        _add_common_options(parser)
        parser.add_argument("--version", action="store_true", help="print the version")
        return parser
    module = command_module(command)
    example = f"example:\n  {module.EXAMPLE}"
    parser = _parser(f"behavgen {command}", module.ARGUMENTS, module.ABOUT, example)
    module.add_arguments(parser)
    _add_common_options(parser)
    return parser


def _parser(prog: str, arguments: str, about: str, epilog: str) -> Parser:
    return Parser(
        prog=prog,
        usage=f"{prog} [options] {arguments}".rstrip(),
        description=about,
        epilog=epilog,
        add_help=False,
        allow_abbrev=False,
        argument_default=argparse.SUPPRESS,
        # A fixed width: asking the terminal costs more than all the rest of --help.
        formatter_class=lambda prog: argparse.RawDescriptionHelpFormatter(prog, width=88),
    )


def _add_common_options(parser: Parser) -> None:
    add = parser.add_argument
    add("-C", dest="folder", metavar="DIR", help="work on the project in DIR or above it")
    add("--json", action="store_true", help="print one JSON object instead of text")
    loudness = parser.add_mutually_exclusive_group()
    loudness.add_argument(
        "-q", "--quiet", action="store_true", help="print nothing but the verdict"
    )
    loudness.add_argument("-v", "--verbose", action="store_true", help="print more detail")
    add("--strict", action="store_true", help="let warnings fail the command")
    add("--jobs", type=_at_least_one, metavar="N", help="cells or simulations at a time")
    add("--color", choices=("auto", "always", "never"), help="when to use colour")
    add("-h", "--help", action="help", help="show this help")


def _take_command(words: Sequence[str]) -> tuple[str | None, list[str]]:
    """Return the first word that is neither an option nor an option's value, and the others."""
    is_value = False
    for index, word in enumerate(words):
        if not is_value and not word.startswith("-"):
            return word, [*words[:index], *words[index + 1 :]]
        is_value = word in _TAKE_A_VALUE and not is_value
    return None, list(words)


def _list_of_commands() -> str:
    lines = [f"  {name:<12}{summary}" for name, summary in COMMANDS.items()]
    return "\n".join(
        ["From characterisation tables of clocked comparators to checked behavioural models.",
         "", "commands:", *lines]
    )  # fmt: skip


def _at_least_one(text: str) -> int:
    if not (text.isdecimal() and int(text) > 0):
        raise argparse.ArgumentTypeError(f"'{text}', a whole number from 1 is needed")
    return int(text)


def _refuse(
    what: str, word: str = "", known: Iterable[str] = (), see: str = "behavgen"
) -> NoReturn:
    from behavgen.errors import Fault, ProjectError  # noqa: PLC0415  --help needs none of it
    from behavgen.nearest import did_you_mean  # noqa: PLC0415

    raise ProjectError(Fault(what=what + did_you_mean(word, known), allowed=f"see: {see} --help"))
