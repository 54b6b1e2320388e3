"""The parameters of the emitted modules: the one place where every language takes them from.

They are always all present, so that a test bench written for one cell fits
every other; a parameter whose effect was not characterised does nothing.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from behavgen.model import Box, ComparatorModel, Surface
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["UNRESOLVED_MODES", "ModuleParameter", "default_temperature_c", "module_parameters"]

UNRESOLVED_MODES = {"x": 0, "coin": 1, "hold": 2}
"""What the outputs show after an unresolved decision, and its code."""

_ROOM_C = 27.0
_SWITCH = ((0, "off"), (1, "on"))


@dataclass(frozen=True, slots=True, kw_only=True)
class ModuleParameter:
    """One parameter of an emitted module.

    Parameters
    ----------
    name : str
    kind : str
        ``"real"``, ``"integer"`` (32 bits, signed) or ``"word"`` (64 bits, unsigned).
    default : float or int
    description : str
        One line without a full stop.
    unit : str
        ``"V"``, ``"degC"`` or "" for a pure number.
    low, high : float or None
        Smallest and largest legal value; None: no bound.
    codes : tuple of (int, str)
        Legal values and their meanings, where it is a choice.
    effective : bool
        False when the module has no such effect: the parameter does nothing.
    reason : str
        Why it has none.
    """

    name: str
    kind: Literal["real", "integer", "word"]
    default: float
    description: str
    unit: str = ""
    low: float | None = None
    high: float | None = None
    codes: tuple[tuple[int, str], ...] = ()
    effective: bool = True
    reason: str = "not characterised"

    @property
    def note(self) -> str:
        """What a comment beside the declaration says of it."""
        text = ": ".join(part for part in (self.description, self.allowed) if part)
        return text if self.effective else f"{text} ({self.reason}: does nothing)"

    @property
    def allowed(self) -> str:
        """Legal values for people, e.g. ``0 off, 1 on`` or ``from 0``; "" when any will do."""
        if self.codes:
            return ", ".join(f"{code} {meaning}" for code, meaning in self.codes)
        if self.low is not None and self.high is not None:
            return f"{self.low:g} to {self.high:g}"
        return "" if self.low is None else f"from {self.low:g}"


def module_parameters(model: ComparatorModel) -> tuple[ModuleParameter, ...]:
    """Return all parameters in the order in which modules declare them."""
    return (
        ModuleParameter(
            name="OFFSET_SHIFT_V", kind="real", default=0.0, unit="V",
            description="added to the trip point",
        ),
        _switch("NOISE_ON", 1, "noise of each decision", model.noise is not None),
        _switch("MISMATCH_ON", 0, "offset of this instance", model.mismatch is not None),
        _switch("MEMORY_ON", 1, "memory of the previous decision", model.memory is not None),
        _switch("DELAY_ON", 1, "delays; off: one time step", model.delay is not None),
        ModuleParameter(
            name="SEED", kind="word", default=0, low=0.0,
            description="of this instance's random numbers; 0: from its hierarchical path",
        ),
        ModuleParameter(
            name="TEMPERATURE_C", kind="real", default=default_temperature_c(model.box),
            unit="degC", low=-ZERO_CELSIUS_K,
            description="temperature of the cell", effective=_depends_on_temperature(model),
        ),
        ModuleParameter(
            name="PROCESS", kind="integer", default=model.processes[0].code,
            codes=tuple((process.code, process.name) for process in model.processes),
            description="process",
        ),
        ModuleParameter(
            name="UNRESOLVED_MODE", kind="integer",
            default=UNRESOLVED_MODES[model.cell.when_unresolved],
            codes=tuple((code, name) for name, code in UNRESOLVED_MODES.items()),
            description="outputs after an unresolved decision",
        ),
        ModuleParameter(
            name="FORCE_UNRESOLVED_EVERY", kind="integer", default=0, low=0.0,
            description="one in so many decisions stays unresolved; 0: none is forced",
        ),
        ModuleParameter(
            name="WARNINGS", kind="integer", default=1,
            codes=((0, "silent"), (1, "once a cause"), (2, "fatal")),
            description="messages",
        ),
    )  # fmt: skip


def default_temperature_c(box: Box) -> float:
    """Return 27 degrees Celsius where that was characterised, else the middle of the range."""
    span = box.temperature_k
    if span is None or span.low <= _ROOM_C + ZERO_CELSIUS_K <= span.high:
        return _ROOM_C
    return round(span.middle - ZERO_CELSIUS_K, 6)


def _switch(name: str, default: int, description: str, characterised: bool) -> ModuleParameter:
    return ModuleParameter(
        name=name, kind="integer", default=default, codes=_SWITCH,
        description=description, effective=characterised,
    )  # fmt: skip


def _depends_on_temperature(model: ComparatorModel) -> bool:
    return any(
        axis.condition == "temperature_k" for surface in _surfaces(model) for axis in surface.axes
    )


def _surfaces(model: ComparatorModel) -> tuple[Surface, ...]:
    found: list[Surface] = []
    if model.offset is not None:
        found.append(model.offset.surface)
    if model.mismatch is not None:
        found.extend(model.mismatch.components)
    if model.noise is not None:
        found.append(model.noise.surface)
    if model.delay is not None:
        found.extend((model.delay.tau, *model.delay.nodes))
    if model.reset is not None:
        found.append(model.reset.surface)
    if model.memory is not None:
        found.extend(part for term in model.memory.terms for part in (term.shift, term.tau))
        found.extend([model.memory.floor] if model.memory.floor else [])
    if model.aperture is not None:
        found.append(model.aperture.centre)
    if model.energy is not None:
        found.extend(part for part in (model.energy.fixed, model.energy.rise) if part)
    return tuple(found)
