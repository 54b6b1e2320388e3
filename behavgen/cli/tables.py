"""The command ``tables``: what was understood of the tables, and where they have gaps."""

from __future__ import annotations

from dataclasses import asdict

from behavgen.cli.cells import CellResult, add_cells_argument, command_line, each_cell
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.pipeline import CellPlace

ABOUT = """\
Read the tables of each cell and show what was understood: rows, conditions, ranges in
physical units, what is absent, and what deserves a look before a fit."""
ARGUMENTS = "[CELL ...]"
EXAMPLE = "behavgen tables latch_a"


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)


def run(options: Options, terminal: Terminal) -> Outcome:
    """Read the tables of the cells asked for."""
    done = each_cell(options, terminal, _read)
    then = command_line(options, "fit")
    return done.outcome(options, done="understood", then=then, shows_results=False)


def _read(place: CellPlace) -> CellResult:
    from behavgen.tables.read import read_tables  # noqa: PLC0415  numpy, polars
    from behavgen.tables.summary import summarise, summary_lines  # noqa: PLC0415

    summary = summarise(read_tables(place.project, place.name))
    _, *lines = summary_lines(summary)  # the first names the cell, as the block's head does
    return CellResult(lines=lines, data=asdict(summary), warnings=summary.notices)
