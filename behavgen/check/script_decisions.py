"""The decisions that a script holds, and what the reference makes of them."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from behavgen.check.runs import Run, reference_of
from behavgen.check.script import HIGH, LOW, Script
from behavgen.model import Cell, ComparatorModel
from behavgen.trace import Trace

__all__ = ["ScriptDecisions", "decisions_of", "is_on"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]
Mask = npt.NDArray[np.bool_]

_ENDLESS = np.iinfo(np.int64).max // 4


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ScriptDecisions:
    """Decision edges of a script, shape (N,) each.

    Parameters
    ----------
    edge : ndarray of int
        In ticks.
    number_at_edge, number_sampled : ndarray of bool
        Whether the input is a number then.
    trace : Trace
        Of decisions that are evaluated; of others it says nothing.
    """

    edge: Integers
    number_at_edge: Mask
    number_sampled: Mask
    trace: Trace


def is_on(cell: Cell, script: Script) -> Mask:
    """Return from each moment on whether the cell is supplied and enabled, shape (M,)."""
    on = np.full(len(script.time), True)
    if cell.pins.vdd is not None:
        on &= np.isfinite(script.vdd_v)
        on &= script.vdd_v >= (-np.inf if cell.supply_off_v is None else cell.supply_off_v)
    if cell.pins.enable is not None:
        on &= script.enable == HIGH
    return on


def decisions_of(model: ComparatorModel, run: Run, script: Script) -> ScriptDecisions:
    """Find the decision edges of a script and ask the reference about them.

    Parameters
    ----------
    model : ComparatorModel
    run : Run
    script : Script
    """
    reference = reference_of(model, run)
    rest = LOW if model.cell.decides_on == "rising" else HIGH
    before = np.append(-1, script.clk[:-1])
    begins = np.flatnonzero((before == rest) & (script.clk == 1 - rest))
    ends = np.flatnonzero((before == 1 - rest) & (script.clk == rest))
    edge, end = script.time[begins], np.append(script.time[ends], _ENDLESS)
    phase = end[np.searchsorted(end, edge, side="right")] - edge
    vcm = np.nan_to_num((script.inp_v + script.inn_v) * 0.5, posinf=0.0, neginf=0.0)[begins]
    vdd = np.nan_to_num(script.vdd_v)[begins]
    fixed = {"temp_c": run.meant.temperature_c, "process": run.meant.process}
    given: dict[str, Any] = {**fixed, "vcm": vcm}
    if model.cell.pins.vdd is not None:
        given["vdd"] = vdd
    aperture = reference.trace(np.zeros(len(edge)), phase, **given).aperture_ticks
    sampled = np.searchsorted(script.time, edge + aperture, side="right") - 1
    vdiff = script.inp_v - script.inn_v
    trace = reference.trace(
        np.nan_to_num(vdiff[sampled], posinf=0.0, neginf=0.0), phase,
        _reset_ticks(model, script, begins, ends, vdiff, sampled), **given,
    )  # fmt: skip
    return ScriptDecisions(
        edge=edge, number_at_edge=np.isfinite(vdiff[begins]),
        number_sampled=np.isfinite(vdiff[sampled]), trace=trace,
    )  # fmt: skip


def _reset_ticks(
    model: ComparatorModel, script: Script, begins: Integers, ends: Integers, vdiff: Floats,
    sampled: Integers,
) -> Integers:  # fmt: skip
    """Return the reset before each decision edge; -1 where the outputs were lost since the last."""
    edge, end = script.time[begins], np.append(-1, script.time[ends])
    reset = edge - end[np.searchsorted(end, edge, side="left") - 1]
    lost = np.flatnonzero(~is_on(model.cell, script) | (script.clk > HIGH))
    count = np.searchsorted(lost, begins, side="right")
    bad = ~np.isfinite(vdiff[begins]) | ~np.isfinite(vdiff[sampled])
    idle = np.isin(begins, lost) | bad
    forgets = (np.diff(count, prepend=0) > 0) | np.append(False, idle[:-1])
    return np.where(forgets, -1, reset)
