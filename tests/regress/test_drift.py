"""Noise is no drift, drift is none of the noise."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.stats import binom

from behavgen.limits import DriftLimit
from behavgen.regress.drift import drifts
from tests.example_models import complete_model
from tests.regress.invented_cells import Truth, drawn_model


def states(old, new, **limits):
    return {q.of: q.state for q in drifts(old, new, limits)}


def quantity(of, old, new, **limits):
    return next(q for q in drifts(old, new, limits) if q.of == of)


def test_a_model_has_not_moved_from_itself(first):
    found = drifts(first, first, {})
    assert {q.of for q in found} == {"offset", "mismatch", "noise", "tau", "delay"}
    assert all(q.state == "same" and q.same_tables for q in found)
    assert all(d.errors == 0.0 for q in found for d in q.drifts)


def test_every_effect_is_compared():
    model = complete_model()
    found = {q.of: q for q in drifts(model, model, {})}
    assert set(found) == {
        "offset", "mismatch", "noise", "tau", "delay", "reset_delay", "memory", "aperture",
        "energy", "kickback",
    }  # fmt: skip
    assert all(q.drifts and q.state == "same" for q in found.values())


@pytest.mark.parametrize("seed", [11, 12, 13])
def test_the_same_truth_drawn_anew_passes(first, seed):
    # False-alarm rate 1e-3 a pair, seeds fixed.
    again = drawn_model(Truth(), seed)
    assert "beyond" not in states(first, again).values()


@pytest.mark.slow
def test_noise_is_called_a_drift_no_more_often_than_stated():
    # 30 independent pairs at a stated rate of 0.1: more than 9 alarms have a probability
    # below 1e-3. Differences in joint errors scatter by one, within five standard errors.
    models = [drawn_model(Truth(), seed) for seed in range(60)]
    alarms, moved = 0, {"noise": [], "offset": [], "mismatch": []}
    for old, new in zip(models[::2], models[1::2], strict=True):
        found = drifts(old, new, {}, false_alarms=0.1)
        alarms += any(q.state == "beyond" for q in found)
        for q in found:
            if q.of in moved:
                moved[q.of] += [d.errors for d in q.drifts if d.place.s_curve is not None
                                or q.of == "mismatch"]  # fmt: skip
    assert alarms <= binom.isf(1e-3, 30, 0.1)
    for errors in moved.values():
        assert np.std(errors) == pytest.approx(1.0, abs=5.0 / np.sqrt(2.0 * len(errors)))


@pytest.mark.parametrize(
    ("planted", "of"),
    [
        ({"sigma_v": 6e-4 * 1.2}, "noise"),
        ({"offset_v": 3e-4 + 1.5e-4}, "offset"),
        ({"mismatch_v": 5e-3 * 2.2}, "mismatch"),
        ({"tau_s": 12e-12 * 1.03}, "delay"),
        ({"slow_factor": 1.2 * 1.03}, "delay"),
    ],
)
def test_a_planted_drift_is_caught(first, planted, of):
    drifted = drawn_model(replace(Truth(), **planted), seed=2)
    found = states(first, drifted)
    assert found[of] == "beyond"
    others = {"noise", "offset", "mismatch", "delay"} - {of}
    assert all(found[other] in ("same", "within noise") for other in others)


def test_the_size_of_a_planted_drift_is_told(first, slower):
    leading = quantity("delay", first, slower).leading
    assert leading.place.condition.process == "slow"
    # Five standard errors of a delay at one condition whose rows scatter by 0.2 %.
    assert leading.share == pytest.approx(0.03, abs=5 * 0.002)


def test_only_the_process_that_moved_is_named(first, slower):
    found = quantity("delay", first, slower).drifts
    moved = {d.place.condition.process for d in found if d.state == "beyond"}
    assert moved == {"slow"}


def test_a_drift_within_its_limit_is_reported_and_passes(first, slower):
    wide, narrow = DriftLimit(of="delay", share=0.05), DriftLimit(of="delay", share=0.01)
    assert quantity("delay", first, slower, delay=wide).state == "within limit"
    assert quantity("delay", first, slower, delay=narrow).state == "beyond"


def test_a_limit_in_volts_holds_too(first):
    moved = drawn_model(Truth(offset_v=3e-4 + 1.5e-4), seed=2)
    for amount, state in ((3e-4, "within limit"), (0.5e-4, "beyond")):
        limit = DriftLimit(of="offset", amount=amount)
        assert quantity("offset", first, moved, offset=limit).state == state


def test_too_few_data_to_see_a_limit_are_named(first):
    again = drawn_model(Truth(), seed=11)
    assert quantity("noise", first, again, noise=DriftLimit(of="noise", share=0.001)).blind
    assert not quantity("noise", first, again, noise=DriftLimit(of="noise", share=0.5)).blind


def test_an_effect_that_is_lost_fails_and_one_that_is_gained_passes(first):
    without = replace(first, noise=None)
    lost, gained = quantity("noise", first, without), quantity("noise", without, first)
    assert (lost.presence, lost.state) == ("lost", "beyond")
    assert (gained.presence, gained.state) == ("gained", "same")


def test_the_same_tables_leave_nothing_to_noise(first):
    # A change of the program or the settings: however small, the tables cannot explain it.
    moved = replace(first, offset=None)
    assert quantity("offset", first, moved).state == "beyond"
    tau = first.delay.tau
    shifted = tuple(
        replace(v, coefficients=(v.coefficients[0] + 1e-4, *v.coefficients[1:]))
        for v in tau.variants
    )
    nudged = replace(first, delay=replace(first.delay, tau=replace(tau, variants=shifted)))
    assert quantity("tau", first, nudged).state == "beyond"
    other = tuple(replace(s, sha256="e" * 64) for s in nudged.sources)
    assert quantity("tau", first, replace(nudged, sources=other)).state == "within noise"
