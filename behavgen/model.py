"""ComparatorModel: what is known of one comparator.

The waist of the project: downstream of it nothing sees tables or fits,
upstream of it nothing sees hardware description languages.

A model is a set of effects, each optional: an effect that was not
characterised is absent.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

from behavgen.effects import (
    ApertureEffect,
    DelayEffect,
    EnergyEffect,
    KickbackEffect,
    MemoryEffect,
    MemoryTerm,
    MismatchEffect,
    NoiseEffect,
    OffsetEffect,
    ResetEffect,
)
from behavgen.provenance import NOT_SAID, Provenance
from behavgen.surface import Axis, Box, Range, Surface, Variant

__all__ = [
    "FORMAT",
    "ApertureEffect",
    "Axis",
    "Box",
    "Cell",
    "ComparatorModel",
    "Condition",
    "ConditionFit",
    "CurvePoints",
    "DelayEffect",
    "EnergyEffect",
    "Estimate",
    "KickbackEffect",
    "MemoryEffect",
    "MemoryTerm",
    "MismatchEffect",
    "NoiseEffect",
    "OffsetEffect",
    "Parameter",
    "Pins",
    "Process",
    "Range",
    "ResetEffect",
    "Source",
    "Surface",
    "Variant",
    "significant",
]

FORMAT = 1
"""Version of the model file; raised when an old reader would misread a new file."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Estimate:
    """A value with its interval.

    Parameters
    ----------
    value : float
    low, high : float or None
        Interval at confidence `level`; None where no interval can be given.
    level : float
        Confidence, 0..1.
    """

    value: float
    low: float | None = None
    high: float | None = None
    level: float = 0.95


@dataclass(frozen=True, slots=True, kw_only=True)
class Parameter:
    """One fitted number that people speak about.

    Parameters
    ----------
    name : str
        With the unit in the name, e.g. ``"tau_s"``.
    estimate : Estimate
    unit : str
        SI unit, ``"1"`` for pure numbers.
    low, high : float or None
        Bounds outside which the value would be absurd.
    description : str
        One line: what it is and at which condition.
    source : str
        How it was obtained and from which file.
    """

    name: str
    estimate: Estimate
    unit: str
    low: float | None = None
    high: float | None = None
    description: str = ""
    source: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Process:
    """A process name and the stable code that models know it by."""

    name: str
    code: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Pins:
    """Pin names of the emitted modules; None: the pin is left out.

    `vss` exists in Verilog-A only, `unresolved` in SystemVerilog only.
    """

    inp: str = "inp"
    inn: str = "inn"
    clk: str = "clk"
    outp: str = "outp"
    outn: str | None = "outn"
    vdd: str | None = "vdd"
    unresolved: str | None = "unresolved"
    enable: str | None = None
    vss: str = "vss"


@dataclass(frozen=True, slots=True, kw_only=True)
class Cell:
    """What the user decided about the cell.

    Parameters
    ----------
    name : str
        Also the module name.
    description : str
    decides_on : str
        Clock edge that decides: ``"rising"`` or ``"falling"``.
    in_reset : str
        Output state in reset: ``"high"``, ``"low"``, ``"mid"`` or ``"hold"``.
    when_unresolved : str
        ``"x"``, ``"coin"`` or ``"hold"``.
    time_precision : str
        ``"1fs"`` or ``"1ps"``: all times of the models are multiples of it.
    supply_off_v : float or None
        Below this supply the cell is off; None: the supply is not characterised.
    pins : Pins
    """

    name: str
    description: str = ""
    decides_on: str = "rising"
    in_reset: str = "high"
    when_unresolved: str = "x"
    time_precision: str = "1fs"
    supply_off_v: float | None = None
    pins: Pins = Pins()

    @property
    def time_unit_s(self) -> float:
        """The time precision in s."""
        return {"1fs": 1e-15, "1ps": 1e-12}[self.time_precision]

    @property
    def ticks_per_second(self) -> float:
        """Inverse of the time precision; exact, unlike its reciprocal."""
        return {"1fs": 1e15, "1ps": 1e12}[self.time_precision]


@dataclass(frozen=True, slots=True, kw_only=True)
class Condition:
    """One operating condition; None or "" where the table does not say."""

    process: str = ""
    vdd_v: float | None = None
    temperature_k: float | None = None
    vcm_v: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class CurvePoints:
    """Table points of one quantity at one condition, for plots and closure.

    Parameters
    ----------
    quantity : str
        ``"noise"``: x = vdiff in V, y = share of ones, trials given;
        ``"delay"``: x = magnitude of the overdrive in V, y = delay in s;
        ``"window"``: x = resolve time in s, y = window in V;
        ``"offset"``: x = instance number, y = offset in V;
        ``"reset"``: x = 0, y = reset delay in s;
        ``"memory"``: x = reset time in s, y = shift in V; ``"memory_at_least"``: the same
        where the table only says that the shift is not smaller;
        ``"aperture"``: x = time of a step after the edge in s, y = weight after it;
        ``"energy"``: x = magnitude of the overdrive in V, y = energy in J;
        ``"kickback_common"``, ``"kickback_differential"``: x = vdiff in V, y = charge in C.
    condition : Condition
    x, y : tuple of float
    trials : tuple of int
        Only for noise.
    files : tuple of str
        Files in which the points stand: one for all, or one a point; empty when unknown.
    lines : tuple of int
        Line of each point in its file, 1-based, header included.
    """

    quantity: str
    condition: Condition
    x: tuple[float, ...]
    y: tuple[float, ...]
    trials: tuple[int, ...] = ()
    files: tuple[str, ...] = ()
    lines: tuple[int, ...] = ()

    def place(self, index: int) -> tuple[str, int | None]:
        """Return file and line of a point; ("", None) when unknown."""
        if not self.files or not self.lines:
            return "", None
        return self.files[index if len(self.files) > 1 else 0], self.lines[index]


@dataclass(frozen=True, slots=True, kw_only=True)
class ConditionFit:
    """How well one quantity is fitted at one tabulated condition, by the model as emitted.

    Parameters
    ----------
    quantity : str
        ``"delay"``, ``"window"``, ``"noise"``, ...
    condition : Condition
    rows : int
    rms_relative, worst_relative : float or None
        Relative errors of the emitted model against the rows (delay, window, memory, energy).
    held_out_rms_relative : float or None
        The same for a model fitted without this condition.
    parameters : tuple of Parameter
        Estimates at this condition alone, e.g. ``offset_v`` and ``noise_sigma_v`` or ``tau_s``.
    goodness : float or None
        P-value of the goodness-of-fit test, where there is one.
    """

    quantity: str
    condition: Condition
    rows: int
    rms_relative: float | None = None
    worst_relative: float | None = None
    held_out_rms_relative: float | None = None
    parameters: tuple[Parameter, ...] = ()
    goodness: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Source:
    """A table file that went into the model, and what the user says of it."""

    quantity: str
    file: str
    sha256: str
    rows: int
    failed_rows: int = 0
    provenance: Provenance = NOT_SAID


@dataclass(frozen=True, slots=True, kw_only=True)
class ComparatorModel:
    """All that is known of one comparator.

    Parameters
    ----------
    cell : Cell
    processes : tuple of Process
        In the order of first appearance; the first is the default.
        A cell without process information has one, ``nominal`` with code 0.
    box : Box
        The cell's characterised range: that of the delay table, else the union.
    offset, mismatch, noise, delay, reset, memory, aperture, energy, kickback : effect or None
    parameters : tuple of Parameter
        The numbers people ask for first, at the middle of the box.
    fits : tuple of ConditionFit
    points : tuple of CurvePoints
    notices : tuple of str
        What the fit wants its reader to know, in full sentences.
    sources : tuple of Source
    generator : str
        Name and version of the program that made the model.
    format : int
        Version of the file format.
    """

    cell: Cell
    processes: tuple[Process, ...]
    box: Box
    offset: OffsetEffect | None = None
    mismatch: MismatchEffect | None = None
    noise: NoiseEffect | None = None
    delay: DelayEffect | None = None
    reset: ResetEffect | None = None
    memory: MemoryEffect | None = None
    aperture: ApertureEffect | None = None
    energy: EnergyEffect | None = None
    kickback: KickbackEffect | None = None
    parameters: tuple[Parameter, ...] = ()
    fits: tuple[ConditionFit, ...] = ()
    points: tuple[CurvePoints, ...] = ()
    notices: tuple[str, ...] = ()
    sources: tuple[Source, ...] = ()
    generator: str = ""
    format: int = field(default=FORMAT)


def significant(value: float, digits: int = 10) -> float:
    """Round to significant decimal digits, so that models read well and bytes repeat.

    Ten digits lie far below any measurement and above the last-place noise
    that linear algebra libraries leave.
    """
    if value == 0.0 or not math.isfinite(value):
        return value
    return float(f"{value:.{digits - 1}e}")
