"""Brings many cells up to date: as few as possible anew, as many at a time as there are workers.

    for run in run_cells(project, jobs=4):
        ...                     # one cell after the other, in the project's order

What a cell needs is found in three places, the cheapest first: its output
folder, where it is current; the cache, where the same inputs were seen before;
a worker. Each result is written as soon as it is there and handed on without
being kept, so that a run that is killed goes on where it stopped, and memory
grows with the largest cell and not with their number.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from time import monotonic

from behavgen.cell_place import CellPlace
from behavgen.cell_state import current_check, is_current
from behavgen.check.verdict import CheckReport
from behavgen.errors import BehavgenError, Fault, ModelFileError, ProjectError, ToolError
from behavgen.model import ComparatorModel
from behavgen.model_file import load_model
from behavgen.project import Project
from behavgen.regress.cache import ResultCache
from behavgen.regress.cell_work import Products, put_files, result_key, task_of, work_on
from behavgen.regress.progress import progress_text
from behavgen.regress.spread import CELLS_OF_A_WORKER, spread

__all__ = ["CACHE_FOLDER", "CellRun", "run_cells"]

CACHE_FOLDER = ".cache"
"""Under the project's output folder; it may be deleted at any time."""

KEPT_UNUSED_S = 60 * 86400.0
"""How long the cache keeps what nobody asks for: two months."""


@dataclass(frozen=True, slots=True, kw_only=True)
class CellRun:
    """One cell brought up to date, or why it could not be.

    Parameters
    ----------
    name : str
    model : ComparatorModel or None
        None when the tables or the fit refused.
    fresh : bool
        Whether it was worked on now; False when everything was current or cached.
    error : BehavgenError or None
        What stopped it. A cell whose check alone could not be made still has its model.
    check : CheckReport or None
        The verdict on the present emitted text, where there is one.
    """

    name: str
    model: ComparatorModel | None
    fresh: bool
    error: BehavgenError | None = None
    check: CheckReport | None = None

    @property
    def faults(self) -> tuple[Fault, ...]:
        """Everything that was wrong with the cell's inputs or tools."""
        return self.error.faults if self.error else ()


def run_cells(
    project: Project,
    names: Sequence[str] = (),
    *,
    jobs: int = 1,
    with_check: bool = False,
    scheduler: str = "",
    progress: Callable[[str], None] | None = None,
) -> Iterator[CellRun]:
    """Fit the cells whose tables, settings or program have changed, and yield all of them.

    Parameters
    ----------
    project : Project
    names : sequence of str
        Cells; all of them when none is named.
    jobs : int
        Cells worked on at the same time by processes of this machine. With more
        than one, a script that calls this guards its main part by ``__name__``.
    with_check : bool
        Also emit and simulate each cell.
    scheduler : str
        Address of a Dask scheduler whose workers do the work instead; they see the
        tables under the same paths. What comes out is the same to the byte.
    progress : callable or None
        Told in words how far it is and how long it will take.

    Yields
    ------
    CellRun
        In the project's order. The error of one cell does not stop the others.

    Raises
    ------
    ToolError
        When the scheduler cannot be reached.
    """
    cache = ResultCache(folder=project.out / CACHE_FOLDER)
    places = _places(project, names)
    waiting = deque(p for p in places if not _is_known(p, cache, with_check=with_check))
    total, begin = len(waiting), monotonic()
    tasks = (task_of(place, with_check=with_check) for place in [*waiting])
    share = 1 if with_check else CELLS_OF_A_WORKER
    results = spread(
        work_on, tasks, jobs=max(min(jobs, total // share), 1), scheduler=scheduler if total else ""
    )
    for place in places:
        if not waiting or place is not waiting[0]:
            yield _known_run(place)
            continue
        run = _taken_in(place, next(results), cache)
        waiting.popleft()
        if progress:
            progress(progress_text(total - len(waiting), total, monotonic() - begin))
        yield run
    if total:
        cache.prune(KEPT_UNUSED_S)


def _places(project: Project, names: Sequence[str]) -> list[CellPlace]:
    wanted = set(names) or {cell.name for cell in project.cells}
    return [
        CellPlace(project=project, settings=cell) for cell in project.cells if cell.name in wanted
    ]


def _is_known(place: CellPlace, cache: ResultCache, *, with_check: bool) -> bool:
    """Tell whether nothing is to be done, if need be after a look into the cache."""
    if is_current(place, with_check=with_check):
        return True
    files = cache.get(result_key(place, with_check=with_check))
    if files is None:
        return False
    put_files(place, files)
    return is_current(place, with_check=with_check)


def _known_run(place: CellPlace) -> CellRun:
    """Read back a cell that is current."""
    try:
        model, check = load_model(place.model_file), current_check(place)
    except ModelFileError as error:  # somebody else is at work in the folder
        return CellRun(name=place.name, model=None, fresh=False, error=error)
    return CellRun(name=place.name, model=model, fresh=False, check=check)


def _taken_in(place: CellPlace, result: Products | ToolError, cache: ResultCache) -> CellRun:
    """Write what a worker made to its place and into the cache."""
    if isinstance(result, ToolError):
        return CellRun(name=place.name, model=None, fresh=False, error=result)
    try:
        put_files(place, result.files)
        for key in result.keys:
            cache.put(key, result.files)
    except ProjectError as error:
        return CellRun(name=place.name, model=result.model, fresh=True, error=error)
    return CellRun(
        name=place.name, model=result.model, fresh=True, error=result.error, check=result.check
    )
