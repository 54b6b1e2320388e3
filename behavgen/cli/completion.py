"""The command ``completion``: a script that lets a shell complete commands and options."""

from __future__ import annotations

from behavgen.cli.parser import BARE, COMMANDS, Options, Parser, build_parser, command_module
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.errors import Fault, ToolError

ABOUT = """\
Print a script that lets a shell complete commands and options. Needs the Python
package shtab."""
ARGUMENTS = "{bash,zsh}"
EXAMPLE = "behavgen completion bash > ~/.local/share/bash-completion/completions/behavgen"


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    parser.add_argument("shell", choices=("bash", "zsh"), help="the shell to write for")


def run(options: Options, terminal: Terminal) -> Outcome:
    """Print the script."""
    try:
        import shtab  # noqa: PLC0415  needed here only, and not by everybody
    except ImportError:
        fault = Fault(
            what="the Python package shtab is not installed",
            allowed="install it with: python -m pip install shtab",
        )
        raise ToolError(fault) from None
    script = shtab.complete(_whole_parser(), shell=options.shell)
    terminal.say(script)
    return Outcome(data={"script": script})


def _whole_parser() -> Parser:
    """Return one parser that holds all commands, which is what shtab reads."""
    parser = build_parser(BARE)
    subparsers = parser.add_subparsers()
    for name, summary in COMMANDS.items():
        command = subparsers.add_parser(name, help=summary, add_help=False)
        command_module(name).add_arguments(command)
    return parser
