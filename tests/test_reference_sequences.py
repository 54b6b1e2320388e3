"""Memory, aperture and energy: the reference against a plain loop over decisions."""

from dataclasses import replace
from functools import partial

import numpy as np
import pytest

from behavgen.formulas import random_stream
from behavgen.model import EnergyEffect, Range
from behavgen.operating_point import evaluate, operating_point
from behavgen.reference import Reference
from tests.example_models import complete_model, constant_surface, full_model

close = partial(pytest.approx, rel=1e-6, abs=0.0)
"""Relative only: what is compared here is far below the usual absolute tolerance."""

PS = 1000  # ticks


def blocks(count, seed):
    """Return inputs near the trip point, phases and resets, some far too short."""
    rng = np.random.default_rng(seed)
    offset = float(Reference(complete_model()).offset())
    vdiff = offset + rng.normal(0.0, 5e-3, count)
    phase = rng.integers(100 * PS, 600 * PS, count)
    reset = rng.integers(20 * PS, 400 * PS, count)
    reset[rng.random(count) < 0.05] = -1
    return vdiff, phase, reset


def by_hand(reference, vdiff, phase, reset):
    """Decide one after another from what is known without a sequence, in plain floats."""
    model, sign, found = reference.model, 0, []
    sigma, offset = float(reference.noise_sigma()), float(reference.offset())
    key = random_stream.stream_key(7, 0, random_stream.NOISE)
    aperture = int(np.floor(1e15 * centre_s(model) + 0.5))
    for n, (v, p, r) in enumerate(zip(vdiff.tolist(), phase.tolist(), reset.tolist(), strict=True)):
        shift = 0.0 if r < 0 else float(reference.memory_shift(r / 1e15))
        e = ((v - (offset + 0.0)) - 0.0) - -(sign * shift)
        if abs(e) < 8.3 * sigma:
            bits = random_stream.random_bits(key, np.array([n]))
            e = e + sigma * float(random_stream.standard_normal(bits)[0])
        ticks = int(np.floor(float(reference.delay(abs(e))) * 1e15 + 0.5))
        ticks = max(ticks, aperture + 1)
        resolved = ticks <= p
        found.append((e, ticks, not resolved, (1 if e > 0 else 0) if resolved else -1))
        sign = 0 if not resolved else 1 if e > 0 else -1
    return found


def centre_s(model):
    """Return the aperture's centre at the middle of the box."""
    return float(evaluate(model.aperture.centre, operating_point(model, (), {}))[0])


def as_rows(trace):
    columns = (trace.overdrive_v, trace.delay_ticks, trace.unresolved, trace.bits)
    return list(zip(*(column.tolist() for column in columns), strict=True))


@pytest.mark.parametrize("seed", [1, 2, 3])
def test_a_sequence_is_what_a_loop_over_its_decisions_gives(seed):
    reference = Reference(complete_model(), seed=7)
    vdiff, phase, reset = blocks(600, seed)
    assert as_rows(reference.trace(vdiff, phase, reset)) == by_hand(reference, vdiff, phase, reset)


def test_a_sequence_can_be_cut_anywhere():
    reference = Reference(complete_model(), seed=7)
    vdiff, phase, reset = blocks(80, 4)
    whole = as_rows(reference.trace(vdiff, phase, reset))
    for cut in (1, 17, 40):
        sign = {1: 1, 0: -1, -1: 0}[whole[cut - 1][3]]
        later = reference.trace(
            vdiff[cut:], phase[cut:], reset[cut:], first_decision=cut, sign_before=sign
        )
        assert as_rows(later) == whole[cut:]


def test_the_previous_decision_is_favoured():
    reference = Reference(complete_model(), noise=False)
    middle, reset_s = float(reference.offset()), 60e-12
    shift = float(reference.memory_shift(reset_s))
    assert shift > 2e-3
    ticks = round(reset_s * 1e15)
    for first in (1, 0):
        strong = middle + (0.1 if first else -0.1)
        weak = middle + 0.5 * shift * np.array([1.0, -1.0])
        for v in weak:
            assert reference.trace([strong, v], 10**6, [-1, ticks]).bits[1] == first


def test_an_unresolved_decision_leaves_nothing_behind():
    reference = Reference(complete_model(), noise=False)
    offset = float(reference.offset())
    trace = reference.trace([offset + 0.1, offset], [50 * PS, 10**9], [-1, 60 * PS])
    assert trace.unresolved.tolist() == [True, False]
    assert trace.memory_v[1] == 0.0


def test_a_forced_decision_leaves_nothing_behind():
    reference = Reference(complete_model(), noise=False, force_unresolved_every=2)
    v = np.full(4, float(reference.offset()) + 0.1)
    assert (reference.trace(v, 10**9, 60 * PS).memory_v != 0.0).tolist() == [False, True] * 2


def test_memory_fades_with_the_reset_and_is_capped():
    reference = Reference(complete_model())
    shift = reference.memory_shift([0.0, 20e-12, 60e-12, 200e-12, 1.0])
    assert shift[0] == shift[1] == 0.012
    assert (np.diff(shift[1:]) < 0.0).all()
    assert shift[-1] == close(np.exp(-8.1))


def test_without_memory_nothing_depends_on_the_order():
    vdiff, phase, reset = blocks(200, 5)
    off = Reference(complete_model(), memory=False, seed=3)
    on = Reference(complete_model(), seed=3)
    assert (off.trace(vdiff, phase, reset).bits != on.trace(vdiff, phase, reset).bits).any()
    assert as_rows(off.trace(vdiff, phase, reset)) == as_rows(off.trace(vdiff, phase))
    assert (off.memory_shift(1e-12) == 0.0).all()
    assert as_rows(Reference(full_model(), seed=3).trace(vdiff, phase, reset)) == as_rows(
        Reference(full_model(), seed=3).trace(vdiff, phase)
    )


def test_times_tell_how_long_the_reset_was():
    reference = Reference(complete_model(), noise=False)
    offset = float(reference.offset())
    vdiff = [offset + 0.1, offset - 5e-4, offset - 5e-4]
    edge, end = np.array([0.0, 1.05e-9, 9e-9]), np.array([1e-9, 2e-9, 9.9e-9])
    # Without the floor only the short reset of 50 ps favours the one before.
    forgetful = replace(reference.model, memory=replace(reference.model.memory, floor=None))
    decided = Reference(forgetful, noise=False).decide(vdiff, edge, end)
    assert decided.bits.tolist() == [1, 1, 0]


def test_nothing_is_ready_before_its_input_was_sampled():
    model = complete_model()
    late = replace(model.aperture, centre=constant_surface("s", "plain", 3e-10, "typ", "slow"))
    reference = Reference(replace(model, aperture=late))
    trace = reference.trace([0.3, 0.3], [300_001, 300_000])
    assert trace.aperture_ticks.tolist() == [300_000] * 2
    assert trace.delay_ticks.tolist() == [300_001] * 2
    assert trace.unresolved.tolist() == [False, True]


def test_an_aperture_before_the_edge_samples_at_the_edge():
    model = complete_model()
    early = replace(model.aperture, centre=constant_surface("s", "plain", -5e-12, "typ", "slow"))
    assert Reference(replace(model, aperture=early)).trace(0.3, 10**9).aperture_ticks == [0]
    assert Reference(model, delay_on=False).trace(0.3, 10**9).aperture_ticks == [0]


def test_energy_is_a_fixed_part_and_a_power_while_deciding():
    reference = Reference(complete_model(), noise=False)
    fixed, power = energy_parts(reference)
    v = np.array([1e-6, 1e-3, 0.1])
    assert reference.energy(v) == close(fixed + power * reference.delay(v), rel=1e-9)
    trace = reference.trace(float(reference.offset()) + v, [200 * PS, 10**6, 10**6])
    assert trace.unresolved.tolist() == [True, False, False]
    time_s = np.array([200e-12, *(trace.delay_ticks[1:] * 1e-15)])
    assert trace.energy_j == close(fixed + power * time_s, rel=1e-9)


def energy_parts(reference):
    """Return the fixed energy and the power from two overdrives at the middle of the box."""
    energy, delay = reference.energy([1e-5, 1e-2]), reference.delay([1e-5, 1e-2])
    power = (energy[0] - energy[1]) / (delay[0] - delay[1])
    assert power > 0.0
    return energy[0] - power * delay[0], power


def test_energy_over_overdrive_stays_inside_its_table():
    law = EnergyEffect(
        law="overdrive",
        fixed=constant_surface("J", "log", np.log(5e-14), "typ", "slow"),
        rise=constant_surface("J", "log", np.log(2e-15), "typ", "slow"),
        overdrive_v=Range(low=1e-5, high=0.2),
    )
    reference = Reference(replace(complete_model(), energy=law), noise=False)
    energy = reference.energy([1e-9, 1e-5, 0.2 / np.e, 0.2, 0.5])
    longest = 5e-14 + 2e-15 * np.log(0.2 / 1e-5)
    assert energy == close([longest, longest, 5.2e-14, 5e-14, 5e-14], rel=1e-9)
    # A decision that does not resolve costs what the smallest overdrive costs.
    trace = reference.trace(float(reference.offset()) + 0.05, 10 * PS)
    assert trace.energy_j == close(longest, rel=1e-9)


def test_energy_that_was_not_characterised():
    reference = Reference(full_model())
    assert np.isnan(reference.energy([1e-3, 0.1])).all()
    assert reference.trace([1e-3, 0.1], 10**9).energy_j.tolist() == [0.0, 0.0]
