"""Memory, aperture, kickback and supply charge of the continuous Verilog-A model in VACASK."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from behavgen.reference import Reference
from tests.emit.verilog_a_array import Site, play
from tests.example_models import (
    complete_model,
    constant_surface,
    minimal_model,
    with_energy,
)

NOMINAL = {"vdd": 1.2, "temp_c": 27.0, "vcm": 0.65}
QUIET = {"noise_on": 0, "temperature_c": 27.0}


@pytest.fixture(scope="module")
def reference():
    return Reference(complete_model(), noise=False)


def tau_of(reference, **condition):
    """Slope of the regenerative tail."""
    fast, slow = reference.delay([1e-8, 1e-9], **condition)
    return float(slow - fast) / np.log(10.0)


def after(first, then, reset_s, **settings):
    """Decide on `first` V, then, a reset later, on `then` V; the input steps in between."""
    start, phase, moment = 0.4e-9, 0.8e-9, 0.9e-9
    steps = [(0.0, first), (moment, first), (moment + 1e-12, then)]
    cycles = ((start, phase), (reset_s, 1.2e-9))
    return Site(vdiff=steps, cycles=cycles, parameters=QUIET | settings)


# -- Memory --------------------------------------------------------------------------------------


@pytest.mark.slow
def test_memory_of_every_reset_length_is_that_of_the_reference(reference, tmp_path):
    """Two terms, a floor and a cap; delays at some mV tell the shift within 10 %."""
    offset, tau_s = float(reference.offset(**NOMINAL)), tau_of(reference, **NOMINAL)
    resets = (25e-12, 40e-12, 60e-12, 90e-12, 200e-12, 500e-12, 2e-9)
    points = [(reset, sign) for reset in resets for sign in (1, -1)]
    sites = [after(offset + sign * 0.1, offset - 20e-3, reset) for reset, sign in points]
    result = play(complete_model(), sites, tmp_path)
    for index, (reset_s, sign) in enumerate(points):
        shift = float(reference.memory_shift(reset_s, **NOMINAL))
        magnitude = 20e-3 - sign * shift
        delay, bit = result.decision(index, 1)
        expected = float(reference.delay(magnitude, **NOMINAL))
        faster = float(reference.delay(magnitude + 0.1 * shift, **NOMINAL))
        slower = float(reference.delay(magnitude - 0.1 * shift, **NOMINAL))
        assert bit == 0
        assert faster - 0.01 * tau_s < delay < slower + 0.01 * tau_s, (reset_s, sign)
        assert delay == pytest.approx(expected, abs=max(0.01 * expected, 0.1 * tau_s))


@pytest.mark.slow
@pytest.mark.parametrize("reset_s", [30e-12, 60e-12, 100e-12, 300e-12, 1e-9])
def test_trip_points_after_a_one_and_after_a_zero_lie_two_shifts_apart(
    reset_s, reference, tmp_path
):
    """They are found within 10 % of the shift: a tenth less and a tenth more decide unlike."""
    shift = float(reference.memory_shift(reset_s, **NOMINAL))
    offset = float(reference.offset(**NOMINAL))
    cases = [(before, share) for before in (1, -1) for share in (0.9, 1.1)]
    sites = [after(offset + b * 0.1, offset - b * share * shift, reset_s) for b, share in cases]
    result = play(complete_model(), sites, tmp_path)
    bits = [result.decision(index, 1)[1] for index in range(len(sites))]
    assert bits == [1, 0, 0, 1]


@pytest.mark.slow
def test_shifts_larger_than_any_overdrive_are_carried_alike(tmp_path):
    """One term without a cap: the state holds signs, and any amplitude stands before it."""
    model = complete_model()
    term = replace(model.memory.terms[0], shift=constant_surface("V", "log", -0.7, "typ", "slow"),
                   tau=constant_surface("s", "log", -24.0, "typ", "slow"))  # fmt: skip
    model = replace(model, memory=replace(model.memory, terms=(term,), floor=None, cap_v=1.0))
    reference = Reference(model, noise=False)
    offset = float(reference.offset(**NOMINAL))
    sites, by_hand = [], []
    for reset_s in (40e-12, 80e-12, 160e-12):
        by_hand.append(np.exp(-0.7) * np.exp(-reset_s / np.exp(-24.0)))
        shift = float(reference.memory_shift(reset_s, **NOMINAL))
        assert shift == pytest.approx(by_hand[-1], rel=1e-9)
        sites += [after(offset + 0.1, offset - share * shift, reset_s) for share in (0.95, 1.05)]
    result = play(model, sites, tmp_path)
    assert max(by_hand) > 0.15
    assert [result.decision(index, 1)[1] for index in range(len(sites))] == [1, 0] * 3


def test_nothing_is_remembered_of_decisions_that_did_not_resolve_or_when_off(reference, tmp_path):
    offset, tau_s = float(reference.offset(**NOMINAL)), tau_of(reference, **NOMINAL)
    short = [(0.4e-9, 0.12e-9), (60e-12, 1.2e-9)]
    steps = [(0.0, offset + 3e-5), (0.53e-9, offset + 3e-5), (0.531e-9, offset + 5e-3)]
    sites = [
        Site(vdiff=steps, cycles=short, parameters=QUIET),
        after(offset + 0.1, offset + 5e-3, 60e-12, memory_on=0),
    ]
    result = play(complete_model(), sites, tmp_path)
    assert np.isnan(result.decision(0, 0)[0])
    expected = float(reference.delay(5e-3, **NOMINAL))
    for index in range(len(sites)):
        delay, bit = result.decision(index, 1)
        assert bit == 1
        assert delay == pytest.approx(expected, abs=0.05 * tau_s)


# -- Aperture ------------------------------------------------------------------------------------


@pytest.mark.parametrize("late_s", [-1e-12, 1e-12])
def test_an_input_that_rises_evenly_counts_as_it_stands_at_the_centre_of_the_aperture(
    late_s, reference, tmp_path
):
    """It passes the trip point 1 ps before or after that moment, at 1 mV a picosecond."""
    offset = float(reference.offset(**NOMINAL))
    edge = 0.5e-9
    centre_s = float(reference.trace(0.0, 10**6, **NOMINAL).aperture_ticks[0]) * 1e-15
    moment = edge + centre_s + late_s
    ramp = [(0.0, offset - 0.2), (moment - 0.2e-9, offset - 0.2), (moment + 0.2e-9, offset + 0.2)]
    site = Site(vdiff=ramp, cycles=((edge, 1.2e-9),), parameters=QUIET)
    result = play(complete_model(), [site], tmp_path)
    held = float(np.interp(edge + 0.3e-9, result.waves["time"], result.waves["x0:n_overdrive"]))
    assert held == pytest.approx(-late_s * 1e9, abs=0.1e-3)
    assert result.decision(0, 0)[1] == (late_s < 0)


# -- Charges -------------------------------------------------------------------------------------


@pytest.mark.parametrize("vdiff", [0.09, -0.05])
@pytest.mark.parametrize("source_ohm", [0.0, 1e3])
def test_kickback_is_driven_out_of_both_inputs_into_their_sources(vdiff, source_ohm, tmp_path):
    """By hand: 2.1 fC common, -7 aC - 2.9 fC/V differential."""
    site = Site(vdiff=vdiff, cycles=((0.4e-9, 0.8e-9), (0.4e-9, 0.8e-9)), parameters=QUIET,
                source_ohm=source_ohm)  # fmt: skip
    result = play(complete_model(), [site], tmp_path)
    half = 0.5 * (-7e-18 - 2.9e-15 * vdiff)
    for number in (0, 1):
        start, stop = site.edges[number] - 0.1e-9, site.ends[number] + 0.2e-9
        charges = [result.charge(pin, 0, start, stop) for pin in ("vinp", "vinn")]
        assert charges == pytest.approx([2.1e-15 + half, 2.1e-15 - half], rel=0.02)


@pytest.mark.slow
@pytest.mark.parametrize("law", ["delay", "constant", "overdrive"])
def test_the_charge_from_the_supply_is_the_energy_over_the_supply(law, tmp_path):
    model = with_energy(law)
    reference = Reference(model, noise=False)
    sites, expected = [], []
    for vdd in (1.08, 1.32):
        for overdrive in (1e-4, -3e-3, 0.05, -0.3):
            condition = NOMINAL | {"vdd": vdd}
            vdiff = float(reference.offset(**condition)) + overdrive
            sites.append(Site(vdiff=vdiff, vdd=vdd, parameters=QUIET))
            trace = reference.trace(vdiff, 10**6, **condition)
            expected.append(float(trace.energy_j[0]) / vdd)
    result = play(model, sites, tmp_path)
    found = [-result.charge("vdd", index, 0.1e-9, 1.6e-9) for index in range(len(sites))]
    assert found == pytest.approx(expected, rel=0.02)


def test_a_decision_that_does_not_resolve_draws_its_current_for_the_whole_phase(tmp_path):
    model = complete_model()
    reference = Reference(model, noise=False)
    vdiff = float(reference.offset(**NOMINAL))
    site = Site(vdiff=vdiff, cycles=((0.4e-9, 0.15e-9),), parameters=QUIET)
    trace = reference.trace(vdiff, 150_000, **NOMINAL)
    assert trace.unresolved[0]
    result = play(model, [site], tmp_path)
    found = -result.charge("vdd", 0, 0.1e-9, 0.8e-9)
    assert found == pytest.approx(float(trace.energy_j[0]) / 1.2, rel=0.02)


def test_a_cell_without_these_effects_draws_nothing(tmp_path):
    result = play(minimal_model(), [Site(vdiff=0.1)], tmp_path)
    for source in ("vdd", "vinp", "vinn"):
        current = np.asarray(result.waves[f"{source}_0:flow(br)"])
        np.testing.assert_allclose(current, 0.0, atol=1e-12)


# -- Side by side --------------------------------------------------------------------------------


def test_several_cells_of_several_instances_work_in_one_simulation(reference, tmp_path):
    other = minimal_model()
    offset = float(reference.offset(**NOMINAL))
    sites = [
        Site(vdiff=offset + 1e-3, parameters=QUIET),
        Site(vdiff=-1e-3, cell=other.cell.name),
        Site(vdiff=offset - 1e-3, parameters=QUIET | {"mismatch_z1": 2.0}),
        Site(vdiff=0.2, cell=other.cell.name),
        Site(vdiff=offset - 1e-2, vdd=1.32, parameters=QUIET | {"process": 3}),
    ]
    result = play([complete_model(), other], sites, tmp_path)
    found = [result.decision(index, 0) for index in range(len(sites))]
    assert [bit for _, bit in found] == [1, 0, 0, 1, 0]
    minimal = Reference(other)
    slow = NOMINAL | {"vdd": 1.32, "process": "slow"}
    e = -1e-2 + offset - float(reference.offset(**slow))
    expected = [
        reference.delay(1e-3, **NOMINAL), minimal.delay(1e-3), reference.delay(2.6e-3, **NOMINAL),
        minimal.delay(0.2), reference.delay(abs(e), **slow),
    ]  # fmt: skip
    np.testing.assert_allclose([delay for delay, _ in found], expected, rtol=0.01)


def absurd_site(random):
    """Draw an operating point that no circuit should have."""

    def draw(*candidates):
        return float(random.choice(candidates))

    clock = random.choice(["cycles", "0.0", "0.6", "1.2", "-1e3", "1e3"])
    return Site(
        vdiff=draw(0.0, 1e-9, -0.1, 1.0, -50.0, 1e3, -1e3),
        vdd=draw(0.0, 1e-6, 0.3, 0.54, 1.08, 1.2, 5.0, -1.0, 1e3),
        vcm=draw(-1e3, -0.3, 0.0, 0.65, 3.0, 1e3),
        cycles=((draw(0.3e-9, 0.1e-9), draw(0.5e-9, 30e-12)), (draw(0.2e-9, 22e-12), 0.3e-9)),
        clock=() if clock == "cycles" else [(0.0, float(clock))],
        edge_s=draw(1e-15, 1e-12, 20e-12),
        source_ohm=draw(0.0, 50.0, 1e4),
        parameters={
            "temperature_c": draw(-273.0, -40.0, 27.0, 600.0), "process": int(draw(0, 3)),
            "noise_on": int(draw(0, 1)), "delay_on": int(draw(0, 1)),
            "memory_on": int(draw(0, 1)), "mismatch_z0": draw(-10.0, 0.0, 10.0),
            "offset_shift_v": draw(0.0, -1.0, 1e3), "output_ohm": draw(1e-3, 100.0, 1e9),
        },
    )  # fmt: skip


@pytest.mark.slow
@pytest.mark.parametrize("batch", range(10))
def test_absurd_circuits_do_not_break_convergence(batch, tmp_path):
    """500 points in all, 50 a deck."""
    random = np.random.default_rng([11, batch])
    sites = [absurd_site(random) for _ in range(50)]
    result = play(complete_model(), sites, tmp_path, stop=1.2e-9)
    assert all(np.isfinite(wave).all() for wave in result.waves.values())
    assert result.waves["time"][-1] == pytest.approx(1.2e-9)
    for index, site in enumerate(sites):
        limit = abs(site.vdd) * 1.001 + 1e-9
        assert np.abs(result.wave("outp", index)).max() <= limit, site
