"""Drives one instance edge by edge inside a simulation; for the directed benches."""

from __future__ import annotations

from functools import cache, cached_property
from typing import Any

import numpy as np
from cocotb.triggers import ReadOnly, ReadWrite, Timer
from cocotb.types import Logic

from behavgen.check.bench_files import open_batch, read_model
from behavgen.check.runs import Run, reference_of
from behavgen.reference import Trace

__all__ = ["Driver"]

_UNCHARACTERISED_V = 1.0
_ENDLESS_TICKS = 2**62


_read_model = cache(read_model)


class Driver:
    """One idle instance, its reference and its nominal condition.

    Parameters
    ----------
    top : handle
        Of the simulation's top module.
    name : str
        Of the run, as in `directed`.

    Notes
    -----
    Times are ticks. Outputs are text, ``"0" "1" "X" "Z"`` a pin and ``"-"``
    for a pin that the cell does not have.
    """

    def __init__(self, top: Any, name: str) -> None:
        batch = open_batch()
        self.run: Run = batch.driven(name)
        self.model = _read_model(batch.folder)
        self.cell = self.model.cell
        self.pins = self.cell.pins
        self.reference = reference_of(self.model, self.run)
        self.unit = getattr(top, self.run.instance)
        self._delays: dict[float, int] = {}
        box = self.model.box
        self.vcm_v = 0.5 if box.vcm_v is None else box.vcm_v.middle
        self.vdd_v = _UNCHARACTERISED_V if box.vdd_v is None else box.vdd_v.middle
        self.large_v = 0.1 if box.overdrive_v is None else 0.5 * box.overdrive_v.high
        self.deciding, self.resting = (1, 0) if self.cell.decides_on == "rising" else (0, 1)

    # What it must do

    @cached_property
    def trip_v(self) -> float:
        """Trip point at the nominal condition."""
        return float(self.reference.offset(**self._condition()))

    @property
    def reset_state(self) -> str:
        """Both outputs in reset; of a cell that holds, "" since it depends."""
        level = {"high": "1", "low": "0", "mid": "X", "hold": ""}[self.cell.in_reset]
        return self.shown(level, level) if level else ""

    @property
    def can_be_off(self) -> bool:
        """Whether a pin switches the cell off."""
        return self.pins.enable is not None or self.has_threshold

    @property
    def has_threshold(self) -> bool:
        """Whether the supply switches the cell off."""
        return self.pins.vdd is not None and self.cell.supply_off_v is not None

    def shown(self, outp: str, outn: str) -> str:
        """Return the text of two output levels, as far as the cell has the pins."""
        return outp + (outn if self.pins.outn is not None else "-")

    def bit(self, value: int) -> str:
        """Return the text of the outputs that show a bit."""
        return self.shown(str(value), str(1 - value))

    @property
    def unknown(self) -> str:
        """Text of unknown outputs."""
        return self.shown("X", "X")

    def trace(self, overdrive_v: float, *, number: int = 0) -> Trace:
        """Return the reference's trace of one decision at a distance from the trip point."""
        inp, inn = self._levels(overdrive_v)
        condition = self._condition() | {"vcm": (inp + inn) * 0.5}
        endless = [_ENDLESS_TICKS]
        return self.reference.trace([inp - inn], endless, first_decision=number, **condition)

    def delay(self, overdrive_v: float) -> int:
        """Return the expected delay in ticks."""
        if overdrive_v not in self._delays:
            self._delays[overdrive_v] = int(self.trace(overdrive_v).delay_ticks[0])
        return self._delays[overdrive_v]

    @cached_property
    def reset_ticks(self) -> int:
        """Expected reset delay in ticks."""
        return int(self.trace(self.large_v).reset_ticks[0])

    @cached_property
    def aperture_ticks(self) -> int:
        """Expected ticks from the edge to the sampling of the input."""
        return int(self.trace(self.large_v).aperture_ticks[0])

    def _condition(self) -> dict[str, Any]:
        meant = self.run.meant
        condition = {"temp_c": meant.temperature_c, "process": meant.process, "vcm": self.vcm_v}
        return condition | ({} if self.pins.vdd is None else {"vdd": self.vdd_v})

    def _levels(self, overdrive_v: float) -> tuple[float, float]:
        vdiff = self.trip_v + overdrive_v
        return self.vcm_v + 0.5 * vdiff, self.vcm_v - 0.5 * vdiff

    # What it is given

    async def wait(self, ticks: int) -> None:
        """Let time pass."""
        await Timer(max(int(ticks), 1), "step")

    async def same_instant(self) -> None:
        """Let what was applied happen, to apply more in the same instant."""
        await ReadWrite()
        await ReadWrite()

    async def settle(self) -> None:
        """Wait until everything of this instant has happened, to read and not to drive."""
        await ReadOnly()

    def apply(self, overdrive_v: float) -> None:
        """Apply an input at a distance from the trip point."""
        self.unit.inp.value, self.unit.inn.value = self._levels(overdrive_v)

    def supply(self, vdd_v: float) -> None:
        """Apply a supply."""
        self.unit.vdd.value = vdd_v

    def switch_off(self) -> None:
        """Switch off by the supply, else by the enable."""
        if self.has_threshold:
            self.supply(float(np.nextafter(self.cell.supply_off_v or 0.0, 0.0)))
        else:
            self.enable("0")

    def switch_on(self) -> None:
        """Switch on again."""
        self.supply(self.vdd_v)
        self.enable("1")

    def enable(self, level: str) -> None:
        """Apply a level to the enable."""
        self.unit.enable.value = Logic(level)

    def leave_the_box(self) -> None:
        """Apply a condition outside the characterised range, where one can be applied."""
        box = self.model.box
        if box.vcm_v is not None:
            beyond = box.vcm_v.high + 0.1
            self.unit.inp.value, self.unit.inn.value = beyond + self.large_v, beyond - self.large_v
        elif box.vdd_v is not None and self.pins.vdd is not None:
            self.supply(box.vdd_v.high + 0.1)

    def clock(self, level: int | str) -> None:
        """Apply a clock level, also ``"X"`` and ``"Z"``."""
        self.unit.clk.value = Logic(level)

    def edge(self) -> None:
        """Apply the deciding level."""
        self.clock(self.deciding)

    def release(self) -> None:
        """Apply the reset level."""
        self.clock(self.resting)

    async def power_up(self) -> None:
        """Bring the instance into its reset state."""
        self.apply(self.large_v)
        self.switch_on()
        self.release()
        await self.wait(20)

    async def decide(self, overdrive_v: float, *, phase: int | None = None) -> None:
        """Play one whole decision, long enough to resolve and reset unless told otherwise."""
        self.apply(overdrive_v)
        await self.wait(5)
        await self.cycle(phase or self.delay(overdrive_v) + 20)

    async def cycle(self, phase: int) -> None:
        """Play one clock cycle from the decision edge to after the reset."""
        self.edge()
        await self.wait(phase)
        self.release()
        await self.wait(self.reset_ticks + 20)

    # What it shows

    def outputs(self) -> str:
        """Return both outputs."""
        outn = str(self.unit.outn.value) if self.pins.outn is not None else "-"
        return str(self.unit.outp.value).upper() + outn.upper()

    def flag(self) -> str:
        """Return the unresolved flag; "-" without the pin."""
        return str(self.unit.unresolved.value) if self.pins.unresolved is not None else "-"

    def cause(self) -> int | None:
        """Return x_cause; None where it cannot be read."""
        value = self.unit.x_cause.value
        return int(value) if value.is_resolvable else None

    def energy_j(self) -> float:
        """Return the running total of the energy; 0 where it is not characterised."""
        return 0.0 if self.model.energy is None else float(self.unit.dut.energy_j.value)

    def must_have_spent(self, before_j: float, overdrive_v: float, when: str) -> None:
        """Fail unless the total grew by the energy of one decision, to a tick of its delay."""
        if self.model.energy is None:
            return
        one = float(self.trace(overdrive_v).energy_j[0])
        spent = self.energy_j() - before_j
        if abs(spent - one) > 1e-3 * one:
            raise AssertionError(f"{when}: takes {one!r} J, not {spent!r} J")

    def must_show(self, outputs: str, when: str) -> None:
        """Fail unless the outputs are as expected."""
        if self.outputs() != outputs:
            raise AssertionError(f"{when}: outputs must be {outputs}, are {self.outputs()}")

    def must_rest(self, when: str) -> None:
        """Fail unless the outputs are in their reset state; a holding cell may show anything."""
        if self.reset_state:
            self.must_show(self.reset_state, when)

    def must_flag(self, value: str, when: str) -> None:
        """Fail unless the unresolved flag is as expected, where there is one."""
        if self.flag() not in ("-", value):
            raise AssertionError(f"{when}: unresolved must be {value}, is {self.flag()}")

    def must_name(self, cause: int, when: str) -> None:
        """Fail unless x_cause is as expected, where it can be read."""
        if self.cause() not in (None, cause):
            raise AssertionError(f"{when}: x_cause must be {cause}, is {self.cause()}")
