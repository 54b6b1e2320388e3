"""Memory, aperture and energy of the event-driven Verilog-A model, against the reference."""

from __future__ import annotations

import numpy as np
import pytest
from scipy import stats

from behavgen.reference import Reference
from tests.emit.verilog_a_event_circuit import Circuit, Cycle
from tests.example_models import complete_model, with_energy

TOLERANCE_S = 0.01e-12
NOMINAL = {"vdd": 1.2, "temp_c": 27.0, "vcm": 0.65}
QUIET = {"NOISE_ON": 0}


@pytest.fixture(scope="module")
def reference():
    return Reference(complete_model(), noise=False)


def traced(reference, cycles, **condition):
    """Return what the reference makes of the same cycles, at one condition."""
    return reference.trace(
        [cycle.vdiff for cycle in cycles],
        [round(cycle.phase_s * 1e15) for cycle in cycles],
        [-1, *(round(cycle.reset_s * 1e15) for cycle in cycles[1:])],
        **NOMINAL | condition,
    )


def played(folder, cycles, model=None, *, observed="", sources=None, **parameters):
    circuit = Circuit(
        model=model or complete_model(), folder=folder, parameters=QUIET | parameters,
        observed=observed,
    )  # fmt: skip
    return circuit.play(cycles, **(sources or {}))


def delays(found, vdd=1.2):
    apart = np.abs(found.waves["outp"] - found.waves["outn"])
    return np.array([found.crossing(apart, vdd / 2, edge) - edge for edge in found.edges])


# -- Memory --------------------------------------------------------------------------------------


def test_memory_of_every_reset_length_is_that_of_the_reference(reference, tmp_path):
    """Delays at millivolts tell the shift: 1 % of it moves them by ten times the tolerance."""
    offset = float(reference.offset(**NOMINAL))
    random = np.random.default_rng(5)
    cycles = [
        Cycle(vdiff=offset + random.choice([-1, 1]) * overdrive, reset_s=reset)
        for reset in (30e-12, 60e-12, 90e-12, 200e-12, 500e-12, 2e-9)
        for overdrive in (2e-3, 5e-3, 20e-3)
    ]
    found, expected = played(tmp_path, cycles), traced(reference, cycles)
    assert len(set(np.sign(expected.memory_v[1:]))) == 2
    np.testing.assert_allclose(
        delays(found), expected.delay_ticks * 1e-15, rtol=0, atol=TOLERANCE_S
    )
    np.testing.assert_array_equal(
        found.apart(found.ends - 10e-12) > 0.0, expected.overdrive_v > 0.0
    )


@pytest.mark.parametrize("reset_s", [40e-12, 90e-12, 300e-12, 5e-9])
def test_trip_points_after_a_one_and_after_a_zero_lie_two_shifts_apart(
    reset_s, reference, tmp_path
):
    shift = float(reference.memory_shift(reset_s, **NOMINAL))
    offset = float(reference.offset(**NOMINAL))
    cycles, ones = [], []
    for before in (1, -1):
        for beside in (-1e-6, 1e-6):
            trip = offset - before * shift
            cycles += [Cycle(vdiff=offset + before * 0.1), Cycle(vdiff=trip + beside,
                                                                   reset_s=reset_s)]  # fmt: skip
            ones.append(beside > 0)
    found = played(tmp_path, cycles)
    assert (found.apart(found.ends - 10e-12)[1::2] > 0.0).tolist() == ones


def test_nothing_is_remembered_where_nothing_was_shown(reference, tmp_path):
    """Neither after power-up, nor an unresolved or a forced decision, nor when switched off."""
    offset = float(reference.offset(**NOMINAL))
    probe = Cycle(vdiff=offset + 1e-3, reset_s=60e-12)
    free = float(reference.delay(1e-3, **NOMINAL))
    sequences = (
        ([probe], {}, 0),
        ([Cycle(vdiff=offset + 0.1), Cycle(vdiff=offset, phase_s=0.15e-9), probe], {}, 2),
        ([Cycle(vdiff=offset - 0.1), probe], {"FORCE_UNRESOLVED_EVERY": 1}, None),
        ([Cycle(vdiff=offset + 0.1), probe], {"MEMORY_ON": 0}, 1),
    )
    for cycles, settings, number in sequences:
        late = delays(played(tmp_path, cycles, **settings))
        if number is None:
            assert np.isnan(late).all()
        else:
            assert late[number] == pytest.approx(free, abs=TOLERANCE_S)


def test_a_supply_that_failed_takes_the_memory_with_it(reference, tmp_path):
    offset = float(reference.offset(**NOMINAL))
    cycles = [Cycle(vdiff=offset + 0.1), Cycle(vdiff=offset + 1e-3)]
    end = cycles[0].reset_s + cycles[0].phase_s
    dip = [(0.0, 1.2), (end - 0.5e-9, 1.2), (end - 0.45e-9, 0.0), (end - 0.4e-9, 0.0),
           (end - 0.35e-9, 1.2)]  # fmt: skip
    found = played(tmp_path, cycles, sources={"vdd": dip})
    expected = float(reference.delay(1e-3, **NOMINAL))
    assert delays(found)[1] == pytest.approx(expected, abs=TOLERANCE_S)


@pytest.mark.slow
def test_the_s_curve_after_a_decision_is_that_of_the_reference_moved_by_the_shift(tmp_path):
    """4 levels of 120 decisions, each after a one: false alarm 4e-4, fixed seed."""
    noisy = Reference(complete_model())
    sigma, offset = float(noisy.noise_sigma(**NOMINAL)), float(noisy.offset(**NOMINAL))
    reset_s = 0.3e-9
    shift = float(noisy.memory_shift(reset_s, **NOMINAL))
    levels = np.array([-1.5, -0.5, 0.5, 1.5])
    cycles = []
    for level in np.repeat(levels, 120):
        cycles += [
            Cycle(vdiff=offset + 0.1, phase_s=0.5e-9, reset_s=0.5e-9),
            Cycle(vdiff=offset - shift + level * sigma, phase_s=1e-9, reset_s=reset_s),
        ]
    found = played(tmp_path, cycles, NOISE_ON=1, SEED=7)
    ones = (found.apart(found.ends - 10e-12)[1::2] > 0.0).reshape(len(levels), -1).sum(axis=1)
    low, high = stats.binom.interval(1 - 1e-4, 120, stats.norm.cdf(levels))
    assert np.all((low <= ones) & (ones <= high)), ones


# -- Aperture ------------------------------------------------------------------------------------


@pytest.mark.parametrize("early_s", [1e-12, -1e-12])
def test_the_input_counts_at_the_centre_of_the_aperture(early_s, reference, tmp_path):
    """It steps across the trip point a picosecond before or after that moment."""
    offset = float(reference.offset(**NOMINAL))
    trace = traced(reference, [Cycle()])
    centre_s = float(trace.aperture_ticks[0]) * 1e-15
    assert centre_s == pytest.approx(20e-12, abs=0.5e-12)
    cycle = Cycle(vdiff=offset - 0.01)
    moment = cycle.reset_s + centre_s - early_s
    half = [(0.0, -0.005), (moment - 0.1e-12, -0.005), (moment + 0.1e-12, 0.005)]
    sources = {
        "inp": [(t, 0.65 + offset / 2 + v) for t, v in half],
        "inn": [(t, 0.65 - offset / 2 - v) for t, v in half],
    }
    found = played(tmp_path, [cycle], sources=sources)
    assert (found.apart(found.ends - 10e-12)[0] > 0.0) == (early_s > 0.0)
    expected = float(reference.delay(0.01, **NOMINAL))
    assert delays(found)[0] == pytest.approx(expected, abs=TOLERANCE_S)


def test_a_phase_that_ends_before_the_input_counts_decides_nothing(reference, tmp_path):
    cycles = [Cycle(vdiff=0.3, phase_s=15e-12), Cycle(vdiff=0.3)]
    found = played(tmp_path, cycles)
    reset_s = float(reference.reset_delay(**NOMINAL))
    assert found.levels(found.ends[0] + 0.6 * reset_s) == pytest.approx([0.6, 0.6], abs=1e-6)
    assert found.levels(found.edges[1]) == pytest.approx([1.2, 1.2])
    assert found.levels(found.ends[1]) == pytest.approx([1.2, 0.0])


# -- Energy --------------------------------------------------------------------------------------


@pytest.mark.parametrize("law", ["constant", "delay", "overdrive"])
def test_the_running_total_grows_as_in_the_reference(law, tmp_path):
    model = with_energy(law)
    reference = Reference(model, noise=False)
    offset = float(reference.offset(**NOMINAL))
    cycles = [
        Cycle(vdiff=offset + overdrive, phase_s=phase)
        for overdrive, phase in ((0.2, 2e-9), (1e-3, 2e-9), (-0.04, 2e-9), (3e-4, 0.12e-9),
                                 (0.2, 2e-9))
    ]  # fmt: skip
    found = played(tmp_path, cycles, model, observed="1e12 * energy_j")
    expected = traced(reference, cycles)
    assert expected.unresolved.tolist() == [False, False, False, True, False]
    before = [found.level("outn", edge) for edge in found.edges]
    after = [found.level("outn", end + 0.1e-9) for end in found.ends]
    grown = np.subtract(after, before) * 1e-12
    np.testing.assert_allclose(grown, expected.energy_j, rtol=1e-4)
