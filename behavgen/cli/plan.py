"""The command ``plan``: what to measure next for wanted intervals."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from pathlib import Path

from behavgen.cli.cells import (
    CellResult,
    CellsDone,
    add_cells_argument,
    command_line,
    each_cell,
)
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.errors import Fault, ProjectError
from behavgen.fit.planning.goals import Goals, Guess
from behavgen.model import Box, Cell, ComparatorModel
from behavgen.model_file import load_model
from behavgen.pipeline import CellPlace, fit_cell
from behavgen.project import PROJECT_FILE, find_project_file
from behavgen.units import UnitError, parse_si

ABOUT = """\
Say which levels, decisions, overdrives, instances and conditions to measure next so
that intervals get as narrow as wanted, and what the present tables pin down already.
Wanted is half the width of a 95 % interval. Where there are no tables yet, plan a first
measurement from rough guesses."""
ARGUMENTS = "[CELL ...] [what is wanted] [guesses]"
EXAMPLE = """behavgen plan latch_a --sigma-within 3% --tau-within 1%
  behavgen plan --guess-sigma 0.5m --guess-spread 6m --sigma-within 5%"""

USUAL = Goals(sigma=0.05, mismatch=0.1, tau=0.01, delay=0.02)
"""Wanted when nothing is said (common practice)."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Asked:
    """An option that takes a number: the field it sets, its SI unit, and what it is.

    `unit` is ``"%"`` for a share; a number below or at 0 is refused unless `signed`.
    """

    option: str
    field: str
    unit: str
    about: str
    signed: bool = False


_WANTED = (
    _Asked(option="--sigma-within", field="sigma", unit="%", about="noise sigma, as in 5%%"),
    _Asked(option="--offset-within", field="offset_v", unit="V", about="trip point, as in 50u"),
    _Asked(option="--mismatch-within", field="mismatch", unit="%",
           about="spread of the offset between instances"),
    _Asked(option="--mean-within", field="mean_v", unit="V",
           about="mean offset of the instances"),
    _Asked(option="--tau-within", field="tau", unit="%", about="tau at every condition"),
    _Asked(option="--delay-within", field="delay", unit="%", about="delay at every overdrive"),
)  # fmt: skip
_GUESSED = (
    _Asked(option="--guess-sigma", field="sigma_v", unit="V", about="noise sigma, as in 0.5m"),
    _Asked(option="--guess-offset", field="offset_v", unit="V",
           about="trip point, as in =-2m", signed=True),
    _Asked(option="--guess-spread", field="spread_v", unit="V",
           about="spread of the offset between instances"),
    _Asked(option="--guess-tau", field="tau_s", unit="s", about="tau, as in 15p"),
    _Asked(option="--guess-delay", field="delay_s", unit="s",
           about="delay at the largest overdrive"),
    _Asked(option="--guess-scatter", field="scatter", unit="%",
           about="scatter of delays around their law"),
    _Asked(option="--lowest-overdrive", field="lowest_v", unit="V",
           about="least overdrive that can be measured"),
    _Asked(option="--highest-overdrive", field="highest_v", unit="V", about="largest overdrive"),
)  # fmt: skip


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)
    parser.add_argument("--model", metavar="FILE", help="plan for this model file")
    for title, group in (
        ("wanted half widths of intervals", _WANTED),
        ("guesses, used where no table tells", _GUESSED),
    ):
        section = parser.add_argument_group(title)
        for asked in group:
            section.add_argument(
                asked.option, dest=_name(asked), metavar=asked.unit, help=asked.about
            )


def run(options: Options, terminal: Terminal) -> Outcome:
    """Plan for the cells asked for, for a model file, or from guesses alone."""
    goals, guess = _understood(options)
    if options.model:
        model = load_model(Path(options.model))
        return _one(model.cell.name, model, goals, guess, options, terminal)
    if _is_outside(options):
        if (goals, guess) == (USUAL, Guess()):
            raise ProjectError(_nothing_to_go_by())
        return _one(_FIRST, _NOTHING_KNOWN, goals, guess, options, terminal)

    def work(place: CellPlace) -> CellResult:
        return planned(fit_cell(place).model, goals, guess)

    done = each_cell(options, terminal, work)
    return _outcome(done, options)


def planned(model: ComparatorModel, goals: Goals, guess: Guess) -> CellResult:
    """Return what there is to measure for a model."""
    from behavgen.cli.plan_words import plan_data, plan_lines  # noqa: PLC0415  numpy, scipy
    from behavgen.fit.planning.plan import plan_cell  # noqa: PLC0415

    plan = plan_cell(model, goals, guess)
    told = plan_lines(plan)
    return CellResult(
        lines=told.lines,
        more=told.more,
        data={**plan_data(plan), "done": plan.is_done},
        warnings=told.warnings,
    )


_FIRST = "first measurement"
_NOTHING_KNOWN = ComparatorModel(cell=Cell(name=""), processes=(), box=Box())


def _nothing_to_go_by() -> Fault:
    return Fault(
        what=f"no {PROJECT_FILE} here or in any folder above, and nothing is wanted or guessed",
        allowed="work in a project, or say what is wanted and guessed, as in: "
        "behavgen plan --sigma-within 5% --guess-sigma 0.5m",
    )


def _one(
    name: str,
    model: ComparatorModel,
    goals: Goals,
    guess: Guess,
    options: Options,
    terminal: Terminal,
) -> Outcome:
    """Plan for something that is no cell of a project."""
    result = planned(model, goals, guess)
    terminal.say(terminal.paint(name, "strong"))
    for line in result.lines:
        terminal.say(line)
    for line in result.more:
        terminal.say_more(line)
    return _outcome(CellsDone(results={name: result}, errors=()), options)


def _outcome(done: CellsDone, options: Options) -> Outcome:
    open_cells = [name for name, result in done.results.items() if not result.data["done"]]
    said = "planned"
    if done.results and not open_cells:
        said = "planned; every interval wanted is reached"
    return done.outcome(options, done=said, then=_next_step(open_cells, options))


def _next_step(open_cells: Sequence[str], options: Options) -> str:
    if open_cells == [_FIRST]:
        return "measure these, then behavgen new DIR --from FILE ..."
    if options.model:
        return "measure these, add their rows to the tables and fit again" if open_cells else ""
    if not open_cells:
        return command_line(options, "report")
    return f"measure these, add their rows to the tables, then {command_line(options, 'plan')}"


def _is_outside(options: Options) -> bool:
    """Tell whether there is no project here; one asked for by name is expected to be there."""
    if options.cells or options.folder != Options.folder:
        return False
    try:
        find_project_file(Path(options.folder))
    except ProjectError:
        return True
    return False


def _understood(options: Options) -> tuple[Goals, Guess]:
    """Return goals and guesses.

    Raises
    ------
    ProjectError
        With every option that is not a number of its kind.
    """
    faults: list[Fault] = []
    wanted = _numbers(_WANTED, options, faults)
    guessed = _numbers(_GUESSED, options, faults)
    if faults:
        raise ProjectError(*faults)
    goals = replace(Goals(), **wanted) if wanted else USUAL
    return goals, replace(Guess(), **guessed)


def _numbers(group: Sequence[_Asked], options: Options, faults: list[Fault]) -> dict[str, float]:
    """Return the numbers given, by field; what is not one is added to the faults."""
    found = {}
    for asked in group:
        text = getattr(options, _name(asked), "")
        if not text:
            continue
        try:
            found[asked.field] = _number(text, asked)
        except UnitError as error:
            faults.append(Fault(column=asked.option, what=str(error)))
    return found


def _number(text: str, asked: _Asked) -> float:
    if asked.unit == "%":
        percent = text.rstrip().endswith("%")
        value = parse_si(text.rstrip().rstrip("%"), "1") / (100.0 if percent else 1.0)
        if not 0.0 < value < 1.0:
            raise UnitError(f"'{text}' is out of range; a share above 0 and below 100%, as in 5%")
        return value
    value = parse_si(text, asked.unit)
    if value <= 0.0 and not asked.signed:
        raise UnitError(f"'{text}' is out of range; a number above 0 in {asked.unit}")
    return value


def _name(asked: _Asked) -> str:
    return asked.option[2:].replace("-", "_")
