"""Seeds whose first noise draw is an event that no simulation would live to see.

The outermost branch of the normal distribution is taken once in 36 thousand
million draws. The mixing function of the random stream is a bijection, so
that a seed for any first draw can be computed backwards.
"""

from __future__ import annotations

from behavgen.formulas.random_stream import NOISE

__all__ = ["rare_draw_seeds", "seed_for_first_draw"]

_WORD = 0xFFFFFFFFFFFFFFFF
_GOLDEN = 0x9E3779B97F4A7C15
_FACTORS = (0xBF58476D1CE4E5B9, 0x94D049BB133111EB)
_TAIL_STEPS = (3, _WORD >> 12 ^ 3, 700, _WORD >> 12 ^ 30_000)
"""The upper 52 bits of the draws: 8 to 6.8 sigmas, on both sides of the distribution."""


def rare_draw_seeds() -> tuple[int, ...]:
    """Return seeds for draws beyond 6.7 sigmas, on both sides."""
    return tuple(seed_for_first_draw(step << 12) for step in _TAIL_STEPS)


def seed_for_first_draw(bits: int) -> int:
    """Return the seed, without a run seed, whose noise draw number 0 has these 64 bits."""
    state = (_unmix(bits) - _GOLDEN) & _WORD
    for word in (NOISE, 0, 0):
        state = ((_unmix(state) - _GOLDEN) & _WORD) ^ word
    return state


def _unmix(z: int) -> int:
    """Invert the mixing function: each of its steps has an inverse modulo 2^64."""
    z = _unshift(z, 31)
    z = _unshift((z * pow(_FACTORS[1], -1, 1 << 64)) & _WORD, 27)
    return _unshift((z * pow(_FACTORS[0], -1, 1 << 64)) & _WORD, 30)


def _unshift(z: int, shift: int) -> int:
    """Invert ``z ^ (z >> shift)``."""
    result = z
    for _ in range(64 // shift):
        result = z ^ (result >> shift)
    return result
