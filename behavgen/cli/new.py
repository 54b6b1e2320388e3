"""The command ``new``: a project file to start from."""

from __future__ import annotations

import shlex
from pathlib import Path

from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import labelled, shown_path
from behavgen.errors import Fault, ProjectError
from behavgen.files import write_whole
from behavgen.project import PROJECT_FILE

ABOUT = """\
Write DIR/behavgen.toml to start from. With --from, quantities, columns and units are
guessed from the headers of your tables, and every guess is marked. Nothing is ever
overwritten."""
ARGUMENTS = "DIR [--from FILE ...]"
EXAMPLE = "behavgen new my_latch --from delay.csv noise.csv"


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    parser.add_argument("target", metavar="DIR", help="made when missing")
    parser.add_argument(
        "--from", dest="tables", nargs="+", metavar="FILE", help="tables to guess from"
    )


def run(options: Options, terminal: Terminal) -> Outcome:
    """Write the project file."""
    from behavgen.tables.starter import starter_project  # noqa: PLC0415  polars

    folder = Path(options.folder, options.target)
    file = folder / PROJECT_FILE
    files = [Path(name) for name in options.tables]
    faults = [_missing(path) for path in files if not path.is_file()]
    if file.exists():
        faults.append(
            Fault(
                file=shown_path(file),
                what="is there already",
                allowed="choose another folder; nothing is overwritten",
            )
        )
    if faults:
        raise ProjectError(*faults)
    text = starter_project(files, folder)
    write_whole(file, text)
    for line in labelled("project", shown_path(file)):
        terminal.say(line)
    where = shlex.join(("behavgen", "-C", shown_path(folder), "tables"))
    return Outcome(
        said="project started",
        next_step=f"read and complete {shown_path(file)}, then {where}",
        data={"project": shown_path(file)},
    )


def _missing(path: Path) -> Fault:
    return Fault(file=str(path), what="no such file", allowed="a table: .csv, .parquet or .xlsx")
