"""behavgen.toml -> Project.

The file is found and parsed here; `project_reading` turns what it says into the
frozen values below, by the shapes in `project_schema` and the rules in
`project_rules`. All faults are reported at once, each with its key and line.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from behavgen.errors import Fault, ProjectError
from behavgen.limits import DriftLimit, Limit
from behavgen.provenance import NOT_SAID, Provenance

__all__ = [
    "FAILED_TOKENS",
    "PROJECT_FILE",
    "CellSettings",
    "Corner",
    "Project",
    "SymbolSettings",
    "TableSettings",
    "find_project_file",
    "load_project",
]

PROJECT_FILE = "behavgen.toml"

FAILED_TOKENS = ("failed",)
"""What marks a failed run where the project does not say: the word circuit simulators print."""


@dataclass(frozen=True, slots=True, kw_only=True)
class TableSettings:
    """One ``[[cells.NAME.tables]]`` entry, defaults already applied.

    Parameters
    ----------
    quantity, file : str
        Quantity, and path or glob relative to the project file.
    columns : mapping
        Our column names to the file's headers.
    units : mapping
        Units of columns whose header carries none.
    where : mapping
        Headers to the values whose rows are kept.
    at : mapping
        Column names to values that hold for the whole file, as written.
    failed : tuple of str
        Cells that mark a failed run.
    measured : str
        The user's words on how it was measured.
    default_columns, default_at : frozenset of str
        Names whose entry comes from ``[defaults]``: a file need not have them.
    provenance : Provenance
        The user's words on where it comes from.
    line : int
        Line of the entry in the project file, 0 when unknown.
    """

    quantity: str
    file: str
    columns: Mapping[str, str]
    units: Mapping[str, str]
    where: Mapping[str, tuple[str | float, ...]]
    at: Mapping[str, str | float]
    failed: tuple[str, ...]
    measured: str
    default_columns: frozenset[str] = frozenset()
    default_at: frozenset[str] = frozenset()
    provenance: Provenance = NOT_SAID
    line: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class Corner:
    """A named set of conditions, as used in a ``corner`` column; None: not fixed."""

    name: str
    process: str | None
    temperature_k: float | None
    vdd_v: float | None
    vcm_v: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class SymbolSettings:
    """The cell's schematic symbol, whose pins the hand-off's wrapper has.

    Parameters
    ----------
    name : str
        Of the wrapper's module.
    pins : tuple of (str, str)
        Name and role, in the symbol's order; roles as in `project_symbol.SYMBOL_ROLES`.
    supply_v : float or None
        Behind a logic 1 of the supply, V; None: the middle of the characterised range.
    """

    name: str
    pins: tuple[tuple[str, str], ...]
    supply_v: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class CellSettings:
    """One cell as the user describes it; SI units."""

    name: str
    description: str
    decides_on: str
    in_reset: str
    when_unresolved: str
    process_codes: Mapping[str, int]
    reset_delay_s: float | None
    supply_off_v: float | None
    time_precision: str
    pins: Mapping[str, str | None]
    tables: tuple[TableSettings, ...]
    symbol: SymbolSettings | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Project:
    """A project file, read and judged.

    Parameters
    ----------
    file, out : Path
        The project file, and where results go.
    cells : tuple of CellSettings
    corners : tuple of Corner
    baseline : Path
        The folder of the recorded models.
    limits : tuple of Limit
    drift_limits : tuple of DriftLimit
    vendor : str
        Whose name stands in IP-XACT descriptions, such as a domain.
    """

    file: Path
    out: Path
    baseline: Path
    cells: tuple[CellSettings, ...]
    corners: tuple[Corner, ...]
    limits: tuple[Limit, ...] = ()
    drift_limits: tuple[DriftLimit, ...] = ()
    vendor: str = "local"


def find_project_file(start: Path) -> Path:
    """Return `start` if it is a file, else the nearest project file in it or above it.

    Raises
    ------
    ProjectError
        When there is none.
    """
    if start.is_file():
        return start.resolve()
    if not start.is_dir():
        raise ProjectError(
            Fault(file=str(start), what="no such file or folder", allowed=f"a {PROJECT_FILE}")
        )
    for folder in (start.resolve(), *start.resolve().parents):
        if (folder / PROJECT_FILE).is_file():
            return folder / PROJECT_FILE
    raise ProjectError(
        Fault(
            file=str(start),
            what=f"no {PROJECT_FILE} here or in any folder above",
            allowed="start one with: behavgen new .",
        )
    )


def load_project(path: Path) -> Project:
    """Read and judge a project file.

    Parameters
    ----------
    path : Path
        The file, or a folder in or under which one works; it is searched upward.

    Raises
    ------
    ProjectError
        With every fault found, each with its key and line.
    """
    file = find_project_file(Path(path))
    text = _read_text(file)
    content = _parse(text, file.name)
    from behavgen.project_reading import read_project  # noqa: PLC0415  (pydantic loads slowly)

    return read_project(file, text, content)


def _read_text(file: Path) -> str:
    try:
        return file.read_bytes().decode("utf-8-sig")
    except OSError as error:
        reason = error.strerror or "unreadable"
        raise ProjectError(Fault(file=file.name, what=f"cannot be read: {reason}")) from None
    except UnicodeDecodeError as error:
        raise ProjectError(
            Fault(
                file=file.name,
                row=error.object.count(b"\n", 0, error.start) + 1,
                what="not UTF-8 text",
                allowed="save the file as UTF-8",
            )
        ) from None


def _parse(text: str, name: str) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise ProjectError(_syntax_fault(str(error), name, text)) from None


def _syntax_fault(message: str, name: str, text: str) -> Fault:
    place = re.search(r"\(at (?:line (\d+), column \d+|end of document)\)", message)
    row = int(place[1]) if place and place[1] else text.count("\n") + 1 if place else None
    reason = message[: place.start()].strip() if place else message
    if reason.startswith(("Cannot declare", "Cannot overwrite", "Cannot mutate")):
        key = text.splitlines()[row - 1].partition("=")[0].strip("[] \t") if row else "a key"
        allowed = "one entry for each name"
        return Fault(file=name, row=row, column=key, what="given twice", allowed=allowed)
    return Fault(file=name, row=row, what=f"not valid TOML: {reason}")
