"""Decisions close beside what divides the model: nodes of the delay, the reach of the noise."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import count, cycle, pairwise, product
from typing import Any

import numpy as np
import numpy.typing as npt

from behavgen.check.directed import middle_c
from behavgen.check.phases import memory_taus_s
from behavgen.check.probe.insides import Insides, expected_insides
from behavgen.check.runs import Run, Settings, reference_of
from behavgen.check.script import HIGH, LOW, Change, Script, script_of
from behavgen.check.script_decisions import decisions_of
from behavgen.formulas.random_stream import path_seed
from behavgen.model import ComparatorModel
from behavgen.operating_point import VOLTAGE_STEPS_PER_V
from behavgen.reference import Reference
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["Beside", "beside_instances"]

NEAR = 0.004
"""Relative distance from a node or from the reach: half of what a mutant moves it by."""
_CERTAIN_SIGMAS = 8.3
_SETTLE_TICKS = 40
_STEPS_APART = 3
_UNCHARACTERISED_V = 1.0
_RESETS_TAUS = (0.3, 0.3, 0.8, 0.8, 0.3, 2.0, 0.8, 0.5)
"""Resets over the longest time constant of the memory: some repeat the one before."""
_SAME_RESETS = "the same resets"
_REMEMBERING = 24
"""Decisions under the same conditions."""

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Beside:
    """One instance, what is played to it and what must stand inside."""

    run: Run
    script: Script
    insides: Insides


def beside_instances(model: ComparatorModel, *, first_index: int) -> tuple[Beside, ...]:
    """Return all instances: noise off beside the nodes, noise on beside its reach, all forced.

    Parameters
    ----------
    model : ComparatorModel
    first_index : int
        Names their records.
    """
    number = count(first_index)
    found = []
    for name, settings in _settings(model):
        run = Run(index=next(number), name=name, given=settings, meant=settings, scripted=True)
        script = _script(model, run)
        decided = decisions_of(model, run, script)
        row = np.searchsorted(script.time, decided.edge)
        vcm_v = (script.inp_v[row] + script.inn_v[row]) * 0.5
        vdd_v = script.vdd_v[row] if model.cell.pins.vdd is not None else np.full(len(row), np.nan)
        endless = np.full(len(row), np.iinfo(np.int64).max)
        insides = expected_insides(model, run, decided.trace, endless, vcm_v, vdd_v)
        found.append(Beside(run=run, script=script, insides=insides))
    return tuple(found)


def _loudest(model: ComparatorModel, process: str) -> dict[str, Any]:
    """Return the corner of the range at which a process has the largest noise."""
    box, reference = model.box, Reference(model)
    spans = {"temp_c": box.temperature_k, "vdd": box.vdd_v, "vcm": box.vcm_v}
    ends = [(None,) if span is None else (span.low, span.high) for span in spans.values()]
    corners = []
    for levels in product(*ends):
        at = {name: level for name, level in zip(spans, levels, strict=True) if level is not None}
        if "temp_c" in at:
            at["temp_c"] -= ZERO_CELSIUS_K
        if model.cell.pins.vdd is None:
            at.pop("vdd", None)
        corners.append(at)
    filled: dict[str, Any] = {"temp_c": middle_c(model), "process": process}
    return max(corners, key=lambda at: float(reference.noise_sigma(**(filled | at))))


def _settings(model: ComparatorModel) -> Iterator[tuple[str, Settings]]:
    for process in model.processes:
        base = Settings(process=process.name, temperature_c=middle_c(model), noise_on=False,
                        memory_on=False, seed=path_seed(f"beside {process.name}"))  # fmt: skip
        yield f"beside the nodes, {process.name}", base
        if model.noise is not None:
            hot = _loudest(model, process.name).get("temp_c", middle_c(model))
            noisy = Settings(process=process.name, temperature_c=hot, memory_on=False,
                             seed=base.seed)  # fmt: skip
            yield f"beside the reach of the noise, {process.name}", noisy
        if model.memory is not None:
            remembering = Settings(process=process.name, temperature_c=middle_c(model),
                                   noise_on=False, seed=base.seed)  # fmt: skip
            yield f"the same conditions, {process.name}", remembering
            yield f"{_SAME_RESETS}, {process.name}", remembering


def _levels(model: ComparatorModel, run: Run) -> tuple[float, float]:
    """Return supply and common mode: where the noise is largest if it counts, else the middle."""
    box = model.box
    vdd_v = _UNCHARACTERISED_V if box.vdd_v is None else box.vdd_v.middle
    vcm_v = 0.5 if box.vcm_v is None else box.vcm_v.middle
    if not run.meant.noise_on:
        return vdd_v, vcm_v
    at = _loudest(model, run.meant.process)
    return at.get("vdd", vdd_v), at.get("vcm", vcm_v)


def _script(model: ComparatorModel, run: Run) -> Script:
    reference = reference_of(model, run)
    resting = LOW if model.cell.decides_on == "rising" else HIGH
    phase = _phase_ticks(reference, model)
    vdd_v, vcm_v = _levels(model, run)
    remembers = run.meant.memory_on
    resets = _RESETS_TAUS if not run.name.startswith(_SAME_RESETS) else _RESETS_TAUS[:1]
    longest = _memory_ticks(model, run, reference, vdd_v) if remembers else phase
    changes, now = [Change(time=0, pin="vdd", level=vdd_v)], _SETTLE_TICKS
    changes.append(Change(time=_SETTLE_TICKS // 2, pin="clk", level=resting))
    inputs = _inputs(model, run, reference, vdd_v, vcm_v)
    for (inp, inn), reset in zip(inputs, cycle(resets), strict=False):
        now += int(reset * longest)
        changes.append(Change(time=now, pin="inputs", level=(inp, inn)))
        changes.append(Change(time=now + _SETTLE_TICKS, pin="clk", level=1 - resting))
        changes.append(Change(time=now + _SETTLE_TICKS + phase, pin="clk", level=resting))
        now += phase + 2 * _SETTLE_TICKS
    return script_of(changes, after_last=_SETTLE_TICKS)


def _memory_ticks(model: ComparatorModel, run: Run, reference: Reference, vdd_v: float) -> int:
    """Return the longest time constant of the memory."""
    taus_s = memory_taus_s(
        model, reference, vdd=vdd_v, vcm=0.5, temp_c=run.meant.temperature_c,
        process=run.meant.process,
    )  # fmt: skip
    return int(np.max(taus_s, initial=1e-10) * model.cell.ticks_per_second)


def _phase_ticks(reference: Reference, model: ComparatorModel) -> int:
    slowest = 0.0 if model.delay is None else float(np.max(reference.delay(1e-15)))
    return max(1000, int(8.0 * slowest * model.cell.ticks_per_second))


def _inputs(
    model: ComparatorModel, run: Run, reference: Reference, vdd_v: float, vcm_v: float
) -> Iterator[tuple[float, float]]:
    """Return inputs, each with a common mode of its own, so that all is worked out anew."""
    first = np.floor(vcm_v * VOLTAGE_STEPS_PER_V)
    condition: dict[str, Any] = {
        "vdd": vdd_v,
        "temp_c": run.meant.temperature_c,
        "process": run.meant.process,
    }
    for n, overdrive in enumerate(_overdrives(model, run, reference, vcm_v, condition)):
        stays = run.meant.memory_on and not run.name.startswith(_SAME_RESETS)
        apart = 0 if stays else _STEPS_APART
        vcm = float((first + apart * n) / VOLTAGE_STEPS_PER_V)
        vdiff = float(reference.offset(vcm=vcm, **condition)) + overdrive
        yield vcm + 0.5 * vdiff, vcm - 0.5 * vdiff


def _overdrives(
    model: ComparatorModel, run: Run, reference: Reference, vcm_v: float, condition: dict[str, Any]
) -> list[float]:
    if run.meant.memory_on:
        levels = _between_nodes(model)
        return [levels[n % len(levels)] * (-1.0) ** (n // 3) for n in range(_REMEMBERING)]
    if run.meant.noise_on:
        reach = _CERTAIN_SIGMAS * float(reference.noise_sigma(vcm=vcm_v, **condition))
        centres, shares = [reach], (5e-4, 2e-3, NEAR)
    else:
        centres = [] if model.delay is None else list(model.delay.node_overdrive_v)
        shares = (NEAR / 4, NEAR, 1.7 * NEAR)
    return [
        sign * centre * (1.0 + side * share)
        for centre in centres
        for share in shares
        for side in (-1.0, 1.0)
        for sign in (-1.0, 1.0)
    ]


def _between_nodes(model: ComparatorModel) -> list[float]:
    """Return overdrives of every part of the delay's curve, the largest first."""
    nodes = (1e-3, 1e-1) if model.delay is None else model.delay.node_overdrive_v
    between = [float(np.sqrt(a * b)) for a, b in pairwise(nodes)]
    return [2.0 * nodes[-1], *reversed(between), 0.5 * nodes[0]]
