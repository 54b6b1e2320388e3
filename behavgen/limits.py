"""What a user lets a cell's numbers be, and how far they may drift; as in the project file.

Limit(of="delay", overdrive_v=1e-3, process="ss", below=400e-12)
DriftLimit(of="noise", share=0.05)
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from behavgen.units import format_celsius, format_si

__all__ = [
    "DRIFTING",
    "LIMITED",
    "DriftLimit",
    "Limit",
    "Limited",
    "drift_limits_of",
    "limits_of",
    "quantity_words",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Limited:
    """A number that can be limited.

    Parameters
    ----------
    unit : str
    needs : tuple of tuple of str
        Of each group exactly one key must be given, e.g. ``("overdrive",)``.
    takes : tuple of str
        Keys that may be given besides.
    """

    unit: str
    needs: tuple[tuple[str, ...], ...] = ()
    takes: tuple[str, ...] = ()

    @property
    def keys(self) -> tuple[str, ...]:
        """All keys that say at what the number is taken, conditions apart."""
        return (*(key for group in self.needs for key in group), *self.takes)


_APPLIED = ("overdrive", "input", "span")

LIMITED: Mapping[str, Limited] = {
    "offset": Limited(unit="V", takes=("sigmas",)),
    "mismatch": Limited(unit="V"),
    "noise": Limited(unit="V"),
    "delay": Limited(unit="s", needs=(("overdrive",),)),
    "tau": Limited(unit="s"),
    "window": Limited(unit="V", needs=(("resolve_time",),)),
    "error": Limited(unit="1", needs=(_APPLIED,), takes=("resolve_time", "clock")),
    "time_between_failures": Limited(
        unit="s", needs=(_APPLIED, ("clock",)), takes=("resolve_time",)
    ),
    "reset_delay": Limited(unit="s"),
    "memory": Limited(unit="V", needs=(("reset_time",),)),
    "energy": Limited(unit="J", needs=(("overdrive",),)),
}
"""``offset``: magnitude of the nominal trip point and so many sigmas of mismatch; ``error``:
probability of a wrong or unresolved decision; ``time_between_failures``: mean time between
unresolved decisions."""

DRIFTING: Mapping[str, str] = {
    "offset": "V",
    "mismatch": "V",
    "noise": "V",
    "tau": "s",
    "delay": "s",
    "reset_delay": "s",
    "memory": "V",
    "aperture": "s",
    "energy": "J",
    "kickback": "C",
}
"""Fitted numbers that are held against the baseline, and their units."""

_SETTINGS = {
    "sigmas": ("sigmas", "1", "with {} sigmas of mismatch"),
    "overdrive": ("overdrive_v", "V", "at {} overdrive"),
    "input": ("input_v", "V", "at {} input"),
    "span": ("span_v", "V", "over a span of {}"),
    "resolve_time": ("resolve_time_s", "s", "after {}"),
    "clock": ("clock_hz", "Hz", "with a {} clock"),
    "reset_time": ("reset_time_s", "s", "after {} of reset"),
}
"""Keys to fields of `Limit`, their units, and how they are spoken."""

_YEAR_S = 365.25 * 86400.0  # the Julian year


@dataclass(frozen=True, slots=True, kw_only=True)
class Limit:
    """A bound on one number, in SI units.

    Parameters
    ----------
    of : str
        Key of `LIMITED`.
    below, above : float or None
        Largest and smallest value that is good.
    cell : str
        Whose it is; "" for all cells.
    process : str
        "" for every process.
    vdd_v, temperature_k, vcm_v : float or None
        None: everywhere in the characterised range.
    line : int
        Where it stands in the project file.
    """

    of: str
    below: float | None = None
    above: float | None = None
    cell: str = ""
    sigmas: float | None = None
    overdrive_v: float | None = None
    input_v: float | None = None
    span_v: float | None = None
    resolve_time_s: float | None = None
    clock_hz: float | None = None
    reset_time_s: float | None = None
    process: str = ""
    vdd_v: float | None = None
    temperature_k: float | None = None
    vcm_v: float | None = None
    line: int = 0

    @property
    def unit(self) -> str:
        """SI unit of the number."""
        return LIMITED[self.of].unit

    @property
    def subject(self) -> str:
        """What is limited, in words: ``delay at 1 mV overdrive in ss``."""
        return " ".join([quantity_words(self.of), *self._setting_words(), *self._condition_words()])

    @property
    def bound(self) -> str:
        """The bound in words: ``below 400 ps``."""
        parts = (("above", self.above), ("below", self.below))
        return " and ".join(
            f"{word} {value_words(value, self.unit)}" for word, value in parts if value is not None
        )

    @property
    def text(self) -> str:
        """The whole limit in words."""
        return f"{self.subject} {self.bound}"

    def _setting_words(self) -> list[str]:
        words = []
        for name, unit, phrase in _SETTINGS.values():
            value = getattr(self, name)
            if value is not None:
                words.append(phrase.format(value_words(value, unit)))
        return words

    def _condition_words(self) -> list[str]:
        words = [f"in {self.process}"] if self.process else []
        if self.vdd_v is not None:
            words.append(f"at {format_si(self.vdd_v, 'V', 4)}")
        if self.temperature_k is not None:
            words.append(f"at {format_celsius(self.temperature_k)}")
        if self.vcm_v is not None:
            words.append(f"at vcm {format_si(self.vcm_v, 'V', 4)}")
        return words


@dataclass(frozen=True, slots=True, kw_only=True)
class DriftLimit:
    """How far one number may move from the baseline.

    Parameters
    ----------
    of : str
        Key of `DRIFTING`.
    share : float or None
        Relative to the old value.
    amount : float or None
        In SI units; one of the two is given.
    cell : str
        Whose it is; "" for all cells.
    line : int
    """

    of: str
    share: float | None = None
    amount: float | None = None
    cell: str = ""
    line: int = 0

    @property
    def text(self) -> str:
        """The limit in words: ``5 %``."""
        if self.share is not None:
            return f"{100.0 * self.share:g} %"
        return format_si(self.amount or 0.0, DRIFTING[self.of], 4)

    def allows(self, old: float, new: float) -> bool:
        """Tell whether a move from one value to another stays within the limit."""
        room = self.share * abs(old) if self.share is not None else self.amount or 0.0
        return abs(new - old) <= room


def quantity_words(of: str) -> str:
    """Write a quantity as people say it: ``time between failures``."""
    return of.replace("_", " ")


def value_words(value: float, unit: str) -> str:
    """Write a number with its unit; long times in years."""
    if unit == "1":
        return f"{value:.4g}"
    if unit == "s" and value >= _YEAR_S:
        return f"{value / _YEAR_S:.4g} years"
    return format_si(value, unit, 4)


def limits_of(cell: str, limits: Iterable[Limit]) -> tuple[Limit, ...]:
    """Return the limits that hold for one cell, those of all cells first."""
    return tuple(limit for limit in limits if limit.cell in ("", cell))


def drift_limits_of(cell: str, limits: Iterable[DriftLimit]) -> dict[str, DriftLimit]:
    """Return the drift limits of one cell by quantity: its own win over those of all cells."""
    mine = [limit for limit in limits if limit.cell in ("", cell)]
    return {limit.of: limit for limit in sorted(mine, key=lambda limit: limit.cell != "")}
