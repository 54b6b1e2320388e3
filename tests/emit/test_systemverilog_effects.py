"""Memory, aperture and energy of the emitted module, decision by decision against the reference."""

from __future__ import annotations

from dataclasses import replace
from typing import NamedTuple

import numpy as np
import pytest

from behavgen.model import EnergyEffect, MemoryEffect, MemoryTerm, Range
from behavgen.reference import Reference
from tests.emit.systemverilog_bench import Moment, play
from tests.example_models import complete_model, constant_surface, full_surface

DECISIONS = 600
COMPLETE = complete_model(when_unresolved="coin")
BOTH = ("typ", "slow")
FAST = MemoryTerm(
    shift=full_surface("V", "log", (-3.6, 0.2, 0.1, 0.1, 0.05, 0.0, 0.02), 0.1),
    tau=full_surface("s", "log", (-24.4, 0.05, -0.1, 0.02, 0.0, 0.0, 0.0), 0.05),
)
FIXED = constant_surface("J", "log", -30.8, *BOTH)
MODELS = {
    "complete": COMPLETE,
    "held outputs": complete_model(in_reset="hold", when_unresolved="coin"),
    "falling edge": complete_model(decides_on="falling", when_unresolved="coin"),
    "one term": replace(COMPLETE, memory=MemoryEffect(terms=(FAST,), floor=None, cap_v=0.02)),
    "only a floor": replace(
        COMPLETE,
        memory=MemoryEffect(terms=(), floor=full_surface("V", "log", (-5.0,) * 7), cap_v=1.0),
    ),
    "no memory": replace(COMPLETE, memory=None),
    "no aperture": replace(COMPLETE, aperture=None),
    "no energy": replace(COMPLETE, energy=None),
    "no noise": replace(COMPLETE, noise=None),
    "constant energy": replace(COMPLETE, energy=EnergyEffect(law="constant", fixed=FIXED)),
    "energy over overdrive": replace(
        COMPLETE,
        energy=EnergyEffect(
            law="overdrive", fixed=FIXED, overdrive_v=Range(low=1e-4, high=0.1),
            rise=full_surface("J", "log", (-33.0, 0.1, 0.2, 0.1, 0.0, 0.0, 0.0)),
        ),
    ),
}  # fmt: skip


class Stimulus(NamedTuple):
    """One entry a decision; inputs as they count, and as they are before and after that."""

    inp_v: np.ndarray
    inn_v: np.ndarray
    around_v: np.ndarray
    vdd_v: np.ndarray
    reset: np.ndarray
    phase: np.ndarray


def stimulus(reference: Reference, condition: dict[str, object]) -> Stimulus:
    """Return resets from 3 ps to 20 ns, overdrives about as large as the memory, short phases."""
    rng = np.random.default_rng(11)
    kept = np.cumsum(rng.random(DECISIONS) < 0.3)
    vcm = rng.choice([0.47, 0.5, 0.61, 0.65, 0.8, 0.83], DECISIONS)[kept - kept[0]]
    vdd = rng.choice([1.0, 1.08, 1.2, 1.3, 1.4], DECISIONS)[kept - kept[0]]
    size = 10.0 ** rng.uniform(-4.5, -0.5, DECISIONS) * rng.choice([-1.0, 1.0], DECISIONS)
    vdiff = reference.offset(vdd=vdd, vcm=vcm, **condition) + size
    reset = np.rint(10.0 ** rng.uniform(3.5, 7.3, DECISIONS)).astype(np.int64)
    reset[rng.random(DECISIONS) < 0.3] = 150_000
    aperture = trace(reference, vdiff, 10**9, reset, vdd=vdd, vcm=vcm, **condition).aperture_ticks
    phase = rng.choice([60_000, 400_000, 10**6], DECISIONS)
    short = rng.random(DECISIONS) < 0.1
    phase[short] = np.maximum(aperture + rng.integers(-3, 4, DECISIONS), 1)[short]
    around = rng.choice([-0.2, 0.2], DECISIONS)
    return Stimulus(vcm + 0.5 * vdiff, vcm - 0.5 * vdiff, around, vdd, reset, phase)


def trace(reference, vdiff, phase, reset, **condition):
    first_remembers_nothing = np.append(-1, reset[1:])
    return reference.trace(vdiff, phase, first_remembers_nothing, **condition)


def expected_of(reference, played: Stimulus, condition):
    vdiff, vcm = played.inp_v - played.inn_v, (played.inp_v + played.inn_v) * 0.5
    return trace(reference, vdiff, played.phase, played.reset, vdd=played.vdd_v, vcm=vcm,
                 **condition)  # fmt: skip


def moments(played: Stimulus, edges, ends, aperture, deciding: str) -> list[Moment]:
    """Return the levels around each edge; the inputs that count are there for two ticks only."""
    resting = "1" if deciding == "0" else "0"
    made = [Moment(tick=10, clk=resting, inp_v=0.65, inn_v=0.65)]
    for k, edge in enumerate(edges):
        vcm = 0.5 * (played.inp_v[k] + played.inn_v[k])
        moved = {"inp_v": vcm + played.around_v[k], "inn_v": vcm - played.around_v[k]}
        counts = {"inp_v": float(played.inp_v[k]), "inn_v": float(played.inn_v[k])}
        at_edge = moved if aperture[k] else counts
        events = [
            (edge - 2, {"vdd_v": float(played.vdd_v[k]), **at_edge}),
            (edge, {"clk": deciding}),
            *([(edge + aperture[k] - 1, counts)] if aperture[k] else []),
            (edge + aperture[k] + 1, moved),
            (ends[k], {"clk": resting}),
            (ends[k] + 1, {"report": True}),
        ]
        for tick, levels in sorted(events, key=lambda event: event[0]):
            made.append(made[-1].at(int(tick), **levels))
    return made


@pytest.mark.parametrize("name", MODELS)
@pytest.mark.parametrize("process", BOTH)
def test_every_decision_is_that_of_the_reference(name, process, tmp_path):
    model = MODELS[name]
    reference = Reference(model, seed=77)
    condition = {"process": process, "temp_c": 27.0}
    played = stimulus(reference, condition)
    expected = expected_of(reference, played, condition)
    ends = 1000 + np.cumsum(played.reset + played.phase)
    edges = ends - played.phase
    deciding = "1" if model.cell.decides_on == "rising" else "0"
    levels = moments(played, edges, ends, expected.aperture_ticks, deciding)
    found = play(model, levels, tmp_path, {"PROCESS": {"typ": 0, "slow": 3}[process]})

    sampled = played.phase > expected.aperture_ticks
    overdrive = np.array([inside.overdrive_v for inside in found.insides])
    assert np.array_equal(overdrive[sampled], expected.overdrive_v[sampled])
    before = np.append(0.0, overdrive[:-1])
    never = played.phase < expected.aperture_ticks
    assert np.array_equal(overdrive[never], before[never])

    total = np.array([inside.energy_j for inside in found.insides])
    assert model.energy is None or total[-1] > 0.0
    assert np.allclose(total, np.cumsum(expected.energy_j), rtol=1e-12, atol=0.0)

    for k in np.flatnonzero(~expected.unresolved):
        shown = found.before(ends[k] + 1)
        assert shown.pins == f"{expected.bits[k]}{1 - expected.bits[k]}0", k
        late = edges[k] + expected.delay_ticks[k]
        assert shown.tick <= edges[k] or abs(shown.tick - late) <= 1, k
    for k in np.flatnonzero(expected.unresolved):
        assert found.before(ends[k]).tick <= edges[k], k
    if model.memory is not None:
        assert len(set(np.sign(expected.memory_v))) == 3
    assert 0.1 < expected.unresolved.mean() < 0.6


PARAMETERS = [
    ({"MEMORY_ON": 0}, {"memory": False}),
    ({"DELAY_ON": 0}, {"delay_on": False}),
    ({"FORCE_UNRESOLVED_EVERY": 3}, {"force_unresolved_every": 3}),
]


@pytest.mark.parametrize(("parameters", "switches"), PARAMETERS)
def test_switches_are_those_of_the_reference(parameters, switches, tmp_path):
    reference = Reference(COMPLETE, seed=77, **switches)
    condition = {"process": "typ", "temp_c": 27.0}
    played = stimulus(reference, condition)
    expected = expected_of(reference, played, condition)
    ends = 1000 + np.cumsum(played.reset + played.phase)
    edges = ends - played.phase
    levels = moments(played, edges, ends, expected.aperture_ticks, "1")
    found = play(COMPLETE, levels, tmp_path, parameters)
    sampled = played.phase > expected.aperture_ticks
    overdrive = np.array([inside.overdrive_v for inside in found.insides])
    assert np.array_equal(overdrive[sampled], expected.overdrive_v[sampled])
    total = np.array([inside.energy_j for inside in found.insides])
    assert np.allclose(total, np.cumsum(expected.energy_j), rtol=1e-12, atol=0.0)


START = Moment(tick=10, clk="0", inp_v=0.7, inn_v=0.6)
LOSSES = {
    "supply": ({"vdd_v": 0.3}, {"vdd_v": 1.2}, 2),
    "clock": ({"clk": "x"}, {"clk": "1"}, 4),
    "input": ({"inp_v": float("nan")}, {"inp_v": 0.7}, 3),
}


@pytest.mark.parametrize("name", LOSSES)
def test_what_cancels_a_decision_cancels_its_sampling(name, tmp_path):
    lost, found_again, cause = LOSSES[name]
    reference = Reference(replace(COMPLETE, noise=None), seed=77)
    aperture = int(reference.trace(0.1, 10**6, vdd=1.2, vcm=0.65, temp_c=27.0).aperture_ticks[0])
    # Shown once; then lost before the sampling instant, or unknown at it; then a decision anew
    steps = [
        (1_000_000, {"clk": "1"}), (2_000_000, {"clk": "0"}), (3_000_000, {"clk": "1"}),
        (3_000_000 + aperture - 1, lost), (3_000_000 + aperture + 1, found_again),
        (4_000_000, {"clk": "0", "report": True}), (4_200_000, {"clk": "1"}),
        (5_000_000, {"clk": "0"}), (6_000_000, {"report": True}),
    ]  # fmt: skip
    levels = [START]
    for tick, changed in steps:
        levels.append(levels[-1].at(tick, **changed))
    model = replace(COMPLETE, noise=None)
    played = play(model, levels, tmp_path)
    first, last = played.insides
    trace = reference.trace([0.1, 0.1], 10**6, vdd=1.2, vcm=0.65, temp_c=27.0)
    vdiff = 0.7 - 0.6
    alone = reference.trace(vdiff, 10**6, vdd=1.2, vcm=(0.7 + 0.6) * 0.5, temp_c=27.0)
    assert first.energy_j == pytest.approx(trace.energy_j[0], rel=1e-9)
    assert played.before(3_100_000).x_cause == cause
    assert last.overdrive_v == alone.overdrive_v[0]  # nothing remembers what was shown first
    assert last.energy_j == pytest.approx(2.0 * trace.energy_j[0], rel=1e-9)
