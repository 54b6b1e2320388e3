"""Predictions against closed forms, against the reference's own decisions, and their properties."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.special import erf, ndtr
from scipy.stats import binomtest

from behavgen.applied_inputs import Levels, Uniform
from behavgen.bands import Band
from behavgen.formulas.metastability import mean_time_between_failures
from behavgen.model import ComparatorModel, MismatchEffect, NoiseEffect, OffsetEffect
from behavgen.operating_point import evaluate, operating_point
from behavgen.prediction import Prediction, predict
from behavgen.reference import Reference
from tests.example_models import constant_surface, full_model, minimal_model

TAU_S = float(np.exp(-25.328436))
NODE_S = float(np.exp(-24.412145))
SIGMA_V, OFFSET_V = 1e-3, 2e-3
FALSE_ALARM = 1e-4
"""Of each comparison with counted decisions, if seeds were fresh; they are fixed."""


def plain_model(*, offset_error_v: float = 0.0, sigma_error: float = 0.0) -> ComparatorModel:
    """Return a cell of closed forms: tau 10 ps, 25 ps at 0.5 V, noise 1 mV, trip point 2 mV.

    The errors are standard errors of the trip point and of ln sigma.
    """
    offset = constant_surface("V", "plain", OFFSET_V, "nominal")
    sigma = constant_surface("V", "log", float(np.log(SIGMA_V)), "nominal")
    return replace(
        minimal_model(),
        offset=OffsetEffect(surface=replace(offset, covariance=((offset_error_v**2,),))),
        noise=NoiseEffect(surface=replace(sigma, covariance=((sigma_error**2,),))),
    )


def uncertain_tau_model() -> ComparatorModel:
    """Return the plain cell with one percent of standard error on tau alone."""
    model = plain_model()
    assert model.delay is not None
    delay = replace(
        model.delay, scatter=((1e-4, 0.0), (0.0, 0.0)), scatter_freedom=10**6, leverage=((1.0,),)
    )
    return replace(model, delay=delay)


def value(band: Band | None) -> float:
    assert band is not None
    return float(band.value)


def ends(band: Band | None) -> tuple[float, float]:
    assert band is not None
    return float(band.low), float(band.high)


def window_v(time_s: float) -> float:
    """Return 2 v_node exp(-(t - t_node) / tau), the two-parameter law read the other way."""
    return float(np.exp(-(time_s - NODE_S) / TAU_S))


@pytest.mark.parametrize(("z", "log10"), [(7.03448, -12.0), (7.94135, -15.0)])
@pytest.mark.parametrize("right_bit", [0, 1])
def test_sigmas_that_go_with_bit_error_rates(z: float, log10: float, right_bit: int) -> None:
    # Tables of the normal tail, sigmas rounded to 5e-6.
    sign = 1 if right_bit else -1
    inputs = Levels.of(OFFSET_V + sign * z * SIGMA_V, right_bit=right_bit)
    found = predict(plain_model(), inputs)
    assert value(found.log10_noise_error) == pytest.approx(log10, abs=2e-5)
    assert found.sigmas == pytest.approx(z)
    same = predict(plain_model(), Levels.of(sign * z * SIGMA_V, from_trip_point=True))
    assert value(same.log10_noise_error) == pytest.approx(value(found.log10_noise_error))


def test_uniform_input_is_unresolved_by_window_over_span() -> None:
    time_s = 200e-12
    found = predict(plain_model(), Uniform(span_v=np.array(0.8)), resolve_time_s=time_s)
    assert 10 ** value(found.log10_unresolved) == pytest.approx(window_v(time_s) / 0.8, rel=1e-5)
    noise = np.sqrt(2.0 / np.pi) * SIGMA_V / 0.8  # twice the integral of the normal tail
    assert 10 ** value(found.log10_noise_error) == pytest.approx(noise)


def test_balanced_input_is_unresolved_by_the_error_function() -> None:
    time_s = np.array([60e-12, 100e-12, 300e-12])
    found = predict(plain_model(), Levels.of(OFFSET_V, right_bit=1), resolve_time_s=time_s)
    window = np.array([window_v(t) for t in time_s])
    expected = erf(window / (2.0 * np.sqrt(2.0) * SIGMA_V))
    assert found.log10_unresolved is not None
    np.testing.assert_allclose(10**found.log10_unresolved.value, expected, rtol=1e-5)


def test_time_between_failures_has_the_form_of_a_synchroniser() -> None:
    # exp(t / tau) / (T_w f_clk f_data), with the share of inputs in the window at t = 0
    # in place of T_w f_data: 2 v_node exp(t_node / tau) / span.
    span_v, clock_hz, time_s = 1.0, 2e9, 500e-12
    inputs = Uniform(span_v=np.array(span_v))
    found = predict(plain_model(), inputs, resolve_time_s=time_s, clock_hz=clock_hz)
    expected_s = mean_time_between_failures(time_s, TAU_S, window_v(0.0) / span_v, clock_hz, 1.0)
    assert 10 ** value(found.log10_time_between_failures_s) == pytest.approx(
        float(expected_s), rel=1e-4
    )


def test_a_long_wait_does_not_underflow() -> None:
    time_s = np.array([1e-9, 1e-8, 1e-7])
    inputs = Uniform(span_v=np.array(1.0))
    found = predict(uncertain_tau_model(), inputs, resolve_time_s=time_s, clock_hz=1e9)
    expected = -(time_s - NODE_S) / TAU_S / np.log(10.0)
    assert found.log10_unresolved is not None
    np.testing.assert_allclose(found.log10_unresolved.value, expected, rtol=1e-6)
    assert found.log10_time_between_failures_s is not None
    np.testing.assert_allclose(found.log10_time_between_failures_s.value, -9.0 - expected)
    # One percent of tau moves ln W = -(t - t_node) / tau by one percent: 1.96 of them.
    between, unresolved = found.log10_time_between_failures_s, found.log10_unresolved
    np.testing.assert_allclose(between.low, -9.0 - unresolved.high)
    np.testing.assert_allclose(between.high, -9.0 - unresolved.low)
    half = unresolved.high - unresolved.value
    np.testing.assert_allclose(half, 1.96e-2 * np.abs(expected), rtol=1e-2)


@pytest.mark.parametrize("vdiff_v", [-3e-3, 1e-3, 6e-3])
def test_interval_of_one_number_is_carried_over_exactly(vdiff_v: float) -> None:
    # The ends are the probabilities at the ends of the trip point's or of sigma's interval.
    distance_v, inputs = vdiff_v - OFFSET_V, Levels.of(vdiff_v, right_bit=1)
    low, high = ends(predict(plain_model(offset_error_v=1e-5), inputs).log10_noise_error)
    half_v = 1.959964 * 1e-5
    assert 10**low == pytest.approx(float(ndtr(-(distance_v + half_v) / SIGMA_V)), rel=1e-6)
    assert 10**high == pytest.approx(float(ndtr(-(distance_v - half_v) / SIGMA_V)), rel=1e-6)
    found = ends(predict(plain_model(sigma_error=0.03), inputs).log10_noise_error)
    sigmas_v = SIGMA_V * np.exp(1.959964 * 0.03 * np.array([-1.0, 1.0]))
    expected = np.sort(ndtr(-distance_v / sigmas_v))
    np.testing.assert_allclose(10 ** np.array(found), expected, rtol=1e-6)


def test_interval_of_two_causes_adds_in_squares() -> None:
    # 0.1 sigma of offset and 3 % of sigma at 4 sigmas: z moves by 1.96 hypot(0.1, 0.12).
    model = plain_model(offset_error_v=1e-4, sigma_error=0.03)
    low, high = ends(predict(model, Levels.of(OFFSET_V + 4e-3)).log10_noise_error)
    half = 1.96 * np.hypot(0.1, 0.12)
    assert low == pytest.approx(np.log10(ndtr(-4.0 - half)), abs=0.06)
    assert high == pytest.approx(np.log10(ndtr(-4.0 + half)), abs=0.06)


def test_no_interval_where_the_model_knows_none() -> None:
    found = predict(full_model(), Levels.of(1e-3), resolve_time_s=4e-10, clock_hz=1e9)
    for band in (found.log10_noise_error, found.log10_unresolved, found.log10_error,
                 found.log10_time_between_failures_s, found.delay_s):  # fmt: skip
        assert band is not None
        assert np.isfinite(band.value).all()
        assert np.isnan(band.low).all()
        assert np.isnan(band.high).all()


def test_what_is_not_characterised_is_not_predicted() -> None:
    found = predict(minimal_model(), Levels.of(1e-3), resolve_time_s=2e-10)
    assert found.log10_noise_error is None
    assert found.log10_unresolved is not None
    bare = replace(full_model(), delay=None)
    found = predict(bare, Levels.of(1e-3), resolve_time_s=2e-10, clock_hz=1e9)
    assert found.delay_s is None
    assert found.log10_unresolved is None
    assert found.log10_time_between_failures_s is None
    assert found.log10_noise_error is not None


def test_unknown_instances_are_refused() -> None:
    with pytest.raises(ValueError, match="no instances 'worst'"):
        predict(full_model(), Levels.of(1e-3), instances="worst")


def agrees(log10_p: float, count: int, trials: int) -> bool:
    return bool(binomtest(count, trials, 10**log10_p).pvalue > FALSE_ALARM)


@pytest.mark.parametrize("vdiff_v", [-1e-3, 1.2e-3, 2e-3])
@pytest.mark.parametrize("phase_ticks", [220_000, 260_000])
def test_shares_of_decisions_of_the_reference(vdiff_v: float, phase_ticks: int) -> None:
    # Family-wise false-alarm rate of the 18 comparisons below 2e-3 for fresh seeds.
    model, trials = full_model(), 100_000
    where = {"vdd": 1.25, "temp_c": 60.0, "vcm": 0.6, "process": "typ"}
    trace = Reference(model, seed=11).trace(np.full(trials, vdiff_v), phase_ticks, **where)
    wrong, late = trace.leaning == 0, trace.unresolved
    inputs = Levels.of(vdiff_v, right_bit=1)
    found = predict(model, inputs, resolve_time_s=phase_ticks * 1e-15, **where)
    assert agrees(value(found.log10_noise_error), int(wrong.sum()), trials)
    assert agrees(value(found.log10_unresolved), int(late.sum()), trials)
    assert agrees(value(found.log10_error), int((wrong | late).sum()), trials)


def test_shares_over_levels_and_over_a_span() -> None:
    model, trials, ticks = full_model(), 200_000, 240_000
    rng = np.random.default_rng(5)
    reference = Reference(model, seed=3)
    levels, weight = np.array([-2e-3, 1e-3, 4e-3]), np.array([1.0, 2.0, 1.0])
    applied = rng.choice(levels, trials, p=weight / weight.sum())
    trace = reference.trace(applied, ticks)
    wrong, late = trace.leaning != (applied > 0.0), trace.unresolved
    found = predict(model, Levels.of(levels, weight=weight), resolve_time_s=ticks * 1e-15)
    assert agrees(value(found.log10_noise_error), int(wrong.sum()), trials)
    assert agrees(value(found.log10_unresolved), int(late.sum()), trials)
    assert agrees(value(found.log10_error), int((wrong | late).sum()), trials)

    from_trip = rng.uniform(-2e-3, 2e-3, trials)
    trace = reference.trace(from_trip + reference.offset(), ticks, first_decision=trials)
    wrong, late = trace.leaning != (from_trip > 0.0), trace.unresolved
    found = predict(model, Uniform(span_v=np.array(4e-3)), resolve_time_s=ticks * 1e-15)
    assert agrees(value(found.log10_noise_error), int(wrong.sum()), trials)
    assert agrees(value(found.log10_unresolved), int(late.sum()), trials)
    assert agrees(value(found.log10_error), int((wrong | late).sum()), trials)


def test_average_over_instances() -> None:
    # 3000 instances; standard error of their mean error probability, false alarm 1e-4.
    model, vdiff_v = full_model(), 5e-3
    wrong = np.array(
        [
            1.0 - float(Reference(model, seed=seed, mismatch=True).probability(vdiff_v))
            for seed in range(1, 3001)
        ]
    )
    found = predict(model, Levels.of(vdiff_v), instances="average")
    error = 3.9 * wrong.std() / np.sqrt(len(wrong))
    assert 10 ** value(found.log10_noise_error) == pytest.approx(wrong.mean(), abs=error)


def mismatched_model(instances: int = 19) -> ComparatorModel:
    """Return the plain cell with a mismatch of 2 mV per sigma."""
    component = constant_surface("V", "plain", 2e-3, "nominal")
    effect = MismatchEffect(components=(component,), instances=instances)
    return replace(plain_model(), mismatch=effect)


def test_average_adds_variances_and_knows_the_mismatch_by_its_instances() -> None:
    # A sum of independent normals is normal with the sum of their variances.
    found = predict(mismatched_model(), Levels.of(OFFSET_V + 6e-3), instances="average")
    total_v = np.hypot(SIGMA_V, 2e-3)
    assert 10 ** value(found.log10_noise_error) == pytest.approx(float(ndtr(-6e-3 / total_v)))
    # 19 instances: ln of their standard deviation is known to 1 / sqrt(2 * 18) = 1/6.
    spread_v = 2e-3 * np.exp(1.959964 / 6.0 * np.array([-1.0, 1.0]))
    expected = ndtr(-6e-3 / np.hypot(SIGMA_V, spread_v))
    np.testing.assert_allclose(10 ** np.array(ends(found.log10_noise_error)), expected, rtol=1e-6)


@pytest.mark.parametrize("vdiff_v", [30e-3, -30e-3, 5e-3, -5e-3])
def test_worst_of_the_instances_within_3_sigma(vdiff_v: float) -> None:
    model, time_s, right_bit = full_model(), 300e-12, int(vdiff_v > 0.0)
    spread_v = float(np.hypot(*_component_values(model)))
    shifts = np.linspace(-3.0, 3.0, 1201) * spread_v
    found = predict(model, Levels.of(vdiff_v), resolve_time_s=time_s, instances="3-sigma")
    # An instance with another trip point is the nominal one with another input.
    inputs = Levels.of(vdiff_v - shifts, right_bit=right_bit)
    others = predict(model, inputs, resolve_time_s=time_s)
    for worst, of_all in ((found.log10_noise_error, others.log10_noise_error),
                          (found.log10_unresolved, others.log10_unresolved),
                          (found.log10_error, others.log10_error)):  # fmt: skip
        assert of_all is not None
        assert value(worst) == pytest.approx(float(of_all.value.max()), abs=1e-3)
    from_trip_v = abs(vdiff_v - float(Reference(model).offset()))
    slowest = Reference(model).delay(max(from_trip_v - 3.0 * spread_v, 1e-15))
    assert value(found.delay_s) == pytest.approx(float(slowest))


def test_worst_instance_over_a_span() -> None:
    model, trials, ticks = full_model(), 200_000, 240_000
    shift_v = 3.0 * float(np.hypot(*_component_values(model)))
    reference = Reference(model, seed=3, offset_shift_v=shift_v)
    from_trip = np.random.default_rng(6).uniform(-0.05, 0.05, trials)
    trace = reference.trace(from_trip + reference.offset(), ticks)
    wrong, late = trace.leaning != (from_trip > 0.0), trace.unresolved
    span = Uniform(span_v=np.array(0.1))
    found = predict(model, span, resolve_time_s=ticks * 1e-15, instances="3-sigma")
    assert agrees(value(found.log10_noise_error), int(wrong.sum()), trials)
    assert agrees(value(found.log10_error), int((wrong | late).sum()), trials)


def _component_values(model: ComparatorModel) -> list[float]:
    """Return the components' values at the middle of the box, one sigma each."""
    assert model.mismatch is not None
    point = operating_point(model, (), {})
    return [float(evaluate(component, point)[0]) for component in model.mismatch.components]


def test_delay_is_that_of_the_reference_at_the_overdrive() -> None:
    found = predict(plain_model(offset_error_v=1e-4), Levels.of(OFFSET_V - 5e-3))
    # 25 ps + tau ln(0.5 V / 5 mV), the two-parameter law
    delay_s = NODE_S + TAU_S * np.log(0.5 / 5e-3)
    assert value(found.delay_s) == pytest.approx(delay_s)
    assert found.overdrive_v == pytest.approx(5e-3)


def test_trip_point_error_moves_the_delay() -> None:
    model = uncertain_tau_model()
    assert model.offset is not None
    surface = replace(model.offset.surface, covariance=((1e-4**2,),))
    model = replace(model, offset=replace(model.offset, surface=surface))
    low, high = ends(predict(model, Levels.of(OFFSET_V + 1e-3)).delay_s)
    # 1.96 * 0.1 mV of 1 mV moves tau ln(overdrive); one percent of tau moves tau ln(0.5 / v).
    by_offset = TAU_S * np.log(1.0 / (1.0 - 0.196))
    by_tau = 0.0196 * TAU_S * np.log(0.5 / 1e-3)
    delay_s = NODE_S + TAU_S * np.log(0.5 / 1e-3)
    assert high - delay_s == pytest.approx(np.hypot(by_offset, by_tau), rel=0.03)
    assert low < delay_s


def test_an_uncertain_trip_point_may_lie_on_the_input() -> None:
    # 1 uV from it with 10 uV of standard error: the delay may be that at the model's floor.
    model = plain_model(offset_error_v=1e-5)
    model = replace(model, delay=uncertain_tau_model().delay)
    _, high = ends(predict(model, Levels.of(OFFSET_V + 1e-6)).delay_s)
    assert high > NODE_S + TAU_S * np.log(0.5 / 1e-15)


@settings(max_examples=60, deadline=None)
@given(
    distance=st.floats(1e-5, 0.05),
    more=st.floats(1e-6, 0.05),
    time_s=st.floats(6e-11, 1e-9),
    longer_s=st.floats(1e-12, 1e-9),
    level=st.floats(0.5, 0.98),
)
def test_orders_that_hold_for_all_inputs(
    distance: float, more: float, time_s: float, longer_s: float, level: float
) -> None:
    model = plain_model(offset_error_v=1e-5, sigma_error=0.02)
    model = replace(model, delay=uncertain_tau_model().delay)

    def ask(overdrive_v: float, time_s: float, level: float = 0.95) -> Prediction:
        inputs = Levels.of(OFFSET_V + overdrive_v, right_bit=1)
        return predict(model, inputs, resolve_time_s=time_s, clock_hz=1e9, level=level)

    base, far = ask(distance, time_s), ask(distance + more, time_s)
    late, sure = ask(distance, time_s + longer_s), ask(distance, time_s, 0.99)
    less_sure = ask(distance, time_s, level)
    assert value(far.log10_noise_error) <= value(base.log10_noise_error)
    assert value(far.log10_unresolved) <= value(base.log10_unresolved) + 1e-9
    assert value(far.delay_s) <= value(base.delay_s)
    assert value(late.log10_unresolved) <= value(base.log10_unresolved)
    assert value(late.log10_time_between_failures_s) >= value(base.log10_time_between_failures_s)
    assert value(base.log10_error) >= value(base.log10_noise_error)
    for name in ("log10_noise_error", "log10_unresolved", "log10_error", "delay_s"):
        wide, narrow = (ends(getattr(found, name)) for found in (sure, less_sure))
        assert wide[0] <= narrow[0] <= value(getattr(base, name)) + 1e-12
        assert value(getattr(base, name)) - 1e-12 <= narrow[1] <= wide[1]


def test_conditions_are_broadcast_against_inputs() -> None:
    found = predict(
        full_model(),
        Levels.of(np.array([[1e-3], [5e-3]]), from_trip_point=True),
        resolve_time_s=[3e-10, 4e-10, 5e-10],
        vdd=1.1,
    )
    assert found.log10_error is not None
    assert found.delay_s is not None
    assert found.log10_error.value.shape == found.delay_s.value.shape == (2, 3)
    one = predict(full_model(), Levels.of(5e-3, from_trip_point=True), resolve_time_s=4e-10,
                  vdd=1.1)  # fmt: skip
    assert found.log10_error.value[1, 1] == pytest.approx(value(one.log10_error))
