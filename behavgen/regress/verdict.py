"""What a regression says of every cell, and of all of them."""

from __future__ import annotations

from dataclasses import dataclass

from behavgen.check.verdict import CheckReport
from behavgen.errors import BehavgenError
from behavgen.limits import Limit
from behavgen.model import Condition, Estimate, Source
from behavgen.regress.comparison import Comparison

__all__ = [
    "MET",
    "NOT_MET",
    "UNCHARACTERISED",
    "UNDECIDED",
    "CellVerdict",
    "LimitVerdict",
    "RunVerdict",
]

MET, NOT_MET, UNDECIDED = "met", "not met", "not decided by the data"
UNCHARACTERISED = "not characterised"


@dataclass(frozen=True, slots=True, kw_only=True)
class LimitVerdict:
    """One limit and what a model has to say of it.

    Parameters
    ----------
    limit : Limit
    state : str
        `MET`, `NOT_MET`, `UNDECIDED` or `UNCHARACTERISED`.
    estimate : Estimate or None
        The number where it is nearest to its bound or farthest beyond, in its SI unit.
    condition : Condition or None
        Where that is.
    reason : str
        Why nothing could be decided.
    """

    limit: Limit
    state: str
    estimate: Estimate | None = None
    condition: Condition | None = None
    reason: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class CellVerdict:
    """One cell.

    Parameters
    ----------
    name, description : str
    line : int
        Where the cell's first table stands in the project file; 0 when unknown.
    comparison : Comparison or None
        With the baseline; None where nothing is recorded.
    limits : tuple of LimitVerdict
    check : CheckReport or None
        What a simulation of the emitted model said, where there is one.
    error : BehavgenError or None
        Why there is no model, or no check.
    sources : tuple of Source
        Tables of the present model.
    notices : tuple of str
        What a reader should know besides.
    has_model : bool
    """

    name: str
    description: str = ""
    line: int = 0
    comparison: Comparison | None = None
    limits: tuple[LimitVerdict, ...] = ()
    check: CheckReport | None = None
    error: BehavgenError | None = None
    sources: tuple[Source, ...] = ()
    notices: tuple[str, ...] = ()
    has_model: bool = True

    @property
    def agrees(self) -> bool:
        """Whether nothing drifted too far, no limit is broken and the check holds."""
        return (
            (self.comparison is None or self.comparison.passed)
            and all(limit.state != NOT_MET for limit in self.limits)
            and (self.check is None or self.check.passed)
        )

    @property
    def passed(self) -> bool:
        """Whether it agrees and nothing was in the way of saying so."""
        return self.agrees and self.error is None


@dataclass(frozen=True, slots=True, kw_only=True)
class RunVerdict:
    """All cells of one run, in the project's order.

    Parameters
    ----------
    project_file : str
        As a path relative to the repository.
    cells : tuple of CellVerdict
    gone : tuple of str
        Cells of the baseline that the project has no more.
    """

    project_file: str
    cells: tuple[CellVerdict, ...]
    gone: tuple[str, ...] = ()

    @property
    def passed(self) -> bool:
        """Whether every cell passed and none is gone."""
        return not self.gone and all(cell.passed for cell in self.cells)
