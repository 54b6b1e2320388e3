"""Runs a command's work on every cell that was asked for."""

from __future__ import annotations

import shlex
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import partial
from pathlib import Path

from behavgen.cell_state import is_current
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.errors import BehavgenError, Fault, ProjectError, ToolError
from behavgen.nearest import did_you_mean
from behavgen.pipeline import CellPlace
from behavgen.project import CellSettings, Project, load_project
from behavgen.regress.spread import CELLS_OF_A_WORKER, spread

__all__ = [
    "CellResult",
    "CellsDone",
    "add_cells_argument",
    "chosen_places",
    "command_line",
    "each_cell",
    "number_of",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class CellResult:
    """What a command has to say of one cell.

    Parameters
    ----------
    lines, more : sequence of str
        Printed always, and only with ``-v``.
    data : mapping
        For ``--json``, plain values only.
    agrees : bool
        False when a check failed.
    warnings : tuple of str
        What ``--strict`` does not let pass.
    """

    lines: Sequence[str]
    more: Sequence[str] = ()
    data: Mapping[str, object] = field(default_factory=dict)
    agrees: bool = True
    warnings: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class CellsDone:
    """The results of the cells that went well, and the errors of the others."""

    results: Mapping[str, CellResult]
    errors: tuple[BehavgenError, ...]

    def outcome(
        self, options: Options, *, done: str, then: str, shows_results: bool = True
    ) -> Outcome:
        """Return how the command ends.

        Parameters
        ----------
        options : Options
        done : str
            What happened to the cells, as in ``"2 cells fitted"``.
        then : str
            The next step when nothing went wrong.
        shows_results : bool
            Whether what was printed calls for the caution.
        """
        total = len(self.results) + len(self.errors)
        share = f"{len(self.results)} of {number_of(total, 'cell')}"
        against = tuple(name for name, result in self.results.items() if not result.agrees)
        return Outcome(
            said=f"{share if self.errors else number_of(total, 'cell')} {done}",
            next_step=_mend(self.errors, options) if self.errors else then,
            data={"cells": {name: dict(result.data) for name, result in self.results.items()}},
            errors=self.errors,
            disagreements=against,
            warnings=tuple(
                f"{name}: {text}" for name, r in self.results.items() for text in r.warnings
            ),
            shows_results=shows_results and bool(self.results),
        )


def add_cells_argument(parser: Parser) -> None:
    """Let a command take cell names."""
    parser.add_argument("cells", nargs="*", metavar="CELL", help="all cells when none is named")


def chosen_places(options: Options) -> list[CellPlace]:
    """Return the cells asked for, in the project's order.

    Raises
    ------
    ProjectError
        When the project file is faulty or has no such cell.
    """
    project = load_project(Path(options.folder))
    names = [cell.name for cell in project.cells]
    faults = [_unknown(name, names, project) for name in options.cells if name not in names]
    if faults:
        raise ProjectError(*faults)
    wanted = set(options.cells or names)
    return [
        CellPlace(project=project, settings=cell) for cell in project.cells if cell.name in wanted
    ]


def each_cell(
    options: Options,
    terminal: Terminal,
    work: Callable[[CellPlace], CellResult],
    *,
    at_once: bool = False,
) -> CellsDone:
    """Do the work on each cell and print its lines; the fault of one does not stop the others.

    Parameters
    ----------
    options, terminal
    work : callable
        Returns what there is to say of a cell.
    at_once : bool
        Work on several cells at a time, where many have no current model; `work` is then
        a function of a module, which other processes can find.
    """
    results: dict[str, CellResult] = {}
    errors: list[BehavgenError] = []
    places = chosen_places(options)
    jobs = _worthwhile_jobs(places, options) if at_once else 1
    tasks = map(_by_itself, places) if jobs > 1 else places
    outcomes = spread(partial(_attempted, work), tasks, jobs=jobs)
    for place, outcome in zip(places, outcomes, strict=True):
        if isinstance(outcome, BehavgenError):
            errors.append(outcome)
            continue
        results[place.name] = outcome
        _print_block(place.settings, outcome, terminal)
    return CellsDone(results=results, errors=tuple(errors))


def _attempted(
    work: Callable[[CellPlace], CellResult], place: CellPlace
) -> CellResult | BehavgenError:
    try:
        return work(place)
    except BehavgenError as error:
        return error


def _worthwhile_jobs(places: Sequence[CellPlace], options: Options) -> int:
    if options.jobs == 1 or len(places) < 2 * CELLS_OF_A_WORKER:
        return 1
    open_cells = sum(not is_current(place) for place in places)
    return min(options.jobs, max(open_cells // CELLS_OF_A_WORKER, 1))


def _by_itself(place: CellPlace) -> CellPlace:
    """Return the place without the project's other cells, to be light on the way."""
    return replace(place, project=replace(place.project, cells=(place.settings,)))


def command_line(options: Options, command: str) -> str:
    """Return the command line that does another command on the same cells."""
    where = ("-C", options.folder) if options.folder != Options.folder else ()
    return shlex.join(("behavgen", *where, command, *options.cells))


def number_of(count: int, what: str) -> str:
    """Write a count with its noun: ``1 cell``, ``2 cells``."""
    return f"{count} {what}" if count == 1 else f"{count} {what}s"


def _print_block(cell: CellSettings, result: CellResult, terminal: Terminal) -> None:
    terminal.say(f"{terminal.paint(cell.name, 'strong')}   {cell.description}".rstrip())
    for line in result.lines:
        terminal.say(line)
    for line in result.more:
        terminal.say_more(line)
    terminal.flush()


def _unknown(name: str, names: Sequence[str], project: Project) -> Fault:
    return Fault(
        file=project.file.name,
        what=f"no cell '{name}'{did_you_mean(name, names)}",
        allowed=f"cells: {', '.join(names)}",
    )


def _mend(errors: Sequence[BehavgenError], options: Options) -> str:
    if all(isinstance(error, ToolError) for error in errors):
        return "behavgen tools"
    return f"mend what stands above, then {command_line(options, options.command)}"
