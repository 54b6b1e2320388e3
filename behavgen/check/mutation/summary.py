"""What came of trying mutants, as it is kept beside a cell's check."""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

from behavgen.errors import Fault, ModelFileError
from behavgen.files import sha256_of_text
from behavgen.model import ComparatorModel
from behavgen.model_file import dump_model

if TYPE_CHECKING:
    from behavgen.check.mutation.mutation import MutationReport

__all__ = ["MUTANTS_FILE", "Excused", "MutationSummary", "dump_summary", "load_summary", "summary"]

MUTANTS_FILE = "mutants.json"
FORMAT = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class Excused:
    """A mutant that nobody can tell from the original.

    Parameters
    ----------
    change, reason : str
    """

    change: str
    reason: str


@dataclass(frozen=True, slots=True, kw_only=True)
class MutationSummary:
    """What came of all trials.

    Parameters
    ----------
    cell : str
    model_sha256, emitted_sha256 : str
    possible, tried : int
        Mutants of the text, and those of them that were tried.
    caught : dict
        How many were caught, by kind.
    excused : tuple of Excused
    missed : tuple of str
        The others.
    format : int
        Version of the file.
    """

    cell: str
    model_sha256: str
    emitted_sha256: str
    possible: int
    tried: int
    caught: dict[str, int]
    excused: tuple[Excused, ...]
    missed: tuple[str, ...]
    format: int = field(default=FORMAT)

    @property
    def words(self) -> str:
        """All of it in one line."""
        return (
            f"{self.tried} of {self.possible} mutants tried: {sum(self.caught.values())} caught, "
            f"{len(self.excused)} that nobody can tell from the original, "
            f"{len(self.missed)} missed"
        )


def summary(model: ComparatorModel, text: str, report: MutationReport) -> MutationSummary:
    """Sum up the trials of a model's emitted text."""
    return MutationSummary(
        cell=model.cell.name,
        model_sha256=sha256_of_text(dump_model(model)),
        emitted_sha256=sha256_of_text(text),
        possible=report.possible,
        tried=len(report.trials),
        caught=report.caught,
        excused=tuple(
            Excused(change=trial.mutant.words, reason=trial.reason) for trial in report.excused
        ),
        missed=tuple(trial.mutant.words for trial in report.missed),
    )


def dump_summary(found: MutationSummary) -> str:
    """Return the file's text."""
    return json.dumps(asdict(found), indent=2, sort_keys=True) + "\n"


def load_summary(folder: Path, model: ComparatorModel) -> MutationSummary | None:
    """Return what lies in a cell's output folder; None if nothing, or of another model.

    Raises
    ------
    ModelFileError
        When the file is there and cannot be read.
    """
    path = folder / "check" / MUTANTS_FILE
    if not path.is_file():
        return None
    from pydantic import TypeAdapter, ValidationError  # noqa: PLC0415  heavy, and only here

    try:
        found = TypeAdapter(MutationSummary).validate_json(path.read_bytes())
    except (OSError, ValidationError):
        fault = Fault(
            file=str(path), what="cannot be read",
            allowed="make it anew with: behavgen check --mutants",
        )  # fmt: skip
        raise ModelFileError(fault) from None
    same = found.format == FORMAT and found.model_sha256 == sha256_of_text(dump_model(model))
    return found if same else None
