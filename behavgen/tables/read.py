"""Project + cell name -> Characterisation: the door to everything about tables.

polars is loaded only when a table is really read.
"""

from __future__ import annotations

from behavgen.errors import Fault, ProjectError
from behavgen.nearest import did_you_mean
from behavgen.project import CellSettings, Project
from behavgen.tables.characterisation import Characterisation

__all__ = ["cell_named", "read_tables"]


def read_tables(project: Project, cell: str) -> Characterisation:
    """Read, judge and convert all tables of one cell.

    Parameters
    ----------
    project : Project
        As `load_project` returns it.
    cell : str
        Name of one of its cells.

    Raises
    ------
    ProjectError
        When the project has no such cell.
    TableError
        With every fault of every table, each with file, row and column.
    """
    settings = cell_named(project, cell)
    from behavgen.tables.reading import read_cell  # noqa: PLC0415  (polars loads slowly)

    return read_cell(project, settings)


def cell_named(project: Project, name: str) -> CellSettings:
    """Return the settings of one cell.

    Raises
    ------
    ProjectError
        When the project has no such cell.
    """
    for settings in project.cells:
        if settings.name == name:
            return settings
    known = [settings.name for settings in project.cells]
    raise ProjectError(
        Fault(
            file=project.file.name,
            what=f"no cell '{name}'{did_you_mean(name, known)}",
            allowed=f"cells: {', '.join(known)}",
        )
    )
