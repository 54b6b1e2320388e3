"""What each step of a cell follows from, and whether its result still does."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from behavgen.cell_place import CellPlace
from behavgen.check.verdict import CheckReport, load_report
from behavgen.errors import ModelFileError, ToolError
from behavgen.files import files_named, sha256_of_file
from behavgen.freshness import Step, content_hash
from behavgen.model_file import load_model

__all__ = [
    "STEP_NAMES",
    "check_step",
    "current_check",
    "emit_step",
    "fit_step",
    "is_current",
    "is_of_present_simulator",
    "known_codes",
    "known_inputs",
    "report_step",
    "step_states",
]

STEP_NAMES = ("fit", "emit", "check", "report")

_UPSTREAM = ((), (0,), (0, 1), (0, 1))
"""For each step the steps it follows from; a page is fine without a check."""


def current_check(place: CellPlace) -> CheckReport | None:
    """Return what the last check said, or None when it was not about the present files."""
    if not place.check_file.is_file():
        return None
    return load_report(place.check_file) if check_step(place).is_current() else None


def is_of_present_simulator(report: CheckReport) -> bool:
    """Tell whether a check would use the same simulator again; none is as good as the same."""
    from behavgen.simulators.icarus import find_icarus  # noqa: PLC0415  only checks need it

    try:
        return find_icarus().version == report.simulator
    except ToolError:
        return True


def is_current(place: CellPlace, *, with_check: bool = False) -> bool:
    """Tell whether a cell's model needs no work, and, if asked for, its check neither."""
    if not fit_step(place).is_current():
        return False
    if not with_check:
        return True
    known = current_check(place) if emit_step(place).is_current() else None
    return known is not None and is_of_present_simulator(known)


def known_inputs(place: CellPlace) -> str:
    """Return the hash of all that determines a cell's model.

    That is the program with its libraries, the cell's settings, the project's
    corners, the bytes of the tables, and the process codes of the model that is there.
    """
    return content_hash(fit_step(place).inputs, known_codes(place))


def step_states(place: CellPlace) -> dict[str, str]:
    """Return for each step whether its result is ``"current"``, ``"stale"`` or ``"missing"``.

    What follows from a stale result is stale.
    """
    with_check = check_step(place).is_current()
    steps = (fit_step(place), emit_step(place), check_step(place))
    states = [step.state() for step in (*steps, report_step(place, with_check=with_check))]
    for index, upstream in enumerate(_UPSTREAM):
        if states[index] == "current" and any(states[i] != "current" for i in upstream):
            states[index] = "stale"
    return dict(zip(STEP_NAMES, states, strict=True))


def fit_step(place: CellPlace) -> Step:
    """Return the step whose result is the model."""
    root = place.project.file.parent
    tables = [
        (_from(root, file), sha256_of_file(file))
        for table in place.settings.tables
        for file in files_named(root, table.file)
    ]
    settings = replace(place.settings, symbol=None)  # of no influence on the model
    return place.step("fit", settings, place.project.corners, tables)


def _from(root: Path, file: Path) -> str:
    """Write a path so that a project may move."""
    return (file.relative_to(root) if file.is_relative_to(root) else file).as_posix()


def emit_step(place: CellPlace) -> Step:
    """Return the step whose results are the behavioural models."""
    return place.step("emit", sha256_of_file(place.model_file))


def check_step(place: CellPlace) -> Step:
    """Return the step whose result is the verdict on the SystemVerilog model."""
    emitted = place.folder / f"{place.name}.sv"
    return place.step("check", sha256_of_file(place.model_file), sha256_of_file(emitted))


def report_step(place: CellPlace, *, with_check: bool) -> Step:
    """Return the step whose result is the report page."""
    checked = sha256_of_file(place.check_file) if with_check else None
    languages = place.check_file.with_name("languages.json")
    compared = sha256_of_file(languages) if languages.is_file() else None
    mutants = place.check_file.with_name("mutants.json")
    tried = sha256_of_file(mutants) if mutants.is_file() else None
    return place.step("report", sha256_of_file(place.model_file), checked, compared, tried)


def known_codes(place: CellPlace) -> dict[str, int]:
    """Return the process codes of the model that is there; none without a readable one."""
    try:
        return {process.name: process.code for process in load_model(place.model_file).processes}
    except ModelFileError:
        return {}
