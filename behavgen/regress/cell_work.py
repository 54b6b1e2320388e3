"""The work on one cell as a pure task: what goes in, what comes out, wherever it is done.

A worker walks the ordinary steps of the pipeline in a scratch folder that
begins with what the cell's own folder holds, and returns the files that came
of it. So a worker writes nothing of the project's, may be lost at any moment,
and gives the same bytes in this process, in another or on another machine.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from tempfile import TemporaryDirectory

from behavgen.cell_place import CellPlace
from behavgen.cell_state import known_inputs
from behavgen.check.verdict import CheckReport
from behavgen.errors import BehavgenError, Fault, ToolError
from behavgen.files import write_whole
from behavgen.freshness import RECORD_FILE, code_version, content_hash, recorded_steps
from behavgen.model import ComparatorModel
from behavgen.pipeline import check_cell, emit_cell, fit_cell
from behavgen.project import Project

__all__ = ["CellTask", "Products", "put_files", "result_key", "task_of", "work_on"]

SIMULATIONS_AT_A_TIME = 2
"""Of one cell's check, on any machine: the logs depend on it."""


@dataclass(frozen=True, slots=True, kw_only=True)
class CellTask:
    """What a worker is given.

    Parameters
    ----------
    project : Project
        With the cell alone.
    before : mapping of str to bytes
        The files that the cell's steps have noted so far, relative to its folder.
    with_check : bool
        Whether to emit and simulate too.
    program : str
        Version of the code that asks; a worker with other code must refuse.
    """

    project: Project
    before: Mapping[str, bytes]
    with_check: bool
    program: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Products:
    """What a worker returns.

    Parameters
    ----------
    files : mapping of str to bytes
        Everything in the cell's folder, the record of its steps included.
    keys : tuple of str
        What the files may be found under in the cache; none after an error.
    model : ComparatorModel or None
    check : CheckReport or None
    error : BehavgenError or None
        What stopped the work; the files of the steps before it are there.
    """

    files: Mapping[str, bytes]
    keys: tuple[str, ...] = ()
    model: ComparatorModel | None = None
    check: CheckReport | None = None
    error: BehavgenError | None = None


def task_of(place: CellPlace, *, with_check: bool) -> CellTask:
    """Return the task that brings a cell up to date."""
    return CellTask(
        project=replace(place.project, cells=(place.settings,)),
        before=_noted_files(place.folder),
        with_check=with_check,
        program=code_version(),
    )


def result_key(place: CellPlace, *, with_check: bool) -> str:
    """Return the hash of all that determines a cell's files.

    The bytes of its tables, its settings, the codes that its processes have
    already, the program and the libraries it computes with, and the simulator
    if there is to be a check.
    """
    simulator = _simulator_version() if with_check else ""
    return content_hash(known_inputs(place), with_check, simulator)


def work_on(task: CellTask) -> Products:
    """Bring a cell up to date in a scratch folder, and return its files."""
    if task.program != code_version():
        return Products(files={}, error=_other_program())
    with TemporaryDirectory(prefix="behavgen-cell-") as scratch:
        project = replace(task.project, out=Path(scratch))
        place = CellPlace(project=project, settings=project.cells[0])
        for name, content in task.before.items():
            write_whole(place.folder / name, content)
        return _walked(place, with_check=task.with_check)


def put_files(place: CellPlace, files: Mapping[str, bytes]) -> None:
    """Write a worker's files into the cell's folder; its steps are noted last.

    Raises
    ------
    ProjectError
        When they cannot be written.
    """
    for name, content in files.items():
        if name != RECORD_FILE:
            write_whole(place.folder / name, content)
    for step, outputs in recorded_steps(files.get(RECORD_FILE, b""), place.folder):
        step.note(outputs)


def _walked(place: CellPlace, *, with_check: bool) -> Products:
    keys = [result_key(place, with_check=with_check)]
    model, check, error = None, None, None
    try:
        fitted = fit_cell(place)
        model = fitted.model
        if with_check:
            emitted = emit_cell(fitted)
            check = check_cell(emitted, jobs=SIMULATIONS_AT_A_TIME).report
        # Once fitted, the processes have their codes: the next look must find the files too.
        keys.append(result_key(place, with_check=with_check))
    except BehavgenError as stopped:
        error, keys = stopped, []
    return Products(
        files=_all_files(place.folder), keys=tuple(dict.fromkeys(keys)), model=model, check=check,
        error=error,
    )  # fmt: skip


def _noted_files(folder: Path) -> dict[str, bytes]:
    """Return the files that the steps so far have noted, and the note itself."""
    record = _bytes_of(folder / RECORD_FILE)
    names = [name for _, outputs in recorded_steps(record or b"", folder) for name in outputs]
    found = {name: _bytes_of(folder / name) for name in (*names, RECORD_FILE)}
    return {name: content for name, content in found.items() if content is not None}


def _all_files(folder: Path) -> dict[str, bytes]:
    return {
        file.relative_to(folder).as_posix(): file.read_bytes()
        for file in sorted(folder.rglob("*"))
        if file.is_file()
    }


def _bytes_of(file: Path) -> bytes | None:
    try:
        return file.read_bytes()
    except OSError:
        return None


def _simulator_version() -> str:
    from behavgen.simulators.icarus import find_icarus  # noqa: PLC0415  only checks need it

    try:
        return find_icarus().version
    except ToolError:
        return ""


def _other_program() -> ToolError:
    fault = Fault(
        what="a worker runs another version of behavgen, or with other libraries",
        allowed="install the same on all workers and restart them",
    )
    return ToolError(fault)
