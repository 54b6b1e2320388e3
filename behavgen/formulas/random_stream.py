"""Random numbers that Python and every simulator draw alike.

A counter goes through the SplitMix64 mixing function (G. L. Steele, D. Lea,
C. H. Flood, "Fast splittable pseudorandom number generators", OOPSLA 2014);
its upper bits become a standard normal number through algorithm AS 241
(M. J. Wichura, Applied Statistics 37, 1988, 477-484). Draw number `n` of a
stream needs none of the draws before it.

The numbers reproduce a simulation; they are not for security.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from behavgen.formulas.exact_math import exact_ln, horner

__all__ = [
    "COIN",
    "MISMATCH",
    "NOISE",
    "coin",
    "path_seed",
    "random_bits",
    "standard_normal",
    "stream_key",
]

Words = npt.NDArray[np.uint64]
Floats = npt.NDArray[np.float64]

NOISE, MISMATCH, COIN = 0, 1, 2
"""Channels of one instance."""

_GOLDEN = 0x9E3779B97F4A7C15
_WORD = 0xFFFFFFFFFFFFFFFF

# AS 241, PPND16: coefficients in rising powers, as published.
_CENTRE_TOP = (
    3.3871328727963666080e0, 1.3314166789178437745e2, 1.9715909503065514427e3,
    1.3731693765509461125e4, 4.5921953931549871457e4, 6.7265770927008700853e4,
    3.3430575583588128105e4, 2.5090809287301226727e3,
)  # fmt: skip
_CENTRE_BOTTOM = (
    1.0, 4.2313330701600911252e1, 6.8718700749205790830e2, 5.3941960214247511077e3,
    2.1213794301586595867e4, 3.9307895800092710610e4, 2.8729085735721942674e4,
    5.2264952788528545610e3,
)  # fmt: skip
_FLANK_TOP = (
    1.42343711074968357734e0, 4.63033784615654529590e0, 5.76949722146069140550e0,
    3.64784832476320460504e0, 1.27045825245236838258e0, 2.41780725177450611770e-1,
    2.27238449892691845833e-2, 7.74545014278341407640e-4,
)  # fmt: skip
_FLANK_BOTTOM = (
    1.0, 2.05319162663775882187e0, 1.67638483018380384940e0, 6.89767334985100004550e-1,
    1.48103976427480074590e-1, 1.51986665636164571966e-2, 5.47593808499534494600e-4,
    1.05075007164441684324e-9,
)  # fmt: skip
_TAIL_TOP = (
    6.65790464350110377720e0, 5.46378491116411436990e0, 1.78482653991729133580e0,
    2.96560571828504891230e-1, 2.65321895265761230930e-2, 1.24266094738807843860e-3,
    2.71155556874348757815e-5, 2.01033439929228813265e-7,
)  # fmt: skip
_TAIL_BOTTOM = (
    1.0, 5.99832206555887937690e-1, 1.36929880922735805310e-1, 1.48753612908506148525e-2,
    7.86869131145613259100e-4, 1.84631831751005468180e-5, 1.42151175831644588870e-7,
    2.04426310338993978564e-15,
)  # fmt: skip


def _mix(x: Words) -> Words:
    z = (x ^ (x >> np.uint64(30))) * np.uint64(0xBF58476D1CE4E5B9)
    z = (z ^ (z >> np.uint64(27))) * np.uint64(0x94D049BB133111EB)
    return z ^ (z >> np.uint64(31))


def stream_key(seed: int, run_seed: int, channel: int) -> int:
    """Return the key of one channel of one instance.

    Each word is absorbed in turn: ``key = mix((key ^ word) + golden)``.

    Parameters
    ----------
    seed : int
        Instance seed, 64 bits.
    run_seed : int
        Chip-wide seed, 64 bits; 0 when none is given.
    channel : int
        `NOISE`, `MISMATCH` or `COIN`.
    """
    key = 0
    for word in (seed, run_seed, channel):
        absorbed = ((key ^ (word & _WORD)) + _GOLDEN) & _WORD
        key = int(_mix(np.array([absorbed], dtype=np.uint64))[0])
    return key


def path_seed(path: str) -> int:
    """Return the seed that an instance derives from its hierarchical path.

    FNV-1a over the ASCII bytes (G. Fowler, L. C. Noll, K.-P. Vo; published in
    IETF RFC 9923), 64 bits.
    """
    value = 0xCBF29CE484222325
    for byte in path.encode("ascii"):
        value = ((value ^ byte) * 0x100000001B3) & _WORD
    return value


def random_bits(key: int, draw: npt.ArrayLike) -> Words:
    """Return 64 random bits for each draw number.

    Draw `n` is output number ``n + 1`` of SplitMix64 started at `key`.

    Parameters
    ----------
    key : int
        From `stream_key`.
    draw : array_like of int, any shape
        Draw numbers, from 0.

    Returns
    -------
    ndarray of uint64, shape of `draw`
    """
    counter = np.asarray(draw, dtype=np.uint64) + np.uint64(1)
    return _mix(np.uint64(key) + np.atleast_1d(counter) * np.uint64(_GOLDEN)).reshape(counter.shape)


def standard_normal(bits: Words) -> Floats:
    """Return standard normal numbers from random bits, ``|z| < 8.3``.

    The upper 52 bits `k` give ``q = (k + 1/2) / 2^52 - 1/2``; AS 241 inverts
    the normal distribution there.

    Parameters
    ----------
    bits : ndarray of uint64, any shape

    Returns
    -------
    ndarray, shape of `bits`
    """
    k = (bits >> np.uint64(12)).astype(np.float64)
    q = (k + 0.5) * 2.220446049250313e-16 - 0.5
    central = np.abs(q) <= 0.425
    s = np.where(central, 0.180625 - q * q, 0.0)
    centre = q * horner(_CENTRE_TOP, s) / horner(_CENTRE_BOTTOM, s)
    tail_probability = np.where(central, 0.25, 0.5 - np.abs(q))
    outer = _outer_normal(np.sqrt(-exact_ln(tail_probability)))
    return np.where(central, centre, np.where(q < 0.0, -outer, outer))


def _outer_normal(r: Floats) -> Floats:
    flank, tail = r - 1.6, r - 5.0
    return np.where(
        r <= 5.0,
        horner(_FLANK_TOP, flank) / horner(_FLANK_BOTTOM, flank),
        horner(_TAIL_TOP, tail) / horner(_TAIL_BOTTOM, tail),
    )


def coin(bits: Words) -> npt.NDArray[np.int64]:
    """Return the top bit of each word: the coin of an unresolved decision."""
    return (bits >> np.uint64(63)).astype(np.int64)
