"""What comparator noise, offset and delay do to converters, in closed form.

Powers are in units of LSB^2, deviations in LSB. Terms of converter testing as in IEEE 1241.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

__all__ = [
    "effective_bits",
    "flash_noise_power",
    "flash_yield",
    "sar_easy_regeneration_taus",
    "sar_noise_power",
    "small_noise_power",
    "unresolved_share",
]

Floats = npt.NDArray[np.float64]

_HARMONICS = 60
_STEPS_PER_LSB = 64


def effective_bits(bits: int, power: npt.ArrayLike) -> Floats:
    """Return the effective number of bits of a converter with this error power.

    An ideal one has 1/12 (W. R. Bennett, Bell System Technical Journal 27, 1948); every
    factor of four takes a bit.
    """
    effective: Floats = bits - 0.5 * np.log2(12.0 * np.asarray(power, dtype=float))
    return effective


def small_noise_power(sigma: npt.ArrayLike) -> Floats:
    """Return ``1/12 + sigma^2``: what noise adds as long as it stays well below one LSB.

    Derived: near a threshold at distance `d` a wrong decision turns the error
    ``LSB/2 - d`` into ``LSB/2 + d``; the mean of ``2 d LSB`` weighted with its
    probability ``Q(d / sigma)`` over both sides of every threshold is ``sigma^2``.
    """
    power: Floats = 1.0 / 12.0 + np.square(np.asarray(sigma, dtype=float))
    return power


def flash_noise_power(sigma: npt.ArrayLike) -> Floats:
    """Return the error power of a flash converter that counts its ones, far from its ends.

    Derived: independent comparators add the variance ``sum p (1 - p)``, whose mean over
    the input is ``sigma / sqrt(pi)``, and smooth the quantisation error, whose k-th
    harmonic of power ``1 / (2 pi^2 k^2)`` shrinks by ``exp(-(2 pi k sigma)^2)``.
    """
    sigma = np.asarray(sigma, dtype=float)
    k = np.arange(1.0, _HARMONICS + 1.0)
    rest = 1.0 / 12.0 - np.sum(1.0 / (2.0 * np.pi**2 * k**2))
    harmonics = np.exp(-np.square(2.0 * np.pi * k * sigma[..., None])) / (2.0 * np.pi**2 * k**2)
    power: Floats = sigma / np.sqrt(np.pi) + harmonics.sum(axis=-1) + rest * (sigma == 0.0)
    return power


def sar_noise_power(sigma: float, bits: int) -> float:
    """Return the error power of a SAR converter whose every decision has its own noise.

    Exact up to the quadrature over a uniform input: the probability of each code is
    the product of those of the decisions that lead to it.

    Parameters
    ----------
    sigma : float
        Noise of a decision, LSB.
    bits : int
    """
    from scipy.special import ndtr  # noqa: PLC0415

    codes = 2**bits
    x = (np.arange(codes * _STEPS_PER_LSB) + 0.5) / _STEPS_PER_LSB
    probability = np.ones((1, len(x)))
    base = np.zeros(1)
    for bit in range(bits - 1, -1, -1):
        distance = x - (base + 2.0**bit)[:, None]
        one = ndtr(distance / sigma) if sigma > 0.0 else (distance > 0.0).astype(float)
        probability = np.concatenate([probability * (1.0 - one), probability * one])
        base = np.concatenate([base, base + 2.0**bit])
    error = (base + 0.5)[:, None] - x
    return float(np.mean(np.sum(probability * error**2, axis=0)))


def flash_yield(sigma: npt.ArrayLike, bits: int) -> Floats:
    """Return the share of flash converters with all offsets within half an LSB.

    ``(1 - 2 Q(0.5 LSB / sigma)) ** (2^bits - 1)`` for independent normal offsets; a
    textbook result, derived from the independence.
    """
    from scipy.special import ndtr  # noqa: PLC0415

    sigma = np.asarray(sigma, dtype=float)
    share: Floats = (1.0 - 2.0 * ndtr(-0.5 / sigma)) ** (2**bits - 1)
    return share


def unresolved_share(window_v: npt.ArrayLike, lsb_v: float, bits: int) -> Floats:
    """Return the share of conversions with an unresolved decision, for uniform inputs.

    ``(2^bits - 1) W / (2^bits LSB)``: of all thresholds each one has its window, and
    windows much narrower than an LSB do not meet; holds for flash and SAR alike, whose
    inputs near a threshold always come to its decision.
    """
    share: Floats = (2**bits - 1) * np.asarray(window_v, dtype=float) / (2**bits * lsb_v)
    return share


def sar_easy_regeneration_taus(bits: int) -> float:
    """Return the mean regeneration time of all but the closest decision, in tau.

    ``ln2 (B + 1)(B - 2) / 2 + B - 1``, derived for the logarithmic law with the full scale
    as logic level; rounded it gives Table 1 of IEEE Solid-State Circuits Magazine, Summer 2019.
    """
    return float(0.5 * np.log(2.0) * (bits + 1) * (bits - 2) + bits - 1)
