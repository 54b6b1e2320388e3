"""CheckReport: what a check did, what it saw and its verdict; in JSON and out."""

from __future__ import annotations

import json
from dataclasses import asdict, dataclass, field
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

from behavgen.errors import Fault, ModelFileError

if TYPE_CHECKING:
    from pydantic import TypeAdapter

__all__ = [
    "FORMAT",
    "BenchResult",
    "CheckReport",
    "ClosureResult",
    "ClosureRow",
    "Disagreement",
    "DistributionResult",
    "PowerResult",
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
    inputs : str
        Applied levels in words, and the one that was sampled where it moved.
    term : str
        Which term it probably comes from; "" where none alone explains it.
    reproduce : str
        Options of the command that simulates just this.
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
    inputs: str = ""
    term: str = ""
    reproduce: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class BenchResult:
    """One named bench and its outcome."""

    name: str
    passed: bool
    message: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class ClosureRow:
    """One row of a table and what the simulated module gave in its place.

    Parameters
    ----------
    quantity, condition : str
    point : int
        Number of the row at its condition, from 1.
    x, table : float
        As in `CurvePoints` of the model.
    measured : float or None
        None where nothing could be measured.
    relative_error : float or None
        Of the measured value; of an S-curve the plain difference.
    z : float or None
        The error in standard errors, where there is one.
    told : str
        Both values in words.
    """

    quantity: str
    condition: str
    point: int
    x: float
    table: float
    measured: float | None
    relative_error: float | None
    z: float | None
    told: str


@dataclass(frozen=True, slots=True, kw_only=True)
class ClosureResult:
    """How one quantity came back from the simulated module.

    Parameters
    ----------
    quantity : str
    passed : bool
    rms_relative : float or None
        Over all rows; None of counts.
    limit : str
        What was found and what is allowed, in words.
    rows : int
    worst : tuple of ClosureRow
    """

    quantity: str
    passed: bool
    rms_relative: float | None
    limit: str
    rows: int
    worst: tuple[ClosureRow, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class DistributionResult:
    """One statistic of the random part against the distribution that it must have.

    Parameters
    ----------
    name : str
    sample : int
        Decisions, pairs of decisions or instances.
    p_value : float
        How often a right model is at least as far off.
    least_p : float
        Smaller ones fail: the family's rate shared out among all statistics.
    told : str
        What was expected and found, in words.
    """

    name: str
    sample: int
    p_value: float
    least_p: float
    told: str

    @property
    def passed(self) -> bool:
        """Whether a right model may well look like this."""
        return self.p_value >= self.least_p


@dataclass(frozen=True, slots=True, kw_only=True)
class PowerResult:
    """The smallest error that this check would have caught with 99 % probability.

    Parameters
    ----------
    quantity : str
        ``"offset"``, ``"sigma"``, ``"tau"``, ``"delay"`` or ``"mismatch"``.
    error : float
        Present everywhere in one process, whichever it is.
    unit : str
        ``"V"``, ``"sigma"``, or ``"1"`` for a share.
    how : str
        ``"decision by decision"`` or ``"by distribution"``.
    """

    quantity: str
    error: float
    unit: str
    how: str


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
    left_out : tuple of str
        What could not be asked, and why.
    closure : tuple of ClosureResult
        Whether the tables come back, one for each quantity.
    distribution : tuple of DistributionResult
        Whether the random part is distributed as it must be.
    power : tuple of PowerResult
        What would have been caught.
    seed : int
        From which the seeds follow whose distribution was judged.
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
    left_out: tuple[str, ...] = ()
    closure: tuple[ClosureResult, ...] = ()
    distribution: tuple[DistributionResult, ...] = ()
    power: tuple[PowerResult, ...] = ()
    seed: int = 1
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
    from pydantic import ValidationError  # noqa: PLC0415  heavy, and only here

    try:
        return _reader().validate_json(text)
    except ValidationError as error:
        raise ModelFileError(
            *(_fault(path, f["msg"], ".".join(map(str, f["loc"]))) for f in error.errors())
        ) from None


@cache
def _reader() -> TypeAdapter[CheckReport]:
    """Return what reads reports; building it takes much longer than reading one."""
    from pydantic import TypeAdapter  # noqa: PLC0415  heavy, and only here

    return TypeAdapter(CheckReport)


def _unreadable(path: Path, what: str) -> ModelFileError:
    return ModelFileError(_fault(path, what))


def _fault(path: Path, what: str, place: str = "") -> Fault:
    return Fault(file=str(path), column=place, what=what, allowed="make it anew: behavgen check")
