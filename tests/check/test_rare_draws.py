"""Seeds computed backwards give the draws that they were computed for."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from behavgen.check.rare_draws import rare_draw_seeds, seed_for_first_draw
from behavgen.formulas.random_stream import NOISE, random_bits, standard_normal, stream_key


@given(st.integers(0, 2**64 - 1))
def test_a_seed_gives_the_bits_it_was_made_for(bits):
    seed = seed_for_first_draw(bits)
    assert int(random_bits(stream_key(seed, 0, NOISE), 0)) == bits


def test_rare_draws_lie_beyond_the_outermost_branch():
    """AS 241 takes its outermost branch where sqrt(-ln p) > 5, that is beyond 6.66 sigma."""
    draws = [
        float(standard_normal(random_bits(stream_key(seed, 0, NOISE), [0]))[0])
        for seed in rare_draw_seeds()
    ]
    assert np.abs(draws).min() > 6.66
    assert min(draws) < 0.0 < max(draws)
    assert len({round(abs(draw), 3) for draw in draws}) >= 3


@pytest.mark.parametrize("seed", rare_draw_seeds())
def test_seeds_are_words_of_64_bits(seed):
    assert 0 < seed < 2**64
