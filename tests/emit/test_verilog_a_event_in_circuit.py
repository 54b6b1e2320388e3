"""The emitted event-driven Verilog-A model executed, against the reference and closed forms."""

from __future__ import annotations

import itertools
from dataclasses import replace

import numpy as np
import pytest
from scipy import stats

from behavgen.emit.verilog_a_event import verilog_a_event
from behavgen.model import Range
from behavgen.reference import Reference
from tests.emit.delay_laws import LAWS, model_with
from tests.emit.verilog_a_event_circuit import Circuit, Cycle
from tests.example_models import full_model, minimal_model, renamed_pins_model

TOLERANCE_S = 0.01e-12
RESET_LEVELS = {"high": 1.2, "low": 0.0, "mid": 0.6, "hold": 0.6}
NOMINAL = {"vdd": 1.2, "temp_c": 27.0, "vcm": 0.65}
QUIET = {"NOISE_ON": 0}
CODES = {"typ": 0, "slow": 3}
EDGE_S = 4e-12
"""Duration of the full model's output edges."""


@pytest.fixture(scope="module")
def reference():
    return Reference(full_model(), noise=False)


def circuit(folder, model=None, **parameters):
    """Return a circuit without noise."""
    return Circuit(model=model or full_model(), folder=folder, parameters=QUIET | parameters)


def on_grid(volts):
    """Round to the resolution of the reference's conditions, so that they are the same here."""
    return float(np.floor(volts * 2.0**20 + 0.5) / 2.0**20)


def on_kelvin_grid(temp_c):
    return float(np.floor((temp_c + 273.15) * 2.0**10 + 0.5) / 2.0**10 - 273.15)


def delays(played, moments, cycles):
    """Return when the outputs stand half the supply apart, from these moments on."""
    apart = np.abs(played.waves["outp"] - played.waves["outn"])
    return [
        played.crossing(apart, cycle.vdd / 2, moment) - moment
        for cycle, moment in zip(cycles, moments, strict=True)
    ]


@pytest.mark.slow
@pytest.mark.parametrize(("process", "temp_c"), [("typ", -40.0), ("typ", 125.0), ("slow", 27.0)])
def test_bits_and_delays_are_those_of_the_reference_over_the_whole_range(
    process, temp_c, reference, tmp_path
):
    overdrives = (1e-6, -1e-6, 1e-4, -1e-3, 3e-3, -0.02, 0.1, -0.3, 0.3)
    temp_c = on_kelvin_grid(temp_c)
    cycles, expected, resets = [], [], []
    for vdd, vcm, overdrive in itertools.product((1.08, 1.32), (0.5, 0.8), overdrives):
        condition = {"vdd": on_grid(vdd), "vcm": on_grid(vcm)}
        known = condition | {"temp_c": temp_c, "process": process}
        cycles.append(Cycle(vdiff=float(reference.offset(**known)) + overdrive, **condition))
        expected.append(float(reference.delay(abs(overdrive), **known)))
        resets.append(float(reference.reset_delay(**known)))
    played = circuit(tmp_path, TEMPERATURE_C=temp_c, PROCESS=CODES[process]).play(cycles)
    np.testing.assert_allclose(
        delays(played, played.edges, cycles), expected, rtol=0, atol=TOLERANCE_S
    )
    np.testing.assert_allclose(
        delays(played, played.ends, cycles), resets, rtol=0, atol=TOLERANCE_S
    )
    signs = np.sign(np.tile(overdrives, 4))
    np.testing.assert_array_equal(np.sign(played.apart(played.ends - 10e-12)), signs)


@pytest.mark.parametrize("law", LAWS)
def test_any_falling_law_is_carried(law, tmp_path):
    model = model_with(law)
    overdrives = (1e-9, 1e-6, -2e-4, 3e-3, -0.04, 0.2, 0.3, -0.6)
    cycles = [Cycle(vdiff=overdrive) for overdrive in overdrives]
    played = circuit(tmp_path, model).play(cycles)
    expected = Reference(model).delay(np.abs(overdrives))
    np.testing.assert_allclose(
        delays(played, played.edges, cycles), expected, rtol=0, atol=TOLERANCE_S
    )


def test_conditions_outside_the_range_are_clamped(reference, tmp_path):
    for temp_c, outside in ((27.0, {"vdd": 1.6}), (27.0, {"vcm": 0.25}), (150.0, {})):
        condition = NOMINAL | outside | {"temp_c": on_kelvin_grid(temp_c)}
        vdiff = float(reference.offset(**condition)) + 1e-3
        cycles = [Cycle(vdiff=vdiff, vdd=condition["vdd"], vcm=condition["vcm"])]
        played = circuit(tmp_path, TEMPERATURE_C=condition["temp_c"]).play(cycles)
        expected = float(reference.delay(1e-3, **condition))
        assert delays(played, played.edges, cycles) == pytest.approx([expected], abs=TOLERANCE_S)


def test_unless_given_the_temperature_is_the_circuits(tmp_path):
    """That is 27 degrees, while the parameter's default is the middle of the model's range."""
    model = full_model()
    hot = replace(model, box=replace(model.box, temperature_k=Range(low=333.15, high=393.15)))
    assert "TEMPERATURE_C = 90.0" in verilog_a_event(hot).text
    reference = Reference(hot, noise=False)
    cycles = [Cycle(vdiff=float(reference.offset(**NOMINAL)) + 1e-4)]
    played = circuit(tmp_path, hot).play(cycles)
    expected = float(reference.delay(1e-4, **NOMINAL))
    assert delays(played, played.edges, cycles) == pytest.approx([expected], abs=TOLERANCE_S)


def test_an_input_that_moves_after_the_edge_no_longer_matters(reference, tmp_path):
    offset = float(reference.offset(**NOMINAL))
    cycles = [Cycle(vdiff=offset + 1e-4)]
    high, low = 0.65 + offset + 1e-4, 0.4
    edge = cycles[0].reset_s
    played = circuit(tmp_path).play(
        cycles, inn=[(0.0, 0.65)], inp=[(0.0, high), (edge + 1e-12, high), (edge + 5e-12, low)]
    )
    condition = NOMINAL | {"vcm": 0.65 + (offset + 1e-4) / 2}
    expected = float(reference.delay(1e-4, **condition))
    assert played.levels(played.ends[0] - 10e-12) == pytest.approx([1.2, 0.0])
    # The common mode differs a little, and with it the offset: by nV, some fs at 100 uV.
    assert delays(played, played.edges, cycles) == pytest.approx([expected], abs=0.5e-12)


@pytest.mark.parametrize(
    ("in_reset", "decides_on"),
    [("high", "rising"), ("low", "rising"), ("mid", "rising"), ("hold", "rising"),
     ("high", "falling"), ("hold", "falling")],
)  # fmt: skip
def test_outputs_decide_and_return_to_each_reset_state(in_reset, decides_on, reference, tmp_path):
    model = full_model(in_reset=in_reset, decides_on=decides_on)
    offset, delay = float(reference.offset(**NOMINAL)), float(reference.delay(2e-3, **NOMINAL))
    cycles = [Cycle(vdiff=offset + 2e-3), Cycle(vdiff=offset - 2e-3)]
    played = circuit(tmp_path, model).play(cycles)
    rest = [RESET_LEVELS[in_reset]] * 2
    held = [1.2, 0.0] if in_reset == "hold" else rest
    after = [0.0, 1.2] if in_reset == "hold" else rest
    margin = EDGE_S / 2 + TOLERANCE_S
    first, second = played.edges
    assert played.levels(first + delay - margin) == pytest.approx(rest)
    assert played.levels(first + delay + margin) == pytest.approx([1.2, 0.0])
    assert played.levels(played.ends[0]) == pytest.approx([1.2, 0.0])
    assert played.levels(second) == pytest.approx(held)
    assert played.levels(second + delay - margin) == pytest.approx(held)
    assert played.levels(second + delay + margin) == pytest.approx([0.0, 1.2])
    assert played.levels(played.ends[1] + 0.3e-9) == pytest.approx(after)


def test_a_decision_edge_before_the_reset_state_cancels_it(reference, tmp_path):
    offset, reset = float(reference.offset(**NOMINAL)), float(reference.reset_delay(**NOMINAL))
    cycles = [Cycle(vdiff=offset + 0.1), Cycle(vdiff=offset + 0.1, reset_s=0.8 * reset)]
    played = circuit(tmp_path).play(cycles)
    between = np.arange(played.ends[0], played.ends[1], 1e-12)
    np.testing.assert_allclose(played.apart(between), 1.2, atol=1e-9)


# -- Unresolved decisions ------------------------------------------------------------------------


def phases_about(delay_s):
    """Return a decision phase that is just too short and one that is just long enough."""
    return delay_s - 0.1e-12, delay_s + 0.1e-12


@pytest.mark.parametrize("in_reset", ["high", "low", "hold"])
def test_only_decisions_that_outlast_their_phase_stay_unresolved(in_reset, reference, tmp_path):
    offset, delay = float(reference.offset(**NOMINAL)), float(reference.delay(1e-6, **NOMINAL))
    cycles = [Cycle(vdiff=offset - 1e-6, phase_s=phase) for phase in phases_about(delay)]
    played = circuit(tmp_path, full_model(in_reset=in_reset)).play(cycles)
    reset = float(reference.reset_delay(**NOMINAL))
    soon = 0.5 * reset
    assert played.levels(played.ends[0] - EDGE_S) == pytest.approx([RESET_LEVELS[in_reset]] * 2)
    assert played.levels(played.ends[0] + soon) == pytest.approx([0.6, 0.6])
    assert played.levels(played.edges[1]) == pytest.approx([RESET_LEVELS[in_reset]] * 2)
    assert played.levels(played.ends[1] + soon) == pytest.approx([0.0, 1.2])


def test_the_reset_state_returns_after_an_unresolved_decision_as_after_any(reference, tmp_path):
    cycles = [Cycle(vdiff=float(reference.offset(**NOMINAL)), phase_s=0.3e-9)]
    played = circuit(tmp_path).play(cycles)
    back = played.crossing(played.waves["outp"], 0.9, played.ends[0] + 2 * EDGE_S)
    expected = float(reference.reset_delay(**NOMINAL))
    assert back - played.ends[0] == pytest.approx(expected, abs=TOLERANCE_S)


def test_a_balanced_input_takes_the_longest_delay(tmp_path):
    model = minimal_model()
    longest = float(Reference(model).delay(0.0))
    # The law by hand: 25 ps at 0.5 V and 10 ps a factor e down to the floor of 1 fV.
    by_hand = np.exp(-24.412145) + np.exp(-25.328436) * np.log(0.5 / 1e-15)
    assert longest == pytest.approx(by_hand, rel=1e-9)
    cycles = [Cycle(phase_s=longest - 1.1e-12), Cycle(phase_s=longest + 5e-12)]
    played = circuit(tmp_path, model).play(cycles)
    assert played.levels(played.ends[0]) == pytest.approx([1.2, 1.2])
    assert played.levels(played.ends[0] + 2e-12) == pytest.approx([0.6, 0.6])
    assert played.levels(played.ends[1]) == pytest.approx([0.0, 1.2])
    late = delays(played, played.edges[1:], cycles[1:])
    assert late == pytest.approx([longest], abs=TOLERANCE_S)


@pytest.mark.parametrize("in_reset", ["high", "hold"])
def test_unresolved_outputs_stay_as_they_are_where_asked(in_reset, reference, tmp_path):
    offset = float(reference.offset(**NOMINAL))
    cycles = [Cycle(vdiff=offset + 0.1), Cycle(vdiff=offset, phase_s=0.2e-9)]
    played = circuit(tmp_path, full_model(in_reset=in_reset), UNRESOLVED_MODE=2).play(cycles)
    kept = [1.2, 0.0] if in_reset == "hold" else [1.2, 1.2]
    for time in np.arange(played.edges[1], played.ends[1] + 0.4e-9, 5e-12):
        assert played.levels(time) == pytest.approx(kept)


def test_the_coin_is_fair_and_thrown_for_each_unresolved_decision(reference, tmp_path):
    """100 throws with fixed seed: the bounds' false alarm is 1e-4, twice over."""
    offset = float(reference.offset(**NOMINAL))
    cycles = [Cycle(vdiff=offset, phase_s=0.2e-9, reset_s=0.2e-9)] * 100
    played = circuit(tmp_path, UNRESOLVED_MODE=1).play(cycles)
    soon = played.ends + 0.5 * float(reference.reset_delay(**NOMINAL))
    np.testing.assert_allclose(np.abs(played.apart(soon)), 1.2)
    ones = played.apart(soon) > 0.0
    low, high = stats.binom.interval(1 - 1e-4, len(ones), 0.5)
    assert low <= ones.sum() <= high
    low, high = stats.binom.interval(1 - 1e-4, len(ones) - 1, 0.5)
    assert low <= (ones[1:] != ones[:-1]).sum() <= high


def test_one_in_so_many_is_forced_to_stay_unresolved_even_without_delays(reference, tmp_path):
    offset = float(reference.offset(**NOMINAL))
    cycles = [Cycle(vdiff=offset + 0.1, phase_s=0.5e-9)] * 6
    for delay_on in (0, 1):
        settings = {"FORCE_UNRESOLVED_EVERY": 3, "DELAY_ON": delay_on}
        played = circuit(tmp_path, full_model(in_reset="hold"), **settings).play(cycles)
        apart = played.apart(played.ends + 2 * EDGE_S)
        np.testing.assert_allclose(apart, [1.2, 1.2, 0.0, 1.2, 1.2, 0.0], atol=1e-9)


# -- Parameters ----------------------------------------------------------------------------------


def test_mismatch_and_shift_move_the_trip_point(reference, tmp_path):
    condition = {"vdd": 1.08, "vcm": 0.8}
    # Worked out by hand from the polynomials of the example model's two components.
    x_t, x_v, x_c = (1 / 398.15 - 0.0034) / 0.00089, -1.0, (1 / 0.64 - 2.78) / 1.22
    mismatch = 1.5 * (6e-3 + 2e-4 * x_t - 1e-4 * x_v + 3e-4 * x_c) - 2.0 * 8e-4
    trip = float(reference.offset(**condition, temp_c=125.0)) + 3e-3 + mismatch
    settings = {"MISMATCH_Z0": 1.5, "MISMATCH_Z1": -2.0, "OFFSET_SHIFT_V": 3e-3}
    cycles = [Cycle(vdiff=trip + sign * 1e-5, **condition) for sign in (1, -1)]
    played = circuit(tmp_path, TEMPERATURE_C=125.0, **settings).play(cycles)
    np.testing.assert_allclose(played.apart(played.ends), [1.08, -1.08], atol=1e-9)


def test_without_delays_outputs_follow_in_an_edge_and_always_resolve(reference, tmp_path):
    offset = float(reference.offset(**NOMINAL))
    cycles = [Cycle(vdiff=offset - 1e-9, phase_s=40e-12)]
    played = circuit(tmp_path, DELAY_ON=0).play(cycles)
    expected = pytest.approx([EDGE_S / 2], abs=2 * TOLERANCE_S)
    assert delays(played, played.edges, cycles) == expected
    assert delays(played, played.ends, cycles) == expected


def test_the_edges_last_as_long_as_asked_and_their_middle_stays(reference, tmp_path):
    cycles = [Cycle(vdiff=float(reference.offset(**NOMINAL)) + 1e-2)]
    played = circuit(tmp_path, EDGE_S=20e-12).play(cycles)
    expected = float(reference.delay(1e-2, **NOMINAL))
    assert delays(played, played.edges, cycles) == pytest.approx([expected], abs=TOLERANCE_S)
    middle = played.edges[0] + expected
    levels = [played.level("outn", middle + late) for late in (-10e-12, 5e-12, 10e-12)]
    assert levels == pytest.approx([1.2, 0.3, 0.0], abs=2e-3)


# -- Noise ---------------------------------------------------------------------------------------


@pytest.mark.slow
def test_the_s_curve_is_that_of_the_reference(tmp_path):
    """5 levels of 150 decisions with fixed seed: false alarm 5e-4."""
    noisy = Reference(full_model())
    sigma, offset = float(noisy.noise_sigma(**NOMINAL)), float(noisy.offset(**NOMINAL))
    levels = offset + sigma * np.array([-2.0, -1.0, 0.0, 1.0, 2.0])
    cycles = [Cycle(vdiff=v, reset_s=0.2e-9, phase_s=1e-9) for v in np.repeat(levels, 150)]
    played = circuit(tmp_path, NOISE_ON=1, SEED=3).play(cycles)
    apart = played.apart(played.ends - 10e-12).reshape(len(levels), -1)
    np.testing.assert_allclose(np.abs(apart), 1.2, atol=1e-9)
    low, high = stats.binom.interval(1 - 1e-4, 150, noisy.probability(levels, **NOMINAL))
    ones = (apart > 0.0).sum(axis=1)
    assert np.all((low <= ones) & (ones <= high)), ones


def test_noise_enters_the_delay_too_and_depends_on_the_seed_alone(reference, tmp_path):
    cycles = [Cycle(vdiff=float(reference.offset(**NOMINAL)))] * 10
    found = []
    for seed in (1, 1, 2):
        played = circuit(tmp_path, NOISE_ON=1, SEED=seed).play(cycles)
        found.append(delays(played, played.edges, cycles))
    assert len(set(found[0])) == len(cycles)
    assert found[0] == found[1]
    assert not set(found[0]) & set(found[2])


def test_noise_that_cannot_change_a_bit_is_not_drawn(reference, tmp_path):
    sigma = float(Reference(full_model()).noise_sigma(**NOMINAL))
    offset = float(reference.offset(**NOMINAL))
    cycles = [Cycle(vdiff=offset + reach * sigma) for reach in (8.31, -8.31, 8.29)]
    played = circuit(tmp_path, NOISE_ON=1).play(cycles)
    expected = reference.delay(np.array([8.31, 8.31, 8.29]) * sigma, **NOMINAL)
    late = np.abs(np.array(delays(played, played.edges, cycles)) - expected)
    assert (late < TOLERANCE_S).tolist() == [True, True, False]


# -- Supply, enable and pins ---------------------------------------------------------------------


def test_a_cell_without_supply_shows_half_of_it_and_works_again_afterwards(reference, tmp_path):
    """The supply fails in the first decision phase and returns before the second edge."""
    cycles = [Cycle(vdiff=0.05), Cycle(vdiff=0.05)]
    sag = [(0.0, 1.2), (2e-9, 1.2), (2.1e-9, 0.4), (3.3e-9, 0.4), (3.4e-9, 1.2)]
    played = circuit(tmp_path).play(cycles, vdd=sag)
    assert played.levels(1.9e-9) == pytest.approx([1.2, 0.0])
    assert played.levels(2.2e-9) == pytest.approx([0.2, 0.2])
    assert played.levels(3.2e-9) == pytest.approx([0.2, 0.2])
    assert played.levels(3.5e-9) == pytest.approx([1.2, 1.2])
    assert played.levels(played.ends[1]) == pytest.approx([1.2, 0.0])


@pytest.mark.parametrize("phase_s", [2e-9, 0.2e-9])
def test_a_supply_that_fails_cancels_what_is_pending(phase_s, reference, tmp_path):
    """Off within the delay, on again in the same phase: nothing, no coin either, until its end."""
    cycles = [Cycle(vdiff=float(reference.offset(**NOMINAL)) + 1e-5, phase_s=phase_s)]
    edge = cycles[0].reset_s
    dip = [(0.0, 1.2), (edge + 30e-12, 1.2), (edge + 50e-12, 0.0), (edge + 70e-12, 0.0),
           (edge + 90e-12, 1.2)]  # fmt: skip
    played = circuit(tmp_path, UNRESOLVED_MODE=1).play(cycles, vdd=dip)
    for time in np.arange(edge + 100e-12, played.ends[0], 20e-12):
        assert played.levels(time) == pytest.approx([0.6, 0.6])
    for time in np.arange(played.ends[0] + 2 * EDGE_S, played.ends[0] + 0.4e-9, 20e-12):
        assert played.levels(time) == pytest.approx([1.2, 1.2])
    between = np.arange(edge + 100e-12, played.ends[0] + 0.4e-9, 1e-12)
    np.testing.assert_allclose(played.apart(between), 0.0, atol=1e-9)


def test_an_edge_while_off_decides_nothing_but_counts(reference, tmp_path):
    cycles = [Cycle(vdiff=0.1), Cycle(vdiff=0.1)]
    rising = [(0.0, 0.0), (1.5e-9, 0.0), (1.6e-9, 1.2)]
    played = circuit(tmp_path, FORCE_UNRESOLVED_EVERY=2).play(cycles, vdd=rising)
    assert played.levels(0.9e-9) == pytest.approx([0.0, 0.0])
    assert played.levels(2.9e-9) == pytest.approx([0.6, 0.6])
    assert played.levels(played.edges[1]) == pytest.approx([1.2, 1.2])
    assert played.levels(played.ends[1] - 10e-12) == pytest.approx([1.2, 1.2])  # forced


def test_renamed_pins_an_enable_and_a_supply_parameter_work(tmp_path):
    model = renamed_pins_model()
    reference = Reference(model, noise=False)
    condition = {"vdd": on_grid(1.1), "vcm": 0.65}
    vdiff = float(reference.offset(**condition, temp_c=27.0)) - 1e-3
    cycles = [Cycle(vdiff=vdiff, **condition)] * 2
    enable = [(0.0, 1.1), (2.0e-9, 1.1), (2.05e-9, 0.0), (3.2e-9, 0.0), (3.25e-9, 1.1)]
    played = circuit(tmp_path, model, SUPPLY_V=condition["vdd"]).play(cycles, en=enable)
    outp = played.waves["outp"]
    for edge in played.edges:
        delay = played.crossing(outp, condition["vdd"] / 2, edge) - edge
        expected = float(reference.delay(1e-3, **condition, temp_c=27.0))
        assert delay == pytest.approx(expected, abs=TOLERANCE_S)
    assert played.level("outp", 1.9e-9) == pytest.approx(0.0)
    assert played.level("outp", 2.5e-9) == pytest.approx(0.55, abs=1e-6)
    assert played.level("outp", 3.3e-9) == pytest.approx(1.1, abs=1e-6)


def test_a_cell_without_any_table_still_decides(tmp_path):
    cycles = [Cycle(vdiff=vdiff) for vdiff in (1e-6, -1e-6, 0.3, -0.3)]
    played = circuit(tmp_path, replace(minimal_model(), delay=None)).play(cycles)
    np.testing.assert_allclose(played.apart(played.ends), [1.2, -1.2, 1.2, -1.2], atol=1e-9)
    assert max(delays(played, played.edges, cycles)) < 1e-12
