"""Everything that can go wrong on purpose, and what it costs the caller.

    BehavgenError                       never raised itself
    ├── ProjectError    exit code 2     usage or the project file
    ├── TableError      exit code 3     table data
    ├── ToolError       exit code 4     a simulator or compiler is missing or too old
    ├── FitError        exit code 5     the data cannot identify what was asked
    └── ModelFileError  exit code 2     a model file that cannot be read

Every error carries all faults found, not just the first. A disagreement found
by a check is a verdict, not an exception.
"""

from __future__ import annotations

from dataclasses import dataclass

__all__ = [
    "BehavgenError",
    "Fault",
    "FitError",
    "ModelFileError",
    "ProjectError",
    "TableError",
    "ToolError",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """One thing wrong with one input.

    Parameters
    ----------
    what : str
        What was found.
    allowed : str
        What is allowed or what to do; empty when `what` says it all.
    file : str
        The file as the user wrote it; empty when no file is to blame.
    row : int or None
        Line in the file, 1-based, header included; None for the whole file.
    column : str
        The user's own column header or a project key.
    """

    what: str
    allowed: str = ""
    file: str = ""
    row: int | None = None
    column: str = ""

    def __str__(self) -> str:
        """Return ``file:row: column: what; what is allowed``."""
        place = self.file if self.row is None else f"{self.file}:{self.row}"
        head = [part for part in (place, self.column) if part]
        text = f"{self.what}; {self.allowed}" if self.allowed else self.what
        return ": ".join([*head, text])


class BehavgenError(Exception):
    """Base of all errors a user can cause.

    Parameters
    ----------
    *faults : Fault or str
        All faults found; a plain string is a fault without a place.
    """

    exit_code = 2

    def __init__(self, *faults: Fault | str) -> None:
        self.faults = tuple(f if isinstance(f, Fault) else Fault(what=f) for f in faults)
        super().__init__("\n".join(str(fault) for fault in self.faults))

    def __reduce__(self) -> tuple[type[BehavgenError], tuple[Fault, ...]]:
        """Keep the faults on the way from another process."""
        return type(self), self.faults


class ProjectError(BehavgenError):
    """The command line or the project file is wrong."""

    exit_code = 2


class ModelFileError(BehavgenError):
    """A model file cannot be read as one."""

    exit_code = 2


class TableError(BehavgenError):
    """Tables hold data that cannot be used."""

    exit_code = 3


class ToolError(BehavgenError):
    """A needed simulator or compiler is missing or too old."""

    exit_code = 4


class FitError(BehavgenError):
    """The data cannot identify what was asked of the fit."""

    exit_code = 5
