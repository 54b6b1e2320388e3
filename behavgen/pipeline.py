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
from itertools import count
from pathlib import Path
from typing import TYPE_CHECKING

from behavgen.cell_place import CHECK_FILE, CellPlace
from behavgen.cell_state import (
    STEP_NAMES,
    check_step,
    current_check,
    emit_step,
    fit_step,
    is_of_present_simulator,
    known_codes,
    report_step,
    step_states,
)
from behavgen.check.verdict import CheckReport
from behavgen.check.wishes import Wishes
from behavgen.emit.emitted_file import EmittedFile
from behavgen.errors import Fault, ProjectError, TableError
from behavgen.files import write_whole
from behavgen.model import ComparatorModel
from behavgen.model_file import dump_model, load_model

if TYPE_CHECKING:
    from behavgen.check.languages import LanguageComparison
    from behavgen.check.mutation.summary import MutationSummary
    from behavgen.check.reproduce import Reproduced
    from behavgen.project import CellSettings

__all__ = [
    "STEP_NAMES",
    "CellPlace",
    "CheckedCell",
    "EmittedCell",
    "FittedCell",
    "ReportedCell",
    "check_cell",
    "check_given_file",
    "compare_cell",
    "current_check",
    "decide_again",
    "emit_cell",
    "fit_cell",
    "report_cell",
    "step_states",
]

GIVEN_FOLDER = "given-file"
CHECK_OUTPUTS = (CHECK_FILE, "check/closure.csv", "check/results.xml")

Progress = Callable[[str], None] | None


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
    step = fit_step(place)
    if step.is_current():
        return FittedCell(place=place, model=load_model(place.model_file), made=False)
    from behavgen.fit.fit import fit  # noqa: PLC0415  scipy
    from behavgen.tables.read import read_tables  # noqa: PLC0415  polars

    tables = read_tables(place.project, place.name)
    model = fit(tables, _with_frozen_codes(place, tables.processes))
    if fit_step(place) != step:
        raise _changed_meanwhile(place)
    step.write({place.model_file.name: dump_model(model)})
    return FittedCell(place=place, model=model, made=True)


def emit_cell(fitted: FittedCell) -> EmittedCell:
    """Write the behavioural models, unless they are current."""
    place, model = fitted.place, fitted.model
    step = emit_step(place)
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


def check_cell(
    emitted: EmittedCell, *, jobs: int = 2, wishes: Wishes | None = None, progress: Progress = None
) -> CheckedCell:
    """Simulate the emitted model against the reference, unless the verdict is current.

    Parameters
    ----------
    emitted : EmittedCell
    jobs : int
        Simulations at a time.
    wishes : Wishes, optional
        How it shall differ from the usual check: then it is no step of the cell, leaves its
        results in a folder of its own and is done whenever it is asked for.
    progress : callable, optional
        Told in words what happens now.

    Raises
    ------
    ToolError
        When no simulator is found.
    """
    place = emitted.place
    if wishes is not None and wishes.folder:
        return _check_as_wished(emitted, wishes, jobs=jobs, progress=progress)
    logs = place.check_file.parent
    known = current_check(place)
    if known is not None and is_of_present_simulator(known):
        return CheckedCell(place=place, report=known, logs=logs, made=False)
    from behavgen.check.check import check  # noqa: PLC0415  cocotb

    report = check(
        emitted.model, emitted.systemverilog, folder=place.folder, jobs=jobs, progress=progress
    )
    check_step(place).note(CHECK_OUTPUTS)
    return CheckedCell(place=place, report=report, logs=logs, made=True)


def _check_as_wished(
    emitted: EmittedCell, wishes: Wishes, *, jobs: int, progress: Progress
) -> CheckedCell:
    from behavgen.check.check import check  # noqa: PLC0415  cocotb

    place = emitted.place
    folder = place.folder / wishes.folder
    report = check(
        emitted.model, emitted.systemverilog, folder=folder, jobs=jobs, wishes=wishes,
        progress=progress,
    )  # fmt: skip
    return CheckedCell(place=place, report=report, logs=folder / "check", made=True)


def check_given_file(
    fitted: FittedCell,
    file: Path,
    *,
    jobs: int = 2,
    wishes: Wishes | None = None,
    progress: Progress = None,
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
    report = check(
        fitted.model, given, folder=folder, jobs=jobs, wishes=wishes, progress=progress, given=True
    )
    return CheckedCell(place=place, report=report, logs=folder / "check", made=True)


def decide_again(
    emitted: EmittedCell, file: Path | None, *, run: str, decision: int, waveforms: Path | None
) -> Reproduced:
    """Simulate one decision of a check again, of the emitted text or of a user's file.

    Raises
    ------
    ProjectError
        When there is no such run or decision, or the file cannot be read.
    ToolError
        When no simulator is found.
    """
    from behavgen.check.reproduce import reproduce  # noqa: PLC0415  numpy

    text = emitted.systemverilog.text if file is None else _read_given(file)
    return reproduce(
        emitted.model, text, run=run, decision=decision, given=file is not None,
        waveforms=waveforms,
    )  # fmt: skip


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
    step = report_step(place, with_check=checked is not None)
    if step.is_current():
        return ReportedCell(place=place, made=False)
    from behavgen.check.languages import load_languages  # noqa: PLC0415  simulators
    from behavgen.check.mutation.summary import load_summary  # noqa: PLC0415
    from behavgen.report.page import report_page  # noqa: PLC0415  jinja2

    languages = load_languages(place.folder, emitted.model)
    mutants = load_summary(place.folder, emitted.model)
    step.write({place.report_file.name: report_page(emitted.model, checked, languages, mutants)})
    return ReportedCell(place=place, made=True)


def compare_cell(emitted: EmittedCell, *, progress: Progress = None) -> LanguageComparison:
    """Run all emitted languages side by side on a few decisions, in the simulators there are."""
    from behavgen.check.languages import compare_languages  # noqa: PLC0415  simulators

    return compare_languages(emitted.model, folder=emitted.place.folder, progress=progress)


def mutate_cell(
    emitted: EmittedCell, *, sample: int | None = None, jobs: int = 2, progress: Progress = None
) -> MutationSummary:
    """Try the check on mutants of the emitted SystemVerilog, and keep what came of it.

    Parameters
    ----------
    emitted : EmittedCell
    sample : int or None
        How many, drawn at random; None: all.
    jobs : int
        Simulations at a time.
    progress : callable, optional
        Told in words what happens now.

    Raises
    ------
    ToolError
        When no simulator is found.
    """
    from behavgen.check.mutation.mutation import try_mutants  # noqa: PLC0415  cocotb
    from behavgen.check.mutation.summary import (  # noqa: PLC0415
        MUTANTS_FILE,
        dump_summary,
        summary,
    )

    text = emitted.systemverilog.text
    report = try_mutants(emitted.model, text, sample=sample, jobs=jobs, tell=progress)
    found = summary(emitted.model, text, report)
    folder = emitted.place.check_file.parent
    folder.mkdir(parents=True, exist_ok=True)
    write_whole(folder / MUTANTS_FILE, dump_summary(found))
    return found


def _changed_meanwhile(place: CellPlace) -> TableError:
    what = f"the tables of {place.name} changed while they were read"
    return TableError(Fault(what=what, allowed="run it again once they are written"))


def _with_frozen_codes(place: CellPlace, processes: tuple[str, ...]) -> CellSettings:
    """Let processes keep the codes of the model that is there: others have built on them."""
    if place.settings.process_codes or not processes:
        return place.settings
    known = known_codes(place)
    if not known:
        return place.settings
    fresh = count(1 + max(known.values()))
    codes = {name: known[name] if name in known else next(fresh) for name in processes}
    return replace(place.settings, process_codes=codes)
