"""No command at all: what is there, what is stale, what to do next."""

from __future__ import annotations

from pathlib import Path

from behavgen.cli.cells import chosen_places, command_line, number_of
from behavgen.cli.parser import BARE, Options, build_parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import shown_path
from behavgen.errors import ProjectError
from behavgen.pipeline import STEP_NAMES, CellPlace, current_check, step_states
from behavgen.project import find_project_file
from behavgen.version import program_version

_STYLES = {"current": "good", "stale": "careful", "missing": "quiet", "disagrees": "bad"}


def run(options: Options, terminal: Terminal) -> Outcome:
    """Show the state of the project, or how to begin where there is none."""
    if options.version:
        return _version(terminal)
    if _is_outside(options):
        terminal.say(build_parser(BARE).format_help().rstrip())
        return Outcome(data={"project": None})
    places = chosen_places(options)
    states = {place.name: _states(place) for place in places}
    project = places[0].project
    terminal.say(
        f"{shown_path(project.file)}   {number_of(len(places), 'cell')}, "
        f"results in {shown_path(project.out)}"
    )
    width = max(len(name) for name in states)
    for name, of_cell in states.items():
        terminal.say(f"  {terminal.paint(name.ljust(width), 'strong')}   {_row(of_cell, terminal)}")
    said, step = _next_step(states)
    return Outcome(
        said=said,
        next_step=command_line(options, step) if step else "look at the pages",
        data={
            "project": shown_path(project.file),
            "out": shown_path(project.out),
            "cells": states,
        },
        disagreements=tuple(n for n, of_cell in states.items() if of_cell["check"] == "disagrees"),
    )


def _version(terminal: Terminal) -> Outcome:
    found = program_version()
    terminal.conclude(f"behavgen {found}")
    return Outcome(data={"version": found})


def _is_outside(options: Options) -> bool:
    """Tell whether there is no project here; one asked for by name is expected to be there."""
    if options.folder != Options.folder:
        return False
    try:
        find_project_file(Path(options.folder))
    except ProjectError:
        return True
    return False


def _states(place: CellPlace) -> dict[str, str]:
    states = step_states(place)
    if states["check"] == "current":
        checked = current_check(place)
        if checked is not None and not checked.passed:
            states["check"] = "disagrees"
    return states


def _row(states: dict[str, str], terminal: Terminal) -> str:
    return "   ".join(
        f"{step} {terminal.paint(states[step].ljust(9), _STYLES[states[step]])}"
        for step in STEP_NAMES
    )


def _next_step(states: dict[str, dict[str, str]]) -> tuple[str, str]:
    """Return the verdict and the first step that any cell still needs; empty when none."""
    for step in STEP_NAMES:
        waiting = [name for name, of_cell in states.items() if of_cell[step] != "current"]
        if waiting and step == "check" and {states[n][step] for n in waiting} == {"disagrees"}:
            return f"the check fails for {', '.join(waiting)}", "check"
        if waiting:
            return f"{number_of(len(waiting), 'cell')} to {step}", step
    return "everything is current", ""
