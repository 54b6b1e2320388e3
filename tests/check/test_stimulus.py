"""Stimulus hits what it aims at, leaves no decision to a tick, and repeats."""

from dataclasses import replace

import numpy as np
import pytest

from behavgen.check.aims import BALANCED, NOISY, SMALL, SWEEP, ZERO
from behavgen.check.runs import Run, Settings, plan_batches, reference_of
from behavgen.check.stimulus import make_stimulus
from tests.example_models import complete_model, full_model, minimal_model, renamed_pins_model

MODELS = [
    complete_model(),
    full_model(),
    minimal_model(time_precision="1ps"),
    renamed_pins_model(in_reset="hold"),
]
PLAIN = Settings(process="typ", temperature_c=40.0)


def run_with(decisions=2000, **settings):
    meant = replace(PLAIN, **settings)
    return Run(index=0, name="one", given=meant, meant=meant, decisions=decisions)


def overdrive(stimulus):
    return np.abs(stimulus.trace.overdrive_v)


@pytest.mark.parametrize("model", MODELS, ids=lambda model: model.cell.name)
def test_no_planned_decision_hangs_on_a_tick(model):
    for batch in plan_batches(model, decisions=8000):
        for run in batch.runs:
            found = make_stimulus(model, run, seed=1)
            phase = found.end - found.edge
            if run.meant.delay_on:
                assert np.abs(phase - found.trace.delay_ticks).min() > 1
            assert np.abs(found.gap - np.maximum(found.trace.reset_ticks, 1)).min() > 1


@pytest.mark.parametrize("model", MODELS, ids=lambda model: model.cell.name)
def test_times_are_in_order_and_inputs_keep_away_from_edges(model):
    for batch in plan_batches(model, decisions=8000):
        for run in batch.runs:
            found = make_stimulus(model, run, seed=1)
            assert np.all(found.end > found.edge)
            assert np.all(found.gap >= 1)
            moment = found.levels.moment
            assert np.all(np.diff(moment) > 0)
            assert not np.isin(moment, found.edge).any()
            sampled = (found.edge + found.trace.aperture_ticks)[~found.trace.unresolved]
            assert not np.isin(moment, sampled).any()


def test_noise_off_decisions_below_10_uv_see_every_offset_error():
    found = make_stimulus(full_model(), run_with(noise_on=False), seed=1)
    assert (overdrive(found) < 1e-5).mean() > 0.5
    assert (found.aim == SMALL).any()
    assert 0.4 < found.trace.leaning.mean() < 0.6


def test_a_zero_is_exactly_zero_in_the_arithmetic_of_the_models():
    for shift in (0.0, 0.0137, -0.021):
        run = run_with(noise_on=False, offset_shift_v=shift)
        found = make_stimulus(full_model(), run, seed=1)
        zero = found.aim == ZERO
        assert zero.sum() > 20
        assert np.all(found.trace.overdrive_v[zero] == 0.0)


def test_balanced_inputs_take_back_their_own_noise():
    found = make_stimulus(full_model(), run_with(), seed=1)
    balanced, noisy = found.aim == BALANCED, found.aim == NOISY
    assert overdrive(found)[balanced].max() < 1e-7
    sigma = reference_of(full_model(), run_with()).noise_sigma(temp_c=40.0)
    assert np.median(overdrive(found)[noisy]) > sigma
    assert 0.3 < found.trace.leaning[balanced].mean() < 0.7


def test_every_decade_is_swept():
    found = make_stimulus(full_model(), run_with(noise_on=False), seed=1)
    swept = np.log10(overdrive(found)[found.aim == SWEEP])
    counts, _ = np.histogram(swept, bins=[-7, -6, -5, -4, -3, -2, -1])
    assert counts.min() > 60
    assert swept.max() > np.log10(0.3)


def test_the_same_seed_repeats_and_another_does_not():
    one, same = (make_stimulus(full_model(), run_with(), seed=5) for _ in range(2))
    other = make_stimulus(full_model(), run_with(), seed=6)
    np.testing.assert_array_equal(one.inp_v, same.inp_v)
    np.testing.assert_array_equal(one.edge, same.edge)
    assert not np.array_equal(one.inp_v, other.inp_v)
