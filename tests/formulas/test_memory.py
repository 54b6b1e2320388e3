"""Memory against closed forms and against a loop over decisions."""

from functools import partial

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from behavgen.formulas.memory import memory_shift, signs_before

close = partial(pytest.approx, rel=1e-6, abs=0.0)
"""Relative only: what is compared here is far below the usual absolute tolerance."""


def shift_v(reset_s, floor_v=0.0, terms=((0.1, 10e-12),), cap_v=1.0):
    reset_s = np.atleast_1d(np.asarray(reset_s, dtype=float))
    heights, taus = (np.array([np.full(len(reset_s), t[k]) for t in terms]) for k in (0, 1))
    return memory_shift(reset_s, np.full(len(reset_s), floor_v), heights, taus, cap_v)


def test_one_term_falls_by_e_with_every_time_constant():
    now, later = shift_v([30e-12, 40e-12])
    assert now / later == close(np.e, rel=1e-12)
    assert now == close(0.1 * np.exp(-3.0), rel=1e-12)


def test_two_terms_and_a_floor_add_up():
    found = shift_v(20e-12, 1e-3, ((0.1, 10e-12), (0.02, 80e-12)))
    assert found == close(1e-3 + 0.1 * np.exp(-2.0) + 0.02 * np.exp(-0.25), rel=1e-12)


def test_short_resets_are_not_extrapolated_beyond_the_cap():
    assert shift_v(0.0, cap_v=0.04).tolist() == [0.04]


def test_old_terms_vanish_without_a_trace():
    assert shift_v([7.001e-9, 1.0]).tolist() == [0.0, 0.0]
    assert shift_v([7.001e-9, 1.0], 2e-3).tolist() == [2e-3, 2e-3]


signs = st.lists(st.tuples(*[st.sampled_from([-1, 0, 1])] * 3), min_size=1, max_size=70)


@given(signs, st.sampled_from([-1, 0, 1]))
def test_signs_run_through_any_sequence_of_maps(maps, first):
    expected, sign = [], first
    for leaves in maps:
        expected.append(sign)
        sign = leaves[sign + 1]
    assert signs_before(np.array(maps, dtype=np.int8).T, first).tolist() == expected


def test_a_sign_handed_on_unchanged_reaches_the_end_of_a_long_sequence():
    keeps = np.repeat(np.array([[-1], [0], [1]], dtype=np.int8), 100_001, axis=1)
    assert signs_before(keeps, -1).tolist() == [-1] * 100_001
