"""One cell's way through the steps fit, emit, check and report, skipping what is current.

    place   = CellPlace(project=project, settings=cell)
    fitted  = fit_cell(place)
    emitted = emit_cell(fitted)
    checked = check_cell(emitted)
    page    = report_cell(emitted, current_check(place))

Every step returns what the next one needs, whether it was made now or read
back from the cell's output folder. The heavy parts are imported by the step
that does the work: a step that is current costs none of them.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from glob import glob, has_magic
from itertools import count
from pathlib import Path
from typing import TYPE_CHECKING

from behavgen.check.verdict import CheckReport, load_report
from behavgen.emit.emitted_file import EmittedFile
from behavgen.errors import Fault, ModelFileError, ProjectError
from behavgen.files import sha256_of_file
from behavgen.freshness import Step, code_version, content_hash
from behavgen.model import ComparatorModel, dump_model, load_model

if TYPE_CHECKING:
    from behavgen.project import CellSettings, Project

__all__ = [
    "STEP_NAMES",
    "CellPlace",
    "CheckedCell",
    "EmittedCell",
    "FittedCell",
    "ReportedCell",
    "check_cell",
    "check_given_file",
    "current_check",
    "emit_cell",
    "fit_cell",
    "report_cell",
    "step_states",
]

STEP_NAMES = ("fit", "emit", "check", "report")
CHECK_FILE = "check/check.json"

GIVEN_FOLDER = "given-file"
CHECK_OUTPUTS = (CHECK_FILE, "check/results.xml")

Progress = Callable[[str], None] | None


@dataclass(frozen=True, slots=True, kw_only=True)
class CellPlace:
    """A cell of a project, and where its results lie."""

    project: Project
    settings: CellSettings

    @property
    def name(self) -> str:
        """The cell's name."""
        return self.settings.name

    @property
    def folder(self) -> Path:
        """The cell's output folder."""
        return self.project.out / self.name

    @property
    def model_file(self) -> Path:
        """The model file."""
        return self.folder / f"{self.name}.model.json"

    @property
    def check_file(self) -> Path:
        """What the check of the emitted model said."""
        return self.folder / CHECK_FILE

    @property
    def report_file(self) -> Path:
        """The report page."""
        return self.folder / "report.html"

    def step(self, name: str, *inputs: object) -> Step:
        """Return a step whose result is determined by `inputs` and the program itself."""
        return Step(
            folder=self.folder, name=name, inputs=content_hash(name, code_version(), *inputs)
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class FittedCell:
    """A cell with its model; `made` tells that it was fitted now."""

    place: CellPlace
    model: ComparatorModel
    made: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class EmittedCell:
    """A cell with its emitted files; `made` tells that they were written now."""

    place: CellPlace
    model: ComparatorModel
    files: tuple[EmittedFile, ...]
    made: bool

    @property
    def systemverilog(self) -> EmittedFile:
        """The SystemVerilog module."""
        return next(file for file in self.files if file.path == f"{self.place.name}.sv")

    @property
    def paths(self) -> tuple[Path, ...]:
        """Where the files lie."""
        return tuple(self.place.folder / file.path for file in self.files)


@dataclass(frozen=True, slots=True, kw_only=True)
class CheckedCell:
    """A cell with the verdict on a model of it; `made` tells that it was simulated now."""

    place: CellPlace
    report: CheckReport
    logs: Path
    made: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class ReportedCell:
    """A cell with its report page; `made` tells that it was written now."""

    place: CellPlace
    made: bool


def fit_cell(place: CellPlace) -> FittedCell:
    """Fit the cell's tables and write the model file, unless it is current.

    Raises
    ------
    TableError
        When a table cannot be used.
    FitError
        When the data cannot identify a model.
    """
    step = _fit_step(place)
    if step.is_current():
        return FittedCell(place=place, model=load_model(place.model_file), made=False)
    from behavgen.fit.fit import fit  # noqa: PLC0415  scipy
    from behavgen.tables.read import read_tables  # noqa: PLC0415  polars

    tables = read_tables(place.project, place.name)
    model = fit(tables, _with_frozen_codes(place, tables.processes))
    step.write({place.model_file.name: dump_model(model)})
    return FittedCell(place=place, model=model, made=True)


def emit_cell(fitted: FittedCell) -> EmittedCell:
    """Write the behavioural models, unless they are current."""
    place, model = fitted.place, fitted.model
    step = _emit_step(place)
    if step.is_current():
        files = tuple(
            EmittedFile(path=name, text=(place.folder / name).read_bytes().decode("utf-8"))
            for name in step.noted_files()
        )
        return EmittedCell(place=place, model=model, files=files, made=False)
    from behavgen.emit.emit import emit  # noqa: PLC0415  jinja2

    files = emit(model)
    step.write({file.path: file.text for file in files})
    return EmittedCell(place=place, model=model, files=files, made=True)


def check_cell(emitted: EmittedCell, *, jobs: int = 2, progress: Progress = None) -> CheckedCell:
    """Simulate the emitted model against the reference, unless the verdict is current.

    Parameters
    ----------
    emitted : EmittedCell
    jobs : int
        Simulations at a time.
    progress : callable, optional
        Told in words what happens now.

    Raises
    ------
    ToolError
        When no simulator is found.
    """
    place = emitted.place
    logs = place.check_file.parent
    known = current_check(place)
    if known is not None:
        return CheckedCell(place=place, report=known, logs=logs, made=False)
    from behavgen.check.check import check  # noqa: PLC0415  cocotb

    report = check(
        emitted.model, emitted.systemverilog, folder=place.folder, jobs=jobs, progress=progress
    )
    _check_step(place).note(CHECK_OUTPUTS)
    return CheckedCell(place=place, report=report, logs=logs, made=True)


def current_check(place: CellPlace) -> CheckReport | None:
    """Return what the last check said, or None when it was not about the present files."""
    return load_report(place.check_file) if _check_step(place).is_current() else None


def check_given_file(
    fitted: FittedCell, file: Path, *, jobs: int = 2, progress: Progress = None
) -> CheckedCell:
    """Simulate a SystemVerilog file of the user's against the reference.

    It leaves its logs in a folder of their own and is no step of the cell: it is
    done again whenever it is asked for.

    Raises
    ------
    ProjectError
        When the file cannot be read.
    ToolError
        When no simulator is found.
    """
    from behavgen.check.check import check  # noqa: PLC0415  cocotb

    place = fitted.place
    folder = place.folder / GIVEN_FOLDER
    given = EmittedFile(path=file.name, text=_read_given(file))
    report = check(fitted.model, given, folder=folder, jobs=jobs, progress=progress)
    return CheckedCell(place=place, report=report, logs=folder / "check", made=True)


def _read_given(file: Path) -> str:
    try:
        return file.read_bytes().decode("utf-8")
    except OSError as error:
        reason = error.strerror or "unreadable"
    except UnicodeDecodeError:
        reason = "not UTF-8 text"
    fault = Fault(file=str(file), what=f"cannot be read: {reason}", allowed="a SystemVerilog file")
    raise ProjectError(fault)


def report_cell(emitted: EmittedCell, checked: CheckReport | None) -> ReportedCell:
    """Write the report page, with what the check said where there is a check."""
    place = emitted.place
    step = _report_step(place, with_check=checked is not None)
    if step.is_current():
        return ReportedCell(place=place, made=False)
    from behavgen.report.page import report_page  # noqa: PLC0415  jinja2

    step.write({place.report_file.name: report_page(emitted.model, checked)})
    return ReportedCell(place=place, made=True)


def step_states(place: CellPlace) -> dict[str, str]:
    """Return for each step whether its result is ``"current"``, ``"stale"`` or ``"missing"``.

    What follows from a stale result is stale.
    """
    with_check = _check_step(place).is_current()
    steps = (_fit_step(place), _emit_step(place), _check_step(place))
    states = [step.state() for step in (*steps, _report_step(place, with_check=with_check))]
    for index, upstream in enumerate(_UPSTREAM):
        if states[index] == "current" and any(states[i] != "current" for i in upstream):
            states[index] = "stale"
    return dict(zip(STEP_NAMES, states, strict=True))


_UPSTREAM = ((), (0,), (0, 1), (0, 1))
"""For each step the steps it follows from; a page is fine without a check."""


def _fit_step(place: CellPlace) -> Step:
    root = place.project.file.parent
    tables = {
        name: sha256_of_file(root / name)
        for table in place.settings.tables
        for name in (table.file, *_matches(root, table.file))
    }
    return place.step("fit", place.settings, place.project.corners, tables)


def _matches(root: Path, pattern: str) -> list[str]:
    """Return the files of a glob; the table reader, which knows more, is slow to import."""
    if not has_magic(pattern):
        return []
    return glob(pattern, root_dir=root, recursive=True)  # noqa: PTH207  absolute ones too


def _emit_step(place: CellPlace) -> Step:
    return place.step("emit", sha256_of_file(place.model_file))


def _check_step(place: CellPlace) -> Step:
    emitted = place.folder / f"{place.name}.sv"
    return place.step("check", sha256_of_file(place.model_file), sha256_of_file(emitted))


def _report_step(place: CellPlace, *, with_check: bool) -> Step:
    checked = sha256_of_file(place.check_file) if with_check else None
    return place.step("report", sha256_of_file(place.model_file), checked)


def _with_frozen_codes(place: CellPlace, processes: tuple[str, ...]) -> CellSettings:
    """Let processes keep the codes of the model that is there: others have built on them."""
    if place.settings.process_codes or not processes:
        return place.settings
    try:
        known = {process.name: process.code for process in load_model(place.model_file).processes}
    except ModelFileError:
        return place.settings
    fresh = count(1 + max(known.values()))
    codes = {name: known[name] if name in known else next(fresh) for name in processes}
    return replace(place.settings, process_codes=codes)
