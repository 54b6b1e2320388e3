"""The command ``report``: one page a cell."""

from __future__ import annotations

from behavgen.cli.cells import CellResult, add_cells_argument, command_line, each_cell
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import labelled, shown_path, state_text
from behavgen.pipeline import CellPlace, current_check, emit_cell, fit_cell, report_cell

ABOUT = """\
Write <out>/<cell>/report.html: laws against tables, ranges, intervals and what the last
check said, if there is one. Needs no simulator and no network to look at."""
ARGUMENTS = "[CELL ...]"
EXAMPLE = "behavgen report latch_a"


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)


def run(options: Options, terminal: Terminal) -> Outcome:
    """Write the pages of the cells asked for."""
    done = each_cell(options, terminal, _report, at_once=True)
    unchecked = any(not result.data["checked"] for result in done.results.values())
    then = command_line(options, "check") if unchecked else "look at the page"
    return done.outcome(options, done="reported", then=then)


def _report(place: CellPlace) -> CellResult:
    emitted = emit_cell(fit_cell(place))
    checked = current_check(place)
    page = report_cell(emitted, checked)
    file = shown_path(place.report_file)
    said = f"with the check of {checked.decisions} decisions" if checked else "without a check"
    return CellResult(
        lines=[*labelled("page", file + state_text(made=page.made)), *labelled("", said)],
        data={"page": file, "made": page.made, "checked": checked is not None},
    )
