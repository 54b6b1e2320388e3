"""Instances whose pins have their levels from the very start: nothing changes before the clock."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import count
from typing import Any

import numpy as np

from behavgen.check.directed import middle_c
from behavgen.check.runs import MODES, Run, Settings, reference_of
from behavgen.check.script import HIGH, LOW, Change, Script, script_of
from behavgen.check.script_decisions import decisions_of
from behavgen.check.script_waveform import Waveform, waveform_of
from behavgen.model import ComparatorModel
from behavgen.resources import sim_folder

__all__ = ["Still", "harness_text", "still_instances"]

_WAIT_TICKS = 50
_INPUT_V = 0.1
_EDGES = 4
_UNCHARACTERISED_V = 1.0


@dataclass(frozen=True, slots=True, kw_only=True)
class _Start:
    """Levels at the start: whether the clock rests, and what is given to the cell."""

    name: str
    rests: bool = True
    enable: int = HIGH
    vdd_v: float
    delay_on: bool = True
    inputs: tuple[float, float] | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Still:
    """One instance and what must come of it.

    Parameters
    ----------
    run : Run
    script : Script
        What the harness plays by itself.
    waveform : Waveform
    instance : str
        Its text in the top module.
    """

    run: Run
    script: Script
    waveform: Waveform
    instance: str


def harness_text() -> str:
    """Return the module that holds one such instance."""
    return (sim_folder() / "tops" / "still_harness.sv").read_text(encoding="utf-8")


def still_instances(model: ComparatorModel, *, first_index: int) -> tuple[Still, ...]:
    """Return all instances: the clock at either level, off, at the threshold, as fast as can be.

    Parameters
    ----------
    model : ComparatorModel
    first_index : int
        Names their records.
    """
    number = count(first_index)
    return tuple(_still(model, start, next(number)) for start in _starts(model))


def _starts(model: ComparatorModel) -> Iterator[_Start]:
    cell, span = model.cell, model.box.vdd_v
    vdd_v = _UNCHARACTERISED_V if span is None else span.middle
    yield _Start(name="clock at its reset level", vdd_v=vdd_v)
    yield _Start(name="clock at its deciding level", vdd_v=vdd_v, rests=False)
    yield _Start(name="a phase of one tick", vdd_v=vdd_v, delay_on=False)
    yield _Start(name="no common mode", vdd_v=vdd_v, inputs=(_INPUT_V, -_INPUT_V))
    if cell.pins.enable is not None:
        yield _Start(name="disabled", vdd_v=vdd_v, enable=LOW)
    if cell.pins.vdd is not None and cell.supply_off_v is not None:
        yield _Start(name="supply at its threshold", vdd_v=cell.supply_off_v)
        below = float(np.nextafter(cell.supply_off_v, 0.0))
        yield _Start(name="supply below its threshold", vdd_v=below)


def _still(model: ComparatorModel, start: _Start, index: int) -> Still:
    settings = Settings(
        process=model.processes[0].name, temperature_c=middle_c(model), noise_on=False,
        delay_on=start.delay_on, seed=0,
        unresolved_mode=MODES.index(model.cell.when_unresolved),
    )  # fmt: skip
    run = Run(index=index, name=f"from the start: {start.name}", given=settings, meant=settings)
    phase = _phase_ticks(model, run) if start.delay_on else 1
    script = _script(model, start, phase)
    waveform = waveform_of(model, run, script, decisions_of(model, run, script))
    return Still(
        run=run,
        script=script,
        waveform=waveform,
        instance=_instance(model, run, script, phase),
    )


def _phase_ticks(model: ComparatorModel, run: Run) -> int:
    reference = reference_of(model, run)
    slowest = 0.0 if model.delay is None else float(np.max(reference.delay(_INPUT_V)))
    return max(1000, int(4.0 * slowest * model.cell.ticks_per_second))


def _script(model: ComparatorModel, start: _Start, phase: int) -> Script:
    resting = LOW if model.cell.decides_on == "rising" else HIGH
    first = resting if start.rests else 1 - resting
    vcm_v = 0.5 if model.box.vcm_v is None else model.box.vcm_v.middle
    levels: dict[str, Any] = {"clk": first, "enable": start.enable, "vdd": start.vdd_v,
              "inputs": start.inputs or (vcm_v + _INPUT_V, vcm_v - _INPUT_V)}  # fmt: skip
    changes = [Change(time=0, pin=pin, level=level) for pin, level in levels.items()]
    changes += [
        Change(time=_WAIT_TICKS + n * phase, pin="clk", level=1 - first if n % 2 == 0 else first)
        for n in range(_EDGES)
    ]
    return script_of(changes, after_last=phase)


def _instance(model: ComparatorModel, run: Run, script: Script, phase: int) -> str:
    codes = {process.name: process.code for process in model.processes}
    parameters = {
        "INDEX": run.index, "CLK": f"1'b{script.clk[0]}", "ENABLE": f"1'b{script.enable[0]}",
        "INP_V": repr(float(script.inp_v[0])), "INN_V": repr(float(script.inn_v[0])),
        "VDD_V": repr(float(script.vdd_v[0])), "WAIT_TICKS": _WAIT_TICKS, "PHASE_TICKS": phase,
        "TEMPERATURE_C": repr(run.given.temperature_c), "PROCESS": codes[run.given.process],
        "DELAY_ON": int(run.given.delay_on),
    }  # fmt: skip
    given = ", ".join(f".{name}({value})" for name, value in parameters.items())
    return f"  // {run.name}\n  still_harness #({given}) run_{run.index} ();\n"
