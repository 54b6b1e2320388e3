"""The command ``emit``: the behavioural models of each cell."""

from __future__ import annotations

from pathlib import Path

from behavgen.cli.cells import CellResult, add_cells_argument, command_line, each_cell
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal, aligned
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import shown_path, state_text
from behavgen.pipeline import CellPlace, EmittedCell, emit_cell, fit_cell

ABOUT = """\
Write the behavioural models of each cell under <out>/<cell>/: SystemVerilog with real
or nettype ports and Verilog-A. Cells whose model is not current are fitted first."""
ARGUMENTS = "[CELL ...]"
EXAMPLE = "behavgen emit latch_a"

_LANGUAGES = {
    "_event.va": "Verilog-A, event-driven",
    ".va": "Verilog-A, continuous",
    "_nettype.sv": "SystemVerilog, user-defined nettype",
    ".sv": "SystemVerilog, real ports",
}
"""What a file is, by how its name ends after the cell's."""


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)


def run(options: Options, terminal: Terminal) -> Outcome:
    """Emit the cells asked for."""
    done = each_cell(options, terminal, _emit, at_once=True)
    return done.outcome(options, done="emitted", then=command_line(options, "check"))


def _emit(place: CellPlace) -> CellResult:
    return emit_result(emit_cell(fit_cell(place)))


def emit_result(emitted: EmittedCell) -> CellResult:
    """Return what there is to say of an emitted cell."""
    state = state_text(made=emitted.made)
    rows = [(shown_path(path), _language(path) + state) for path in emitted.paths]
    return CellResult(
        lines=aligned(rows),
        data={"files": [shown for shown, _ in rows], "made": emitted.made},
    )


def _language(path: Path) -> str:
    return next(words for ending, words in _LANGUAGES.items() if path.name.endswith(ending))
