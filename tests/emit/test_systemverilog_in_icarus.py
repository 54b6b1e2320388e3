"""The emitted module decides as the reference does, bits exactly and times to a tick.

In a plain bench. The check (`behavgen.check`) compares what the pins show; here the effective
overdrive is read inside, so that an error far from the threshold shows as well.
"""

from __future__ import annotations

import struct
import subprocess
from dataclasses import replace
from pathlib import Path
from typing import NamedTuple

import numpy as np
import pytest

from behavgen.emit.systemverilog import systemverilog
from behavgen.model import ComparatorModel
from behavgen.reference import Reference
from tests.example_models import full_model

BENCH = Path(__file__).with_name("decision_bench.sv")
DECISIONS = 1000
SEED, OFFSET_SHIFT_V = 77, 0.0021


def restricted(model: ComparatorModel, *conditions: str) -> ComparatorModel:
    """Return the model with surfaces that depend on some conditions only."""

    def only(surface):
        kept = [k for k, axis in enumerate(surface.axes) if axis.condition in conditions]
        lost = [k for k in range(len(surface.axes)) if k not in kept]
        terms = [t for t, p in enumerate(surface.exponents) if not any(p[k] for k in lost)]
        return replace(
            surface,
            axes=tuple(surface.axes[k] for k in kept),
            exponents=tuple(tuple(surface.exponents[t][k] for k in kept) for t in terms),
            variants=tuple(
                replace(v, coefficients=tuple(v.coefficients[t] for t in terms))
                for v in surface.variants
            ),
        )

    return replace(
        model,
        offset=replace(model.offset, surface=only(model.offset.surface)),
        mismatch=replace(model.mismatch, components=tuple(map(only, model.mismatch.components))),
        noise=replace(model.noise, surface=only(model.noise.surface)),
        delay=replace(
            model.delay, tau=only(model.delay.tau), nodes=tuple(map(only, model.delay.nodes))
        ),
        reset=replace(model.reset, surface=only(model.reset.surface)),
    )


def with_nodes(model: ComparatorModel, count: int) -> ComparatorModel:
    delay = replace(model.delay, nodes=model.delay.nodes[:count],
                    node_overdrive_v=model.delay.node_overdrive_v[:count])  # fmt: skip
    return replace(model, delay=delay)


FULL = full_model(when_unresolved="coin")
MODELS = {
    "full": FULL,
    "in ps": full_model(when_unresolved="coin", time_precision="1ps"),
    "one process": replace(FULL, processes=FULL.processes[:1]),
    "one node": with_nodes(FULL, 1),
    "two nodes": with_nodes(FULL, 2),
    "three nodes": with_nodes(FULL, 3),
    "temperature only": restricted(FULL, "temperature_k"),
    "supply only": restricted(FULL, "vdd_v"),
    "common mode only": restricted(FULL, "vcm_v"),
    "constant": restricted(FULL),
    "no mismatch": replace(FULL, mismatch=None),
    "no noise": replace(FULL, noise=None),
    "no offset": replace(FULL, offset=None),
}
CASES = [(name, "typ", 27.0) for name in MODELS] + [("full", "slow", 85.0), ("full", "typ", 140.0)]


class Stimulus(NamedTuple):
    """One entry a decision."""

    inp_v: np.ndarray
    inn_v: np.ndarray
    vdd_v: np.ndarray
    phase: np.ndarray
    gap: np.ndarray


def stimulus(reference: Reference, condition: dict[str, object]) -> Stimulus:
    """Return inputs from inside the noise to full scale, phases also too short."""
    rng = np.random.default_rng(3)
    vcm = rng.choice([0.47, 0.5, 0.61, 0.65, 0.8, 0.83], DECISIONS)
    vdd = rng.choice([1.0, 1.08, 1.2, 1.3, 1.32, 1.4], DECISIONS)
    kept = rng.random(DECISIONS) < 0.5  # conditions that stay are taken from what is known
    for k in np.flatnonzero(kept)[1:]:
        vcm[k], vdd[k] = vcm[k - 1], vdd[k - 1]
    size = 10.0 ** rng.uniform(-7.0, -0.2, DECISIONS) * rng.choice([-1.0, 1.0], DECISIONS)
    trip = reference.offset(vdd=vdd, vcm=vcm, **condition) + OFFSET_SHIFT_V
    inp, inn = vcm + 0.5 * (trip + size), vcm - 0.5 * (trip + size)
    made = traced(reference, Stimulus(inp, inn, vdd, np.full(DECISIONS, 10**9), vdd), condition)
    spare = rng.choice([-3, 3, 5000], DECISIONS)
    return Stimulus(inp, inn, vdd, np.maximum(made.delay_ticks + spare, 4), made.reset_ticks + 50)


def traced(reference, played, condition):
    vdiff, vcm = played.inp_v - played.inn_v, (played.inp_v + played.inn_v) * 0.5
    return reference.trace(vdiff, played.phase, vdd=played.vdd_v, vcm=vcm, **condition)


def simulated(model, played, process, temp_c, folder: Path) -> list[list[str]]:
    """Return overdrive, ready, bit and flag, and reset of each decision."""
    (folder / "cell.sv").write_text(systemverilog(model).text)
    words = [
        "".join(f" {struct.pack('>d', v).hex()}" for v in levels)
        for levels in zip(played.inp_v, played.inn_v, played.vdd_v, strict=True)
    ]
    gaps = np.append(60, played.gap[:-1])
    lines = zip(gaps, played.phase, words, strict=True)
    text = "".join(f"{gap} {phase}{levels}\n" for gap, phase, levels in lines)
    (folder / "decisions.txt").write_text(text)
    codes = {one.name: one.code for one in model.processes}
    macros = {
        "CELL": model.cell.name, "SEED": SEED, "PROCESS": codes[process], "TEMPERATURE_C": temp_c,
        "OFFSET_SHIFT_V": OFFSET_SHIFT_V,
    }  # fmt: skip
    bench = BENCH.read_text().replace("1fs", model.cell.time_precision)
    (folder / "bench.sv").write_text(bench)
    options = [f"-D{name}={value}" for name, value in macros.items()]
    sources = ["cell.sv", "bench.sv"]
    subprocess.run(
        ["iverilog", "-g2012", *options, "-o", "bench", *sources], cwd=folder, check=True
    )
    done = subprocess.run(
        ["vvp", "-n", "bench"], cwd=folder, check=True, capture_output=True, text=True
    )
    return [line.split() for line in done.stdout.splitlines()]


@pytest.mark.parametrize(("name", "process", "temp_c"), CASES)
def test_overdrive_delay_bit_and_reset_are_those_of_the_reference(name, process, temp_c, tmp_path):
    model = MODELS[name]
    reference = Reference(model, seed=SEED, mismatch=True, offset_shift_v=OFFSET_SHIFT_V)
    condition = {"process": process, "temp_c": temp_c}
    played = stimulus(reference, condition)
    found = simulated(model, played, process, temp_c, tmp_path)
    assert len(found) == DECISIONS
    expected = traced(reference, played, condition)
    overdrive = np.array([struct.unpack(">d", bytes.fromhex(row[0]))[0] for row in found])
    assert np.array_equal(overdrive, expected.overdrive_v)
    ready = np.array([int(row[1]) for row in found])
    assert np.abs(ready - np.where(expected.unresolved, 0, expected.delay_ticks)).max() <= 1
    shown = [row[2] for row in found]
    flags = expected.unresolved.astype(int)
    assert shown == [f"{b}{u}" for b, u in zip(expected.bits, flags, strict=True)]
    reset = np.array([int(row[3]) for row in found])
    wait = np.where(expected.unresolved, np.maximum(expected.reset_ticks, 1), expected.reset_ticks)
    assert np.abs(reset - wait).max() <= 1
    assert 0.2 < expected.unresolved.mean() < 0.5
