"""Noise of a comparator: where it comes from, what it costs, how well it can be measured.

`z` is everywhere the distance of the input from the trip point in sigmas of the noise.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy.special import ndtr, ndtri

from behavgen.formulas.gaussian import gaussian_tails

__all__ = [
    "BOLTZMANN_J_PER_K",
    "Z_BEST_FOR_BOTH",
    "Z_BEST_FOR_OFFSET",
    "Z_BEST_FOR_SIGMA",
    "decision_information",
    "error_rate",
    "flash_yield",
    "kt_over_c_noise",
    "sigma_for_flash_yield",
    "sigmas_for_error_rate",
]

Floats = npt.NDArray[np.float64]

BOLTZMANN_J_PER_K = 1.380649e-23
"""Exact in the SI since 2019 (CODATA 2018)."""

Z_BEST_FOR_OFFSET = 0.0
Z_BEST_FOR_SIGMA = 1.5750362489552387
Z_BEST_FOR_BOTH = 1.1381012775511752
"""Levels that tell most per decision: largest information on the offset, on
sigma, and largest product of the two. Maxima of `decision_information`."""


def kt_over_c_noise(capacitance_f: npt.ArrayLike, temperature_k: npt.ArrayLike) -> Floats:
    """Return the rms noise voltage sampled on a capacitor, ``sqrt(k T / C)``.

    Source: equipartition, ``C v^2 / 2 = k T / 2`` (H. Nyquist, Physical Review 32, 1928).

    Parameters
    ----------
    capacitance_f, temperature_k : array_like
        F and K; broadcast.

    Returns
    -------
    ndarray, in V
    """
    capacitance, temperature = np.asarray(capacitance_f, float), np.asarray(temperature_k, float)
    noise_v: Floats = np.sqrt(BOLTZMANN_J_PER_K * temperature / capacitance)
    return noise_v


def error_rate(z: npt.ArrayLike) -> Floats:
    """Return the probability that Gaussian noise turns a decision `z` sigmas from the trip point.

    The upper tail ``Q(z) = Phi(-z)``. Far below the rates that were counted this
    extrapolates the Gaussian law.
    """
    rate: Floats = ndtr(-np.asarray(z, dtype=float))
    return rate


def sigmas_for_error_rate(rate: npt.ArrayLike) -> Floats:
    """Return the distance from the trip point, in sigmas, that gives this error rate.

    Inverse of `error_rate`; `rate` strictly between 0 and 1.
    """
    z: Floats = -ndtri(np.asarray(rate, dtype=float))
    return z


def flash_yield(sigma_over_lsb: npt.ArrayLike, bits: npt.ArrayLike) -> Floats:
    """Return the share of flash converters whose every threshold lies within half a step.

    ``[1 - 2 Q(0.5 / sigma)]^(2^bits - 1)`` for independent Gaussian offsets: all
    ``2^bits - 1`` comparators must do so (common practice; derived).

    Parameters
    ----------
    sigma_over_lsb : array_like
        Standard deviation of one comparator's offset over the converter's step.
    bits : array_like of int
    """
    one = 1.0 - 2.0 * error_rate(0.5 / np.asarray(sigma_over_lsb, dtype=float))
    share: Floats = one ** (2.0 ** np.asarray(bits, dtype=float) - 1.0)
    return share


def sigma_for_flash_yield(share: npt.ArrayLike, bits: npt.ArrayLike) -> Floats:
    """Return offset sigma over the converter's step that gives this yield.

    Inverse of `flash_yield` in its first argument; `share` strictly between 0 and 1.
    """
    comparators = 2.0 ** np.asarray(bits, dtype=float) - 1.0
    outside = -np.expm1(np.log(np.asarray(share, dtype=float)) / comparators)
    return 0.5 / sigmas_for_error_rate(0.5 * outside)


def decision_information(z: npt.ArrayLike) -> Floats:
    """Return the Fisher information of one decision on (offset, sigma), in units of 1/sigma^2.

    ``w [[1, z], [z, z^2]]`` with ``w = phi(z)^2 / (Phi(z) Phi(-z))``: expected
    information of a probit regression (D. J. Finney, Probit Analysis, 1971).
    Informations of decisions add; the inverse of the sum, times ``sigma^2``, is
    the covariance that no unbiased estimate can beat.

    Parameters
    ----------
    z : array_like, any shape S

    Returns
    -------
    ndarray, shape S + (2, 2)
    """
    z = np.asarray(z, dtype=float)
    tails = gaussian_tails(z)
    w = tails.hazard_below * tails.hazard_above
    return np.stack([np.stack([w, w * z], -1), np.stack([w * z, w * z * z], -1)], -1)
