"""Both tails of the normal distribution, accurate where they are tiny."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
import numpy.typing as npt
from scipy.special import erfcx

__all__ = ["GaussianTails", "gaussian_tails", "normal_pdf"]

Floats = npt.NDArray[np.float64]

_LOG_SQRT_TWO_PI = 0.5 * np.log(2.0 * np.pi)
_SQRT_HALF = np.sqrt(0.5)
_SQRT_HALF_PI = np.sqrt(0.5 * np.pi)


class GaussianTails(NamedTuple):
    """What a binomial likelihood with ``P(1) = Phi(z)`` needs of each `z`.

    Parameters
    ----------
    log_below, log_above : ndarray
        ln Phi(z) and ln Phi(-z).
    hazard_below, hazard_above : ndarray
        phi(z) / Phi(z) and phi(z) / Phi(-z).
    """

    log_below: Floats
    log_above: Floats
    hazard_below: Floats
    hazard_above: Floats


def normal_pdf(z: npt.ArrayLike) -> Floats:
    """Return ``exp(-z^2 / 2) / sqrt(2 pi)``, same shape as `z`."""
    density: Floats = np.exp(-0.5 * np.square(np.asarray(z, dtype=float)) - _LOG_SQRT_TWO_PI)
    return density


def gaussian_tails(z: npt.ArrayLike) -> GaussianTails:
    """Return log probabilities and hazards on both sides of `z`.

    All four come from one scaled complementary error function,
    ``Phi(-|z|) = phi(z) sqrt(pi/2) erfcx(|z|/sqrt(2))`` (definition of erfcx), so
    that no tail underflows.

    Parameters
    ----------
    z : array_like
        Distance from the trip point in sigmas, any shape.

    Returns
    -------
    GaussianTails
        Arrays of the same shape.
    """
    z = np.asarray(z, dtype=float)
    mills = _SQRT_HALF_PI * erfcx(np.abs(z) * _SQRT_HALF)
    log_pdf = -0.5 * z * z - _LOG_SQRT_TWO_PI
    pdf = np.exp(log_pdf)
    tail = pdf * mills
    log_tail, log_body = log_pdf + np.log(mills), np.log1p(-tail)
    hazard_tail, hazard_body = 1.0 / mills, pdf / (1.0 - tail)
    low = z < 0.0
    return GaussianTails(
        log_below=np.where(low, log_tail, log_body),
        log_above=np.where(low, log_body, log_tail),
        hazard_below=np.where(low, hazard_tail, hazard_body),
        hazard_above=np.where(low, hazard_body, hazard_tail),
    )
