"""What can be said of two models of one cell, held against each other."""

from __future__ import annotations

from dataclasses import dataclass, replace

from behavgen.limits import DriftLimit
from behavgen.model import Condition, Estimate

__all__ = [
    "DRIVEN_BY",
    "FALSE_ALARMS",
    "SIGNED",
    "STATES",
    "Comparison",
    "Consequence",
    "Drift",
    "DrivingRow",
    "InterfaceChange",
    "Place",
    "QuantityDrift",
]

FALSE_ALARMS = 1e-3
"""Probability with which one run, over all its cells, calls noise a drift."""

STATES = ("same", "within noise", "within limit", "beyond")
"""From nothing to see to what fails."""

SIGNED = frozenset({"offset", "aperture", "kickback"})
"""Numbers of either sign, whose differences count; of the others ratios do."""

DRIVEN_BY = {
    "offset": ("noise", "offset"),
    "mismatch": ("offset",),
    "noise": ("noise",),
    "tau": ("delay", "window"),
    "delay": ("delay", "window"),
    "reset_delay": ("reset",),
    "memory": ("memory",),
    "aperture": ("aperture",),
    "energy": ("energy",),
    "kickback": ("kickback_common", "kickback_differential"),
}
"""Fitted numbers to the tables, as in `CurvePoints`, whose rows move them."""


@dataclass(frozen=True, slots=True, kw_only=True)
class InterfaceChange:
    """One change that whoever instantiates the module may notice.

    Parameters
    ----------
    what : str
        E.g. ``"code of process ss"``.
    old, new : str
    breaks : bool
        False for what only adds: nobody can have relied on its absence.
    """

    what: str
    old: str
    new: str
    breaks: bool = True

    @property
    def text(self) -> str:
        """The change in words."""
        return f"{self.what}: {self.old} -> {self.new}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """One number at one condition.

    Parameters
    ----------
    of : str
        Key of `behavgen.limits.DRIFTING`.
    condition : Condition
    at : float or None
        Overdrive in V of a delay or an energy, reset time in s of a memory.
    s_curve : int or None
        Which of the S-curves at this condition tells it, from 0; None: the model's surface.
    """

    of: str
    condition: Condition
    at: float | None = None
    s_curve: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Drift:
    """One number, old and new.

    Parameters
    ----------
    place : Place
    unit : str
    old, new : Estimate
        With intervals at 95 %, where their errors are known.
    errors : float or None
        Difference in joint standard errors; None where these are not known.
    detectable : float or None
        Difference that would just be told from noise, in the unit.
    state : str
        One of `STATES`.
    """

    place: Place
    unit: str
    old: Estimate
    new: Estimate
    errors: float | None
    detectable: float | None
    state: str

    @property
    def difference(self) -> float:
        """New less old, in the unit."""
        return self.new.value - self.old.value

    @property
    def share(self) -> float | None:
        """The difference over the old value; None where that may have either sign."""
        if self.place.of in SIGNED or self.old.value == 0.0:
            return None
        return self.difference / abs(self.old.value)


@dataclass(frozen=True, slots=True, kw_only=True)
class QuantityDrift:
    """Everything about one quantity.

    Parameters
    ----------
    of : str
        Key of `behavgen.limits.DRIFTING`.
    drifts : tuple of Drift
        In the order of the tables; empty where the measured ranges have nothing in common.
    compared : int
        How many numbers were compared, whether they are listed or not.
    limit : DriftLimit or None
        None: whatever is more than noise is too much.
    same_tables : bool
        Both models were made from the same tables.
    presence : str
        ``"both"``, ``"lost"`` or ``"gained"``.
    """

    of: str
    drifts: tuple[Drift, ...]
    compared: int
    limit: DriftLimit | None
    same_tables: bool
    presence: str = "both"

    @property
    def state(self) -> str:
        """The worst state of all its numbers."""
        if self.presence == "lost":
            return "beyond"
        return max((d.state for d in self.drifts), key=STATES.index, default="same")

    @property
    def leading(self) -> Drift | None:
        """The drift that decides: of the worst state the largest in errors, else in size."""
        worst = [drift for drift in self.drifts if drift.state == self.state]
        return max(worst, key=_size, default=None)

    @property
    def telling(self) -> QuantityDrift:
        """The same with only the drifts that are more than noise, or the largest of those."""
        moved = [d for d in self.drifts if d.state in ("within limit", "beyond")]
        leading = [self.leading] if self.leading else []
        return replace(self, drifts=tuple(moved or leading))

    @property
    def blind(self) -> bool:
        """Whether noise could hide a drift beyond the limit at some place."""
        limit = self.limit
        return limit is not None and any(
            d.detectable is not None
            and d.state in ("same", "within noise")
            and not self.same_tables
            and not limit.allows(d.old.value, d.old.value + d.detectable)
            for d in self.drifts
        )


@dataclass(frozen=True, slots=True, kw_only=True)
class DrivingRow:
    """A row of the new tables that the old model does not meet.

    Parameters
    ----------
    quantity : str
        Of the table, as in `CurvePoints`.
    file : str
        "" when unknown.
    line : int or None
    condition : Condition
    x, y : float
        As in `CurvePoints`.
    expected : float
        What the old model says instead of `y`.
    residual : float
        ``y`` over expected less one, or in standard deviations; of an aperture or a charge
        the difference over the largest old row of its curve.
    in_deviations : bool
        Which of the two it is.
    """

    quantity: str
    file: str
    line: int | None
    condition: Condition
    x: float
    y: float
    expected: float
    residual: float
    in_deviations: bool

    @property
    def residual_text(self) -> str:
        """The residual in words."""
        if self.in_deviations:
            return f"{self.residual:+.1f} standard deviations"
        return f"{100.0 * self.residual:+.2g} %"

    @property
    def place(self) -> str:
        """File and line, as far as known."""
        return self.file if self.line is None else f"{self.file}:{self.line}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Consequence:
    """One number to decide with, old and new.

    Parameters
    ----------
    what : str
        In words, with its setting.
    unit : str
        SI unit; ``"log10"`` for the decimal logarithm of a probability, ``"log10 s"`` for
        that of a time in s.
    condition : Condition
    old, new : Estimate
    """

    what: str
    unit: str
    condition: Condition
    old: Estimate
    new: Estimate


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparison:
    """What became of a model.

    Parameters
    ----------
    interface : tuple of InterfaceChange
    quantities : tuple of QuantityDrift
    rows : tuple of DrivingRow
        Of the new tables, that drive what has moved beyond noise.
    consequences : tuple of Consequence
        Of what has moved beyond noise.
    notices : tuple of str
        What a reader should know besides.
    false_alarms : float
        Probability, over all numbers together, with which noise is called a drift.
    """

    interface: tuple[InterfaceChange, ...]
    quantities: tuple[QuantityDrift, ...]
    rows: tuple[DrivingRow, ...]
    consequences: tuple[Consequence, ...]
    notices: tuple[str, ...]
    false_alarms: float

    @property
    def breaks(self) -> tuple[InterfaceChange, ...]:
        """Changes that break whoever uses the module."""
        return tuple(change for change in self.interface if change.breaks)

    @property
    def beyond(self) -> tuple[QuantityDrift, ...]:
        """Quantities that have drifted farther than they may."""
        return tuple(quantity for quantity in self.quantities if quantity.state == "beyond")

    @property
    def passed(self) -> bool:
        """Whether nothing broke and nothing moved too far."""
        return not (self.breaks or self.beyond)


def _size(drift: Drift) -> float:
    if drift.errors is not None:
        return abs(drift.errors)
    return abs(drift.share if drift.share is not None else drift.difference)
