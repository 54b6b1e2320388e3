"""CheckReport: what a check did, what it saw and its verdict; in JSON and out."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["BenchResult", "CheckReport", "Disagreement", "Stratum"]


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
