"""The command ``predict``: numbers to decide with, each with its interval and its basis."""

from __future__ import annotations

import re
from pathlib import Path
from typing import TYPE_CHECKING

from behavgen.cli.caution import CAUTION
from behavgen.cli.cells import (
    CellResult,
    CellsDone,
    add_cells_argument,
    command_line,
    each_cell,
)
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal, aligned
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import labelled
from behavgen.errors import Fault, ProjectError

if TYPE_CHECKING:
    from behavgen.cli.question import Question
    from behavgen.pipeline import CellPlace

ABOUT = """\
Predict from each cell's model how often a decision is wrong by noise, unresolved after
a time, or either; the mean time between unresolved decisions at a clock rate; and the
delay. Every number comes with its interval and with how far it goes beyond the tables.
Without options: the middle and the corners of the characterised range.

Where VALUES stand: one, several as in 1,2,5, or START:STOP:STEP as in 1.1:1.3:0.05 or
1u:1m:x10. They take SI prefixes, and all their combinations are answered."""
ARGUMENTS = "[CELL ...]"
EXAMPLE = """behavgen predict latch_a --input 1m --resolve-time 400p --clock 1G
  behavgen predict latch_a --span 1.0 --clock 1G --vdd 1.1:1.3:0.05 --temp 85 --process ss
  behavgen predict latch_a --levels 1m,2m,5m --weights 1,2,1 --csv -"""

_STDOUT = "-"


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)
    _let_values_be_negative(parser)
    applied = parser.add_argument_group("what is applied (default: 1 mV of overdrive)")
    one = applied.add_mutually_exclusive_group()
    one.add_argument("--input", metavar="VALUES", help="a differential input in V")
    one.add_argument("--overdrive", metavar="VALUES", help="one counted from the trip point")
    one.add_argument("--span", metavar="VALUES", help="uniform over so many V about the trip point")
    one.add_argument("--levels", metavar="V,V,...", help="given inputs, the mean over them")
    applied.add_argument("--weights", metavar="W,W,...", help="how often each level occurs")
    applied.add_argument("--expect", choices=("0", "1"), help="the right bit, if not by the sign")
    when = parser.add_argument_group("when and where")
    when.add_argument("--resolve-time", metavar="VALUES", help="s from the clock edge to use")
    when.add_argument("--clock", metavar="VALUES", help="Hz; half a period is the resolve time")
    when.add_argument("--vdd", metavar="VALUES", help="supply in V (default: middle of its range)")
    when.add_argument("--temp", metavar="VALUES", help="degC (default: middle)")
    when.add_argument("--vcm", metavar="VALUES", help="common mode in V (default: middle)")
    when.add_argument("--process", metavar="NAME,...", help="default: the first")
    when.add_argument("--corners", action="store_true", help="middle and corners of the range")
    when.add_argument(
        "--mismatch", choices=("average", "3-sigma"),
        help="the mean over all instances, or the worst within 3 sigma of mismatch",
    )  # fmt: skip
    how = parser.add_argument_group("how it is told")
    how.add_argument("--confidence", metavar="SHARE", help="of the intervals (default: 0.95)")
    how.add_argument("--csv", metavar="FILE", help="write a table for machines; - for stdout")


def run(options: Options, terminal: Terminal) -> Outcome:
    """Answer for the cells asked for."""
    from behavgen.cli.question import read_question  # noqa: PLC0415  of no use to --help

    question = read_question(options)
    if options.csv == _STDOUT and options.json:
        fault = Fault(what="--csv - beside --json", allowed="one of them on stdout")
        raise ProjectError(fault)
    rows: list[dict[str, object]] = []

    def work(place: CellPlace) -> CellResult:
        return _answer_one(place, question, rows)

    if options.csv == _STDOUT:
        return _to_stdout(each_cell(options, _silent(options), work), rows, terminal)
    done = each_cell(options, terminal, work)
    said = "predicted"
    if options.csv:
        said += f", table in {options.csv}"
        _write(Path(options.csv), rows)
    return done.outcome(options, done=said, then=command_line(options, "report"))


def _answer_one(place: CellPlace, question: Question, rows: list[dict[str, object]]) -> CellResult:
    """Return the answer for one cell and add it to the rows of the table."""
    from behavgen.cli.answer import answer  # noqa: PLC0415
    from behavgen.cli.answer_data import as_data, csv_rows  # noqa: PLC0415
    from behavgen.cli.answer_notices import clamped, uncounted  # noqa: PLC0415
    from behavgen.cli.answer_text import case_rows, extreme_rows  # noqa: PLC0415
    from behavgen.cli.question_text import asked_lines  # noqa: PLC0415
    from behavgen.pipeline import fit_cell  # noqa: PLC0415

    model = fit_cell(place).model
    answers = answer(question, model)
    rows += csv_rows(place.name, answers)
    every = case_rows(answers)
    outside = tuple(clamped([found.outside for found in answers.cases]))
    notices = (*outside, *uncounted(answers.question, model))
    return CellResult(
        lines=[
            *asked_lines(answers.question, [found.case for found in answers.cases]),
            *aligned(extreme_rows(answers) if answers.question.corners else every),
            *(line for notice in notices for line in labelled("look at", notice)),
        ],
        more=aligned(every) if answers.question.corners else (),
        data={**as_data(answers), "notices": list(notices)},
        warnings=() if question.is_open else outside,
    )


def _to_stdout(done: CellsDone, rows: list[dict[str, object]], terminal: Terminal) -> Outcome:
    """Print the table and nothing else; what must be said goes to the diagnostics."""
    from behavgen.cli.answer_data import as_csv  # noqa: PLC0415

    if rows:
        terminal.conclude(as_csv(rows).rstrip("\n"))
        terminal.complain(CAUTION)
    warnings = tuple(
        f"{name}: {text}" for name, result in done.results.items() for text in result.warnings
    )
    return Outcome(errors=done.errors, warnings=warnings)


def _write(file: Path, rows: list[dict[str, object]]) -> None:
    from behavgen.cli.answer_data import as_csv  # noqa: PLC0415
    from behavgen.files import write_whole  # noqa: PLC0415

    write_whole(file, as_csv(rows))


def _silent(options: Options) -> Terminal:
    """Return a terminal that shows no results."""
    quiet = Options(**vars(options))
    quiet.quiet = True
    return Terminal(quiet)


def _let_values_be_negative(parser: Parser) -> None:
    """Let ``--input -1m`` have a value: to argparse alone it looks like an option."""
    parser._negative_number_matcher = re.compile(r"-[.0-9]")
