"""Holds cells that are up to date against the baseline and the limits.

    regression = Regression.of(project)
    for run in run_cells(project, names, jobs=4):
        verdict = regression.judge(run)

A verdict is kept beside the cell's other results and read back while nothing that it
follows from has changed: then no model is compared, and nothing heavy is imported.
"""

from __future__ import annotations

import json
import os
from collections.abc import Mapping
from dataclasses import asdict, dataclass, replace
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

from behavgen.errors import BehavgenError, Fault, ProjectError
from behavgen.files import sha256_of_file
from behavgen.limits import drift_limits_of, limits_of
from behavgen.model import ComparatorModel, Source
from behavgen.pipeline import CellPlace
from behavgen.project import CellSettings, Project
from behavgen.provenance import mixed_provenance
from behavgen.regress.baseline import has_baseline, read_baseline, recorded_models
from behavgen.regress.comparison import FALSE_ALARMS, Comparison
from behavgen.regress.runs import CellRun
from behavgen.regress.verdict import CellVerdict, LimitVerdict

if TYPE_CHECKING:
    from pydantic import TypeAdapter

    from behavgen.freshness import Step

__all__ = ["VERDICT_FILE", "Regression"]

VERDICT_FILE = "verdict.json"
"""In each cell's output folder."""

_NOT_RECORDED = "not in the baseline; record it with: behavgen baseline"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Judged:
    """What is kept of a verdict; `CellVerdict` has the words."""

    comparison: Comparison | None
    limits: tuple[LimitVerdict, ...]
    sources: tuple[Source, ...]
    notices: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Regression:
    """A project with what its cells are held against.

    Parameters
    ----------
    project : Project
    recorded : mapping
        Cells of the baseline to the hash of their model; none where nothing was recorded.
    """

    project: Project
    recorded: Mapping[str, str]

    @classmethod
    def of(cls, project: Project) -> Regression:
        """Return the regression of a project.

        Raises
        ------
        ProjectError
            When there is neither a baseline nor any limit: nothing could be judged.
        ModelFileError
            When the baseline's index cannot be read.
        """
        if has_baseline(project.baseline):
            return cls(project=project, recorded=recorded_models(project.baseline))
        if not project.limits:
            fault = Fault(
                file=str(project.baseline),
                what="no baseline and no limits in the project file: nothing to judge by",
                allowed="record the present models with: behavgen baseline",
            )
            raise ProjectError(fault)
        return cls(project=project, recorded={})

    @property
    def gone(self) -> tuple[str, ...]:
        """Cells of the baseline that the project has no more, sorted."""
        return tuple(sorted(self.recorded.keys() - {cell.name for cell in self.project.cells}))

    def judge(self, run: CellRun) -> CellVerdict:
        """Return the verdict on one cell; its errors are part of it."""
        settings = next(cell for cell in self.project.cells if cell.name == run.name)
        bare = CellVerdict(
            name=run.name,
            description=settings.description,
            line=_line_of(settings),
            error=run.error,
            check=run.check,
            has_model=run.model is not None,
        )
        if run.model is None:
            return bare
        try:
            judged = self._judged(CellPlace(project=self.project, settings=settings), run.model)
        except BehavgenError as error:
            return replace(bare, error=self._of_the_project(_joined(run.error, error)))
        return replace(
            bare,
            comparison=judged.comparison,
            limits=judged.limits,
            sources=judged.sources,
            notices=judged.notices,
        )

    def _of_the_project(self, error: BehavgenError) -> BehavgenError:
        """Return an error whose files are told from the project's folder, as tables are."""

        def told(fault: Fault) -> Fault:
            if not Path(fault.file).is_absolute():
                return fault
            file = os.path.relpath(fault.file, self.project.file.parent)
            return replace(fault, file=Path(file).as_posix())

        return type(error)(*map(told, error.faults))

    def _judged(self, place: CellPlace, model: ComparatorModel) -> _Judged:
        step = self._step(place)
        if step.is_current():
            text = (place.folder / VERDICT_FILE).read_text(encoding="utf-8")
            return _reader().validate_json(text)
        from behavgen.regress.limit_verdicts import limit_verdicts  # noqa: PLC0415  scipy

        comparison = self._comparison(place.name, model)
        judged = _Judged(
            comparison=comparison,
            limits=limit_verdicts(model, limits_of(place.name, self.project.limits)),
            sources=model.sources,
            notices=() if comparison else tuple(self._unrecorded(model)),
        )
        step.write({VERDICT_FILE: json.dumps(asdict(judged), indent=1, sort_keys=True) + "\n"})
        return judged

    def _step(self, place: CellPlace) -> Step:
        """Return the step whose result is the verdict."""
        recorded = self.project.baseline / f"{place.name}.model.json"
        return place.step(
            "verdict",
            sha256_of_file(place.model_file),
            self.recorded.get(place.name),
            sha256_of_file(recorded) if place.name in self.recorded else None,
            bool(self.recorded),
            limits_of(place.name, self.project.limits),
            drift_limits_of(place.name, self.project.drift_limits),
            len(self.project.cells),
        )

    def _comparison(self, name: str, model: ComparatorModel) -> Comparison | None:
        from behavgen.regress.compare import compare  # noqa: PLC0415  scipy

        old = read_baseline(self.project.baseline, name) if name in self.recorded else None
        if old is None:
            return None
        allowed = drift_limits_of(name, self.project.drift_limits)
        # Each cell has its share, however many of them a run is asked for.
        share = FALSE_ALARMS / len(self.project.cells)
        settings = limits_of(name, self.project.limits)
        found = compare(old, model, allowed, settings=settings, false_alarms=share)
        # A run of many cells keeps of each what has moved.
        return replace(found, quantities=tuple(q.telling for q in found.quantities))

    def _unrecorded(self, model: ComparatorModel) -> list[str]:
        """Return what is to be said of a cell that is not compared."""
        mixed = mixed_provenance((source.file, source.provenance) for source in model.sources)
        return [*mixed, *([_NOT_RECORDED] if self.recorded else [])]


@cache
def _reader() -> TypeAdapter[_Judged]:
    """Return what reads verdicts; slow to make."""
    from pydantic import TypeAdapter  # noqa: PLC0415  heavy, and only here

    return TypeAdapter(_Judged)


def _line_of(cell: CellSettings) -> int:
    return min((table.line for table in cell.tables if table.line), default=0)


def _joined(first: BehavgenError | None, second: BehavgenError) -> BehavgenError:
    return second if first is None else type(first)(*first.faults, *second.faults)
