"""The command ``baseline``: record the present models as what later ones are held against."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from behavgen.cli.cells import (
    CellResult,
    CellsDone,
    add_cells_argument,
    chosen_places,
    command_line,
    number_of,
)
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import shown_path
from behavgen.errors import BehavgenError

ABOUT = """\
Fit what is not current and record every cell's model, with the hashes of its tables, in
the folder `baseline` beside the project file (`baseline` under [project] names another).
The files are sorted text: put them under version control. All cells are recorded or none."""
ARGUMENTS = "[CELL ...]"
EXAMPLE = "behavgen baseline"


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)


def run(options: Options, terminal: Terminal) -> Outcome:
    """Record the cells asked for."""
    from behavgen.regress.baseline import ToRecord, write_baseline  # noqa: PLC0415
    from behavgen.regress.runs import run_cells  # noqa: PLC0415

    places = {place.name: place for place in chosen_places(options)}
    project = next(iter(places.values())).project
    models: dict[str, ToRecord] = {}
    errors: list[BehavgenError] = []
    with terminal.progress("fitting") as progress:
        for done in run_cells(project, [*places], jobs=options.jobs, progress=progress):
            if done.model is None:
                errors += [done.error] if done.error else []
                continue
            tables = {source.file: source.sha256 for source in done.model.sources}
            models[done.name] = ToRecord(file=places[done.name].model_file, tables=tables)
    results = {name: CellResult(lines=(), data={"tables": m.tables}) for name, m in models.items()}
    ended = CellsDone(results=results, errors=tuple(errors))
    if errors:
        return ended.outcome(options, done="fitted, none recorded", then="", shows_results=False)
    others = {cell.name for cell in project.cells} - models.keys()
    changed = write_baseline(project.baseline, models, keep=frozenset(others))
    outcome = ended.outcome(
        options,
        done=_done(changed, project.baseline),
        then=f"put it under version control, then {command_line(options, 'regress')}",
        shows_results=False,
    )
    folder = shown_path(project.baseline)
    return replace(outcome, data={**outcome.data, "changed": list(changed), "folder": folder})


def _done(changed: tuple[str, ...], folder: Path) -> str:
    what = f"{number_of(len(changed), 'record')} changed" if changed else "nothing changed"
    return f"recorded in {shown_path(folder)}, {what}"
