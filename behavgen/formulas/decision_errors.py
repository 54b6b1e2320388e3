"""How often one decision goes wrong, from noise and from metastability, in logarithms.

A decision compares ``e = distance + sigma z``, `z` standard normal, with zero: the
bit is wrong where `e` lies on the wrong side, and the decision unresolved where
``|e| < half_window``. `distance` is that of the input from the trip point, positive
towards the right bit. All probabilities are natural logarithms, so that none
underflows; with sigma zero they are those of a comparator without noise.

Derived from the Gaussian law of noise (D. J. Finney, Probit Analysis, 1971) and
the window of linear regeneration (H. J. M. Veendrick, IEEE J. Solid-State Circuits
15, 1980, 169-176).
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy.special import log_ndtr, ndtr

from behavgen.formulas.gaussian import normal_pdf

__all__ = [
    "log_error_probability",
    "log_error_probability_uniform",
    "log_unresolved_probability",
    "log_unresolved_probability_uniform",
]

Floats = npt.NDArray[np.float64]

_SMALLEST_SIGMA_V = 1e-300
"""Stands for no noise: any distance is then certain."""
_FEW_NODES, _FEW_WEIGHTS = np.polynomial.legendre.leggauss(8)
_NODES, _WEIGHTS = np.polynomial.legendre.leggauss(32)
"""On -1..1; the integrands below are smooth on the intervals given to them."""


def log_error_probability(
    distance_v: npt.ArrayLike, sigma_v: npt.ArrayLike, half_window_v: npt.ArrayLike = 0.0
) -> Floats:
    """Return ln P(e < half_window): that the right bit does not come out in time.

    ``Phi((half_window - distance) / sigma)``; with no window the bit error rate of
    noise alone. Arguments in V; they broadcast.
    """
    sigma = _some_noise(sigma_v)
    with np.errstate(over="ignore"):
        margin = np.asarray(half_window_v, dtype=float) - np.asarray(distance_v, dtype=float)
        log_p: Floats = log_ndtr(margin / sigma)
    return log_p


def log_unresolved_probability(
    distance_v: npt.ArrayLike, sigma_v: npt.ArrayLike, log_half_window: npt.ArrayLike
) -> Floats:
    """Return ln P(|e| < half_window): that noise leaves a decision within the window.

    ``Phi((h - d) / sigma) - Phi((-h - d) / sigma)``; at the trip point this is
    ``erf(h / (sqrt(2) sigma))``. Narrow windows are integrated about their middle,
    where the difference would cancel.

    Parameters
    ----------
    distance_v, sigma_v : array_like
        V; the sign of the distance does not matter.
    log_half_window : array_like
        Natural logarithm of half the window in V; infinite where nothing resolves.
    """
    sigma = _some_noise(sigma_v)
    log_half = np.asarray(log_half_window, dtype=float)
    with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
        middle = np.abs(np.asarray(distance_v, dtype=float)) / sigma
        log_reach = log_half - np.log(sigma)
        reach = np.exp(log_reach)
        upper, lower = log_ndtr(reach - middle), log_ndtr(-reach - middle)
        wide = upper + _log_rest(np.where(np.isneginf(upper), -1.0, lower - upper))
        narrow = _log_share_about(middle, log_reach, np.minimum(reach, 1.0))
    return np.where(log_reach + np.log(np.maximum(middle, 1.0)) < np.log(0.5), narrow, wide)


def _log_rest(log_p: Floats) -> Floats:
    """Return ln(1 - p), keeping its digits for every `p` (M. Maechler, note to Rmpfr, 2012)."""
    small = np.log1p(-np.exp(np.minimum(log_p, -np.log(2.0))))
    return np.where(log_p < -np.log(2.0), small, np.log(-np.expm1(log_p)))


def _log_share_about(middle: Floats, log_reach: Floats, reach: Floats) -> Floats:
    """Return ln of the standard normal's share of ``middle +- reach``, reach * middle below 1."""
    density = -0.5 * middle * middle - 0.5 * np.log(2.0 * np.pi)
    t = reach[..., None] * _FEW_NODES
    relative = np.exp(-middle[..., None] * t - 0.5 * t * t) @ (0.5 * _FEW_WEIGHTS)
    return density + np.log(2.0) + log_reach + np.log(relative)


def log_error_probability_uniform(
    span_v: npt.ArrayLike,
    sigma_v: npt.ArrayLike,
    half_window_v: npt.ArrayLike = 0.0,
    shift_v: npt.ArrayLike = 0.0,
) -> Floats:
    """Return the mean of `log_error_probability` over an input uniform over a span, as ln P.

    The span is centred where the right bit changes; the trip point lies `shift_v`
    from there. ``sigma / S sum over both signs of G((h +- c) / sigma) - G((h +- c -
    S/2) / sigma)`` with ``G(a) = a Phi(a) + phi(a)``, the integral of Phi (derived).
    Without window and shift it is ``sqrt(2/pi) sigma / S`` for spans of many sigmas.
    """
    sigma, half_span = _some_noise(sigma_v), 0.5 * np.asarray(span_v, dtype=float)
    shift = np.asarray(shift_v, dtype=float)
    # Beyond the span a window leaves nothing more to lose.
    half = np.minimum(np.asarray(half_window_v, dtype=float), _beyond(half_span, sigma, shift))
    total = sum(
        _ramp(half + sign * shift, sigma) - _ramp(half + sign * shift - half_span, sigma)
        for sign in (1.0, -1.0)
    )
    with np.errstate(divide="ignore"):
        log_p: Floats = np.minimum(np.log(total / (2.0 * half_span)), 0.0)
    return log_p


def log_unresolved_probability_uniform(
    span_v: npt.ArrayLike, sigma_v: npt.ArrayLike, log_half_window: npt.ArrayLike
) -> Floats:
    """Return the mean of `log_unresolved_probability` over a span about the trip point, as ln P.

    ``W / S`` while the window and the noise stay well inside the span (Veendrick
    1980), one where the window covers it. In between ``1/S`` times the integral over
    the window of ``Phi((S/2 - e) / sigma) - Phi((-S/2 - e) / sigma)``, which also
    holds with window and span exchanged (derived).
    """
    sigma, half_span = _some_noise(sigma_v), 0.5 * np.asarray(span_v, dtype=float)
    log_half = np.asarray(log_half_window, dtype=float)
    half = np.minimum(np.exp(log_half), _beyond(half_span, sigma, 0.0))
    shorter, longer = np.minimum(half, half_span), np.maximum(half, half_span)
    log_shorter = np.minimum(log_half, np.log(half_span))
    mean = np.where(
        shorter < 4.0 * sigma,
        _mean_share(np.minimum(shorter, 4.0 * sigma), longer, sigma),
        _mean_share_of_long(np.maximum(shorter, 4.0 * sigma), longer, sigma),
    )
    log_p: Floats = np.minimum(log_shorter - np.log(half_span) + np.log(mean), 0.0)
    return log_p


def _mean_share(shorter: Floats, longer: Floats, sigma: Floats) -> Floats:
    """Return the mean over ``|e| < shorter`` of P(|e + sigma z| < longer)."""
    e = np.asarray(shorter)[..., None] * _NODES
    with np.errstate(over="ignore"):
        above = (np.asarray(longer)[..., None] - e) / np.asarray(sigma)[..., None]
        below = (-np.asarray(longer)[..., None] - e) / np.asarray(sigma)[..., None]
    share: Floats = (ndtr(above) - ndtr(below)) @ (0.5 * _WEIGHTS)
    return share


def _mean_share_of_long(shorter: Floats, longer: Floats, sigma: Floats) -> Floats:
    """Return the same by the integral of Phi, for intervals of many sigmas.

    ``sigma G(x / sigma) = x + sigma G(-x / sigma)`` takes the large terms out, which would
    cancel where one interval is far shorter than the other.
    """
    lost = _ramp(shorter - longer, sigma) - _ramp(-shorter - longer, sigma)
    return 1.0 - lost / shorter


def _ramp(x: Floats, sigma: Floats) -> Floats:
    """Return ``sigma G(x / sigma)``, the integral of ``Phi(t / sigma)`` up to x."""
    with np.errstate(over="ignore"):
        z = x / sigma
        return x * ndtr(z) + sigma * normal_pdf(z)


def _beyond(half_span: Floats, sigma: Floats, shift: npt.ArrayLike) -> Floats:
    return half_span + np.abs(shift) + 40.0 * sigma


def _some_noise(sigma_v: npt.ArrayLike) -> Floats:
    return np.maximum(np.asarray(sigma_v, dtype=float), _SMALLEST_SIGMA_V)
