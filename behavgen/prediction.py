"""Numbers to decide with: how often decisions go wrong or stay open, and how long they take.

    predict(model, Levels.of(1e-3), resolve_time_s=400e-12, clock_hz=1e9, vdd=1.2)

An interval moves one fitted number at a time, trip point, noise sigma, window and
mismatch sigma, through its own interval and adds what each does to the answer in
squares, on the scale of the normal quantile of a probability (G. Y. Zou, A. Donner,
Statistics in Medicine 27, 2008, 1693-1702). To first order this is the delta method;
where one number rules, as sigma does far out and tau on a long wait, the interval is
that number's, carried over exactly. Probabilities stay logarithms throughout.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.special import log_ndtr, ndtri, ndtri_exp

from behavgen.applied_inputs import Comparators, Levels, Uniform
from behavgen.bands import Band, Bands
from behavgen.model import ComparatorModel
from behavgen.operating_point import evaluate, operating_point
from behavgen.reference import Reference

__all__ = ["INSTANCES", "Prediction", "predict"]

Floats = npt.NDArray[np.float64]
Conditions = dict[str, npt.ArrayLike]

INSTANCES = ("nominal", "average", "3-sigma")
"""Whose numbers: those of the instance without mismatch, their mean over all instances,
or of each number by itself the worst that an instance within 3 sigma of mismatch has."""

_FARTHEST_SIGMAS = 3.0
_OFFSET, _SIGMA, _WINDOW, _SPREAD = range(4)
"""Fitted numbers: trip point in V and ln of sigma, half window and mismatch sigma in V."""
_PARTS = (-1.0, -0.5, 0.5, 1.0)
"""Of its half interval, by which a fitted number is moved."""
_LN_10 = np.log(10.0)
_LOG_WIDEST = 600.0
"""ln of a window in V that no input leaves; the exponential of more would overflow."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Prediction:
    """What is to be expected, in one shape; None where it was not asked or not characterised.

    Intervals are NaN where the model does not know the error of its own numbers.

    Parameters
    ----------
    level : float
        Confidence of the intervals.
    log10_noise_error : Band or None
        Decimal logarithm of the probability that noise turns the bit, were every
        decision to resolve.
    log10_unresolved : Band or None
        The same of a decision unresolved after the resolve time.
    log10_error : Band or None
        The same of a decision that is wrong or unresolved.
    log10_time_between_failures_s : Band or None
        Decimal logarithm of the mean time between unresolved decisions, s.
    delay_s : Band or None
        Delay, noise left out, at `overdrive_v`, s.
    overdrive_v : ndarray or None
        Overdrive of the input nearest to the trip point, V, not below the model's floor;
        None for a span.
    sigmas : ndarray or None
        How far out the Gaussian law is used, in sigmas.
    log10_half_window_v : ndarray or None
        Decimal logarithm of the overdrive in V down to which the delay law is used.
    """

    level: float
    log10_noise_error: Band | None
    log10_unresolved: Band | None
    log10_error: Band | None
    log10_time_between_failures_s: Band | None
    delay_s: Band | None
    overdrive_v: Floats | None
    sigmas: Floats | None
    log10_half_window_v: Floats | None


def predict(
    model: ComparatorModel,
    inputs: Levels | Uniform,
    *,
    resolve_time_s: npt.ArrayLike | None = None,
    clock_hz: npt.ArrayLike | None = None,
    instances: str = "nominal",
    level: float = 0.95,
    **condition: npt.ArrayLike,
) -> Prediction:
    """Predict errors, waits and delays.

    Parameters
    ----------
    model : ComparatorModel
    inputs : Levels or Uniform
        What is applied.
    resolve_time_s : array_like, optional
        From the clock edge until the outputs must be valid, s.
    clock_hz : array_like, optional
        Decisions a second, Hz.
    instances : str
        One of `INSTANCES`.
    level : float
        Confidence, 0..1.
    **condition : array_like
        As of `Reference`; all are broadcast against the inputs.

    Raises
    ------
    ValueError
        For an unknown process or choice of instances.
    """
    if instances not in INSTANCES:
        raise ValueError(f"no instances {instances!r}; use one of {INSTANCES}")
    bands = Bands(model, level)
    numbers = _fitted_numbers(bands, inputs.shape, resolve_time_s, instances, condition)
    moved = _moved(*numbers, inputs)
    these, nominal = _comparators(moved, instances), _comparators(moved[:, 0], instances)
    noise, unresolved, either = (_log10_band(log_p) for log_p in inputs.failures(these))
    noisy = model.noise is not None
    waits = resolve_time_s is not None and model.delay is not None
    know_noise = model.noise is None or bool(model.noise.surface.covariance)
    know_delay = model.delay is None or bool(model.delay.scatter or model.delay.lack_of_fit)
    unresolved = _with_interval(unresolved, known=know_delay)
    return Prediction(
        level=level,
        log10_noise_error=_with_interval(noise, known=know_noise) if noisy else None,
        log10_unresolved=unresolved if waits else None,
        log10_error=_with_interval(either, known=know_noise and know_delay) if waits else None,
        log10_time_between_failures_s=_time_between(unresolved, clock_hz)
        if waits and clock_hz is not None
        else None,
        delay_s=_delay(bands, inputs.nearest_overdrive_v(these), condition, known=know_delay),
        overdrive_v=_above_floor(inputs.nearest_overdrive_v(nominal), model),
        sigmas=inputs.sigmas(nominal) if noisy else None,
        log10_half_window_v=nominal.log_half_window / _LN_10 if waits else None,
    )


def _fitted_numbers(
    bands: Bands,
    shape: tuple[int, ...],
    resolve_time_s: npt.ArrayLike | None,
    instances: str,
    condition: Conditions,
) -> tuple[Floats, Floats]:
    """Return the fitted numbers and the half widths of their intervals, shape (4, ...) each."""
    offset, sigma = bands.offset(**condition), bands.noise_sigma(**condition)
    with np.errstate(divide="ignore", invalid="ignore"):
        log_sigma = np.log(sigma.value)
        half_sigma = np.where(sigma.value > 0.0, np.log(sigma.high / sigma.value), 0.0)
    window, half_window = _log_half_window(bands, resolve_time_s, condition)
    spread, half_spread = _log_spread(bands, instances, condition)
    value = (offset.value, log_sigma, window, spread)
    half = (offset.high - offset.value, half_sigma, half_window, half_spread)
    *rows, _ = np.broadcast_arrays(*value, *half, np.empty(shape))
    return np.stack(rows[:4]), np.stack(rows[4:])


def _log_half_window(
    bands: Bands, resolve_time_s: npt.ArrayLike | None, condition: Conditions
) -> tuple[Floats, Floats]:
    """Return ln of half the window in V; of nothing where every decision counts as resolved."""
    if resolve_time_s is None or bands.model.delay is None:
        return np.asarray(-np.inf), np.zeros(())
    band = bands.log_window(resolve_time_s, **condition)
    finite = np.isfinite(band.value)
    return band.value - np.log(2.0), np.where(finite, band.high, 0.0) - np.where(
        finite, band.value, 0.0
    )


def _log_spread(bands: Bands, instances: str, condition: Conditions) -> tuple[Floats, Floats]:
    """Return ln of the mismatch sigma in V; of nothing where one instance is asked for.

    Its standard error is ``1 / sqrt(2 (n - 1))`` for `n` instances: the large-sample
    error of a normal sample's standard deviation.
    """
    effect = bands.model.mismatch
    if instances == "nominal" or effect is None:
        return np.asarray(-np.inf), np.zeros(())
    point = operating_point(bands.model, (), condition)
    components = [evaluate(component, point) for component in effect.components]
    spread = np.sqrt(np.sum(np.square(components), axis=0)).reshape(point.shape)
    error = 1.0 / np.sqrt(2.0 * max(effect.instances - 1, 1))
    with np.errstate(divide="ignore"):
        return np.log(spread), np.full(spread.shape, ndtri(0.5 + 0.5 * bands.level) * error)


def _moved(value: Floats, half: Floats, inputs: Levels | Uniform) -> Floats:
    """Return the fitted numbers as they are, then each moved within its interval.

    Shape (4, cases, ...), see `_by_number`. The trip point also moves towards the
    nearest input as far as it can: there waits are longest.
    """
    cases = [value]
    for number in range(len(value)):
        places = [value[number] + part * half[number] for part in _PARTS]
        if number == _OFFSET:
            nearest = inputs.nearest_trip_point_v(value[_OFFSET])
            places.append(np.clip(nearest, places[0], places[-1]))
        for place in places:
            case = value.copy()
            case[number] = place
            cases.append(case)
    return np.stack(cases, axis=1)


def _by_number(moved: Floats) -> list[Floats]:
    """Return for each fitted number the cases in which it was moved."""
    trip_point, others = moved[1 : 2 + len(_PARTS)], moved[2 + len(_PARTS) :]
    return [trip_point, *others.reshape(-1, len(_PARTS), *moved.shape[1:])]


def _comparators(numbers: Floats, instances: str) -> Comparators:
    sigma, spread = np.exp(numbers[_SIGMA]), np.exp(numbers[_SPREAD])
    return Comparators(
        offset_v=numbers[_OFFSET],
        # The mean over normal instances is that of one instance with both variances.
        sigma_v=np.hypot(sigma, spread) if instances == "average" else sigma,
        log_half_window=np.minimum(numbers[_WINDOW], _LOG_WIDEST),
        farthest_v=_FARTHEST_SIGMAS * spread if instances == "3-sigma" else None,
    )


def _log10_band(log_p: Floats) -> Band:
    """Return the decimal logarithm of a probability and its interval from its moved cases."""
    quantile = ndtri_exp(np.minimum(log_p, 0.0))
    low, high = _in_squares(quantile[0], _by_number(quantile))
    return Band(value=log_p[0] / _LN_10, low=log_ndtr(low) / _LN_10, high=log_ndtr(high) / _LN_10)


def _time_between(unresolved: Band, clock_hz: npt.ArrayLike) -> Band:
    """Return the decimal logarithm of ``1 / (f_clk P(unresolved))`` in s."""
    log_clock = np.log10(np.asarray(clock_hz, dtype=float))
    return Band(
        value=-(log_clock + unresolved.value),
        low=-(log_clock + unresolved.high),
        high=-(log_clock + unresolved.low),
    )


def _above_floor(overdrive_v: Floats | None, model: ComparatorModel) -> Floats | None:
    if overdrive_v is None or model.delay is None:
        return overdrive_v
    return np.maximum(overdrive_v, model.delay.floor_v)


def _delay(
    bands: Bands, overdrive_v: Floats | None, condition: Conditions, *, known: bool
) -> Band | None:
    """Return the delay at an overdrive and its moved cases; the law's own interval moves it too."""
    if overdrive_v is None or bands.model.delay is None:
        return None
    own = bands.delay(overdrive_v[0], **condition)
    log_delay = np.log(Reference(bands.model).delay(overdrive_v, **condition))
    ends = [*_by_number(log_delay), np.log(np.stack([own.low, own.high]))]
    low, high = _in_squares(log_delay[0], ends)
    return _with_interval(Band(value=own.value, low=np.exp(low), high=np.exp(high)), known=known)


def _with_interval(band: Band, *, known: bool) -> Band:
    nothing = np.full_like(band.value, np.nan)
    return band if known else Band(value=band.value, low=nothing, high=nothing)


def _in_squares(value: Floats, ends: list[Floats]) -> tuple[Floats, Floats]:
    """Return the interval that independent causes give together, each having moved the value.

    Falls and rises are added in squares apart. A value at infinity, as the quantile of
    what cannot happen, has the farthest of the ends.
    """
    lowest = np.stack([np.minimum(end.min(axis=0), value) for end in ends])
    highest = np.stack([np.maximum(end.max(axis=0), value) for end in ends])
    with np.errstate(invalid="ignore"):
        low = value - np.sqrt(np.sum((value - lowest) ** 2, axis=0))
        high = value + np.sqrt(np.sum((highest - value) ** 2, axis=0))
    known = np.isfinite(value)
    return np.where(known, low, lowest.min(axis=0)), np.where(known, high, highest.max(axis=0))
