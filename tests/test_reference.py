"""The reference against closed forms and against its own distribution."""

import numpy as np
import pytest
from scipy.special import ndtr

from behavgen.reference import Reference
from tests.example_models import full_model, minimal_model

TAU_S = np.exp(-25.328436)
NODE_S = np.exp(-24.412145)


def test_two_parameter_law_is_linear_regeneration():
    ref = Reference(minimal_model())
    v = np.array([1e-9, 1e-6, 1e-3, 0.1])
    assert ref.delay(v) == pytest.approx(NODE_S + TAU_S * np.log(0.5 / v), rel=1e-12)


def test_window_is_the_inverse_of_the_delay():
    ref = Reference(full_model())
    condition = {"vdd": [1.1, 1.2, 1.3], "temp_c": 80.0, "vcm": 0.6}
    for resolve_s in (1.5e-10, 2.2e-10, 4e-10, 5.5e-10):
        window = ref.window(resolve_s, **condition)
        assert ref.delay(0.5 * window, **condition) == pytest.approx(resolve_s, rel=1e-9)


def test_window_is_infinite_before_anything_resolves():
    assert Reference(full_model()).window(1e-12) == np.inf


def test_failure_falls_by_e_with_every_tau_on_the_tail():
    # W = W0 exp(-t / tau) (H. Veendrick, IEEE JSSC 1980).
    ref = Reference(minimal_model())
    first, later = ref.window([2e-10, 2e-10 + TAU_S])
    assert first / later == pytest.approx(np.e, rel=1e-9)


def test_ones_follow_the_gaussian_law():
    ref = Reference(full_model(), seed=9)
    offset, sigma = float(ref.offset()), float(ref.noise_sigma())
    vdiff = offset + sigma * np.repeat([-1.5, -0.5, 0.0, 1.0], 20_000)
    bits = ref.decide(vdiff, 0.0, 1e-6).bits.reshape(4, -1)
    expected = ndtr([-1.5, -0.5, 0.0, 1.0])
    # Fixed seed; 4.5 standard errors at four levels: family false-alarm rate 3e-5.
    error = np.sqrt(expected * (1.0 - expected) / 20_000)
    assert (np.abs(bits.mean(axis=1) - expected) < 4.5 * error).all()
    assert ref.probability(vdiff[::20_000]) == pytest.approx(expected)


def test_overdrive_beyond_certainty_draws_no_noise():
    quiet, noisy = Reference(full_model(), noise=False), Reference(full_model(), seed=3)
    sigma = float(noisy.noise_sigma())
    vdiff = float(noisy.offset()) + np.array([8.4, -8.4, 8.2]) * sigma
    a, b = quiet.trace(vdiff, 10**9), noisy.trace(vdiff, 10**9)
    assert (a.overdrive_v[:2] == b.overdrive_v[:2]).all()
    assert a.overdrive_v[2] != b.overdrive_v[2]


def test_decisions_resolve_exactly_when_the_delay_fits_the_phase():
    ref = Reference(minimal_model())
    ticks = int(ref.trace([1e-3], [10**9]).delay_ticks[0])
    trace = ref.trace([1e-3, 1e-3], [ticks, ticks - 1])
    assert trace.unresolved.tolist() == [False, True]
    assert trace.bits.tolist() == [1, -1]


def test_balanced_input_gives_zero_and_a_finite_delay():
    decision = Reference(minimal_model()).decide([0.0], [0.0], [1.0])
    assert decision.bits.tolist() == [0]
    longest = NODE_S + TAU_S * np.log(0.5 / 1e-15)
    assert decision.ready_times_s[0] == pytest.approx(longest, abs=1e-15)


def test_unresolved_decisions_have_no_ready_time():
    decision = Reference(minimal_model()).decide([1e-6, 0.1], [0.0, 1e-9], [5e-11, 1.05e-9])
    assert decision.unresolved.tolist() == [True, False]
    assert np.isnan(decision.ready_times_s).tolist() == [True, False]


def test_coin_decides_unresolved_decisions_evenly():
    ref = Reference(minimal_model(), when_unresolved="coin", seed=2)
    bits = ref.trace(np.full(20_000, 1e-9), 10).bits
    # 4.5 standard errors: false-alarm rate 7e-6.
    assert abs(bits.mean() - 0.5) < 4.5 * 0.5 / np.sqrt(20_000)


def test_forced_decisions_come_every_so_often_even_without_delay():
    ref = Reference(minimal_model(), delay_on=False, force_unresolved_every=4)
    assert np.flatnonzero(ref.trace(np.full(12, 0.1), 100).unresolved).tolist() == [3, 7, 11]


def test_later_decisions_need_none_of_the_earlier_ones():
    ref = Reference(full_model(), seed=5)
    vdiff = np.full(50, float(ref.offset()))
    whole = ref.trace(vdiff, 10**9)
    part = ref.trace(vdiff[30:], 10**9, first_decision=30)
    assert (part.overdrive_v == whole.overdrive_v[30:]).all()


def test_mismatch_is_drawn_once_an_instance():
    model = full_model()
    sigma = np.hypot(6e-3, 8e-4)
    drawn = np.array(
        [float(Reference(model, seed=s, mismatch=True).mismatch_v(vdd=1.2)) for s in range(1, 801)]
    )
    # Standard error of a standard deviation: sigma / sqrt(2 N); 5 of them at fixed seeds,
    # and as much again for the surface's slope between its centre and the middle of the box.
    assert drawn.std() == pytest.approx(sigma, rel=5 / np.sqrt(1600) + 0.05)
    assert abs(drawn.mean()) < 5 * sigma / np.sqrt(800)


def test_conditions_outside_the_box_are_clamped():
    ref = Reference(full_model())
    # Box ends need not lie on the grid of 2^-20 V on which conditions are distinguished.
    assert ref.delay(1e-3, vdd=5.0) == pytest.approx(ref.delay(1e-3, vdd=1.32), rel=1e-5)
    assert ref.delay(1e-3, vdd=5.0) == ref.delay(1e-3, vdd=6.0)
    assert ref.noise_sigma(temp_c=-200.0) == pytest.approx(ref.noise_sigma(temp_c=-40.0), rel=1e-5)
    assert ref.offset(process="slow", vdd=1.1) == ref.offset(process="slow", vdd=1.3)


def test_conditions_broadcast():
    ref = Reference(full_model())
    shape = ref.delay(np.full((4, 1), 1e-3), vdd=[1.1, 1.2, 1.3]).shape
    assert shape == (4, 3)


def test_a_scaled_process_is_slower_by_its_factor():
    ref = Reference(full_model())
    here = {"vdd": 1.2, "temp_c": 27.0, "vcm": 0.65}
    # 2^-20 V and 2^-10 K of rounding apart.
    ratio = ref.delay(1e-3, process="slow", **here) / ref.delay(1e-3, process="typ", **here)
    assert ratio == pytest.approx(np.exp(0.15), rel=1e-5)


def test_absent_effects_do_nothing():
    ref = Reference(minimal_model())
    assert ref.offset() == 0.0
    assert ref.noise_sigma() == 0.0
    assert ref.reset_delay() == 0.0
    assert ref.probability([-1e-6, 0.0, 1e-6]).tolist() == [0.0, 0.0, 1.0]


def test_unknown_names_are_refused():
    ref = Reference(full_model())
    with pytest.raises(TypeError, match="unknown condition"):
        ref.delay(1e-3, supply=1.2)
    with pytest.raises(ValueError, match="unknown process"):
        ref.delay(1e-3, process="ff")
