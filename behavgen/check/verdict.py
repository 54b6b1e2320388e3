"""CheckReport: what a check did, what it saw and its verdict; in JSON and out."""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass, field
from pathlib import Path

from behavgen.errors import Fault, ModelFileError

__all__ = [
    "FORMAT",
    "BenchResult",
    "CheckReport",
    "Disagreement",
    "Stratum",
    "dump_report",
    "load_report",
]

FORMAT = 1
"""Version of the report file; raised when an old reader would misread a new file."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Stratum:
    """One slice of the stimulus that must be exercised often enough.

    Parameters
    ----------
    group, name : str
        E.g. ``"overdrive decade"`` and ``"1 uV..10 uV"``.
    decisions, required : int
        How many decisions fell into it and how many must.
    disagreements : int
        How many of them went wrong.
    """

    group: str
    name: str
    decisions: int
    required: int
    disagreements: int = 0

    @property
    def short(self) -> bool:
        """Whether too few decisions fell into it."""
        return self.decisions < self.required


@dataclass(frozen=True, slots=True, kw_only=True)
class Disagreement:
    """One decision in which the emitted model and the reference part.

    Parameters
    ----------
    run : str
        Name of the simulation run.
    decision : int
        Decision number in that run, from 0.
    time_s : float
        Simulation time of its edge.
    conditions : str
        Process, supply, temperature, common mode in words with units.
    vdiff_v, overdrive_v : float
        Applied input and the reference's effective overdrive.
    what : str
        Which observable: ``"bit"``, ``"delay"``, ``"unresolved"``, ``"reset"``...
    expected, got : str
        In words with units.
    """

    run: str
    decision: int
    time_s: float
    conditions: str
    vdiff_v: float
    overdrive_v: float
    what: str
    expected: str
    got: str


@dataclass(frozen=True, slots=True, kw_only=True)
class BenchResult:
    """One named bench and its outcome."""

    name: str
    passed: bool
    message: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class CheckReport:
    """Verdict of a check.

    Parameters
    ----------
    cell : str
    passed : bool
        True when all benches passed, nothing disagreed and no stratum was short.
    simulator : str
        Name and version.
    model_sha256, emitted_sha256 : str
        Of the model file's text and of the emitted text that was checked.
    decisions : int
        Decisions compared.
    strata : tuple of Stratum
    benches : tuple of BenchResult
    disagreements : tuple of Disagreement
        The first ones of each run; `disagreement_count` counts all.
    disagreement_count : int
    worst_delay_ticks : int
        Largest delay difference seen, in units of the time precision.
    excluded : int
        Decisions left out because a tick decides them.
    format : int
        Version of the file format.
    """

    cell: str
    passed: bool
    simulator: str
    model_sha256: str
    emitted_sha256: str
    decisions: int
    strata: tuple[Stratum, ...]
    benches: tuple[BenchResult, ...]
    disagreements: tuple[Disagreement, ...] = ()
    disagreement_count: int = 0
    worst_delay_ticks: int = 0
    excluded: int = 0
    format: int = field(default=FORMAT)


def dump_report(report: CheckReport) -> str:
    """Return the report as JSON text; the same report gives the same bytes."""
    return json.dumps(asdict(report), indent=2, sort_keys=True, allow_nan=False) + "\n"


def load_report(path: Path) -> CheckReport:
    """Read a report file.

    Raises
    ------
    ModelFileError
        When the file cannot be read, has another format version, or is not a
        report; names every fault with its place in the file.
    """
    try:
        text = path.read_text(encoding="utf-8")
        raw = json.loads(text)
    except (OSError, ValueError) as error:
        raise _unreadable(path, f"cannot be read as a check report: {error}") from None
    found = raw.get("format") if isinstance(raw, dict) else None
    if found != FORMAT:
        raise _unreadable(path, f"check report format {found!r}, this version reads {FORMAT}")
    from pydantic import TypeAdapter, ValidationError  # noqa: PLC0415  heavy, and only here

    try:
        return TypeAdapter(CheckReport).validate_json(text)
    except ValidationError as error:
        raise ModelFileError(
            *(_fault(path, f["msg"], ".".join(map(str, f["loc"]))) for f in error.errors())
        ) from None


def _unreadable(path: Path, what: str) -> ModelFileError:
    return ModelFileError(_fault(path, what))


def _fault(path: Path, what: str, place: str = "") -> Fault:
    return Fault(file=str(path), column=place, what=what, allowed="make it anew: behavgen check")
