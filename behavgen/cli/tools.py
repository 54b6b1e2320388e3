"""The command ``tools``: simulators and compilers, found and missing."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import asdict
from typing import TYPE_CHECKING

from behavgen.cli.cells import number_of
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal, aligned
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import labelled
from behavgen.errors import Fault, ToolError

if TYPE_CHECKING:
    from behavgen.simulators.tools import Tool

ABOUT = """\
List the simulators and compilers that commands use, with their versions, and how to get
those that are missing. Exit code 4 means that a needed one is."""
ARGUMENTS = ""
EXAMPLE = "behavgen tools"


def add_arguments(parser: Parser) -> None:
    """Take nothing beyond what all commands take."""


def run(options: Options, terminal: Terminal) -> Outcome:  # noqa: ARG001  as all commands
    """Look for every tool."""
    from behavgen.simulators.tools import list_tools  # noqa: PLC0415  slow to import

    tools = list_tools()
    for tool, line in zip(tools, aligned([_row(tool) for tool in tools]), strict=True):
        terminal.say(line if tool.found else terminal.paint(line, "careful"))
        if not tool.found:
            for detail in [*labelled("", tool.problem), *labelled("get it", tool.how_to_get)]:
                terminal.say(detail)
    return _outcome(tools)


def _row(tool: Tool) -> tuple[str, str, str]:
    version = tool.version.removeprefix(tool.name).strip() if tool.found else "missing"
    return tool.name, version, f"{'needed' if tool.needed else 'optional'}: {tool.purpose}"


def _outcome(tools: Sequence[Tool]) -> Outcome:
    missing = [tool for tool in tools if tool.needed and not tool.found]
    found = sum(tool.found for tool in tools)
    return Outcome(
        said=f"{number_of(len(missing), 'needed tool')} missing"
        if missing
        else f"all that is needed is here; {found} of {number_of(len(tools), 'tool')} found",
        next_step="install what is needed, then behavgen check" if missing else "behavgen check",
        data={"tools": [{**asdict(tool), "found": tool.found} for tool in tools]},
        errors=tuple(ToolError(Fault(what=t.problem, allowed=t.how_to_get)) for t in missing),
    )
