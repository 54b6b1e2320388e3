"""Regeneration: how long a latch takes to decide, and how often it does not in time.

Linear regeneration ``C dv/dt = gm v`` leaves its unstable balance as
``v = v0 exp(t / tau)``, ``tau = C / gm`` (H. J. M. Veendrick, IEEE J. Solid-State
Circuits 15, 1980, 169-176). Everything here follows from that one law; it is
exact as the overdrive goes to zero and fails at large overdrive.
"""

from __future__ import annotations

import math

import numpy as np
import numpy.typing as npt
from scipy.special import erf

__all__ = [
    "MEAN_LOG_DELAY_AT_BALANCE",
    "VARIANCE_LOG_DELAY_AT_BALANCE",
    "mean_time_between_failures",
    "metastable_window",
    "regeneration_delay",
    "regeneration_tau",
    "sar_easy_regeneration",
    "sar_regeneration",
    "saturating_latch_delay",
    "unresolved_probability_at_balance",
    "unresolved_probability_uniform",
]

Floats = npt.NDArray[np.float64]

MEAN_LOG_DELAY_AT_BALANCE = 0.5 * (np.euler_gamma + math.log(2.0))
"""``E[-ln|z|]`` of a standard normal `z`: mean delay, in tau, that a balanced input
with noise sigma takes beyond that of an overdrive of one sigma (derived:
``ln z^2`` of a chi-square variable has mean ``psi(1/2) + ln 2``)."""

VARIANCE_LOG_DELAY_AT_BALANCE = math.pi**2 / 8.0
"""Variance of ``-ln|z|``, in tau^2 (derived: a quarter of ``psi'(1/2)``)."""


def _floats(x: npt.ArrayLike) -> Floats:
    return np.asarray(x, dtype=float)


def regeneration_tau(capacitance_f: npt.ArrayLike, transconductance_s: npt.ArrayLike) -> Floats:
    """Return ``tau = C / gm`` in s (Veendrick 1980); `transconductance_s` in siemens."""
    return _floats(capacitance_f) / _floats(transconductance_s)


def regeneration_delay(
    initial_v: npt.ArrayLike, tau_s: npt.ArrayLike, logic_v: npt.ArrayLike
) -> Floats:
    """Return ``tau ln(logic_v / initial_v)``, the time to grow to a logic level, in s.

    Source: Veendrick 1980. No delay from `logic_v` on.

    Parameters
    ----------
    initial_v : array_like
        Magnitude of the imbalance at the start, V, positive.
    tau_s : array_like
        Regeneration time constant, s.
    logic_v : array_like
        Imbalance that counts as decided, V.
    """
    return _floats(tau_s) * np.log(np.maximum(_floats(logic_v) / _floats(initial_v), 1.0))


def saturating_latch_delay(
    initial_v: npt.ArrayLike,
    tau_s: npt.ArrayLike,
    logic_v: npt.ArrayLike,
    saturation_v: npt.ArrayLike,
) -> Floats:
    """Return the time to a logic level of a latch whose current saturates, in s.

    Derived: ``C dv/dt = I tanh(v / Vs)`` with ``tau = C Vs / I`` integrates to
    ``t = tau ln[sinh(logic_v / Vs) / sinh(initial_v / Vs)]``; `regeneration_delay`
    is its limit at large `saturation_v`. No delay from `logic_v` on.

    Parameters
    ----------
    initial_v, tau_s, logic_v : array_like
        As in `regeneration_delay`.
    saturation_v : array_like
        ``Vs``, V.
    """
    start = _floats(initial_v) / _floats(saturation_v)
    end = np.maximum(_floats(logic_v) / _floats(saturation_v), start)
    return _floats(tau_s) * (_log_sinh(end) - _log_sinh(start))


def _log_sinh(x: Floats) -> Floats:
    """Return ``ln(2 sinh x)`` without overflow."""
    return x + np.log(-np.expm1(-2.0 * x))


def metastable_window(
    resolve_time_s: npt.ArrayLike, tau_s: npt.ArrayLike, window_at_edge_v: npt.ArrayLike
) -> Floats:
    """Return the width of the input interval still unresolved after a time, in V.

    ``W = W0 exp(-t / tau)``: Veendrick's law read the other way.
    """
    return _floats(window_at_edge_v) * np.exp(-_floats(resolve_time_s) / _floats(tau_s))


def unresolved_probability_uniform(window_v: npt.ArrayLike, span_v: npt.ArrayLike) -> Floats:
    """Return the probability that an input uniform over a span falls into the window.

    ``W / S`` (Veendrick 1980), at most 1; widths in V.
    """
    return np.minimum(_floats(window_v) / _floats(span_v), 1.0)


def unresolved_probability_at_balance(window_v: npt.ArrayLike, sigma_v: npt.ArrayLike) -> Floats:
    """Return the probability that noise leaves an input at the trip point within the window.

    ``erf(W / (2 sqrt(2) sigma))``: a normal variable within ``W/2`` of its mean (derived).
    """
    share: Floats = erf(_floats(window_v) / (2.0 * np.sqrt(2.0) * _floats(sigma_v)))
    return share


def mean_time_between_failures(
    resolve_time_s: npt.ArrayLike,
    tau_s: npt.ArrayLike,
    window_s: npt.ArrayLike,
    clock_hz: npt.ArrayLike,
    data_hz: npt.ArrayLike,
) -> Floats:
    """Return the mean time between failures of a synchroniser, in s.

    ``exp(t_r / tau) / (T_w f_clk f_data)`` (Veendrick 1980); infinite where it
    exceeds what a double holds.

    Parameters
    ----------
    resolve_time_s : array_like
        Time given to resolve, s.
    tau_s : array_like
        Regeneration time constant, s.
    window_s : array_like
        Metastable window in time at the edge, s.
    clock_hz, data_hz : array_like
        Rates of decisions and of input changes, Hz.
    """
    failure_hz = _floats(window_s) * _floats(clock_hz) * _floats(data_hz)
    exponent = _floats(resolve_time_s) / _floats(tau_s) - np.log(failure_hz)
    with np.errstate(over="ignore"):
        mtbf_s: Floats = np.exp(exponent)
    return mtbf_s


def sar_regeneration(bits: npt.ArrayLike) -> Floats:
    """Return the mean regeneration time of all decisions of an asynchronous SAR conversion, in tau.

    ``ln2 B(B+1)/2 + B`` for the logarithmic law with the full scale (peak to
    peak) as logic level, noise off. Derived: at decision `i` the distance to the
    threshold is uniform up to ``full scale / 2^i``, which costs ``i ln2 + 1``.
    """
    b = _floats(bits)
    return math.log(2.0) * b * (b + 1.0) / 2.0 + b


def sar_easy_regeneration(bits: npt.ArrayLike) -> Floats:
    """Return the same without the closest decision of each conversion, in tau.

    ``ln2 (B+1)(B-2)/2 + B - 1``. Derived: the closest of the thresholds is
    uniform up to half a step away and costs ``(B+1) ln2 + 1`` (the two end codes,
    with one threshold only, are neglected).
    """
    b = _floats(bits)
    return math.log(2.0) * (b + 1.0) * (b - 2.0) / 2.0 + b - 1.0
