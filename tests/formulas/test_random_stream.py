"""The random stream against published outputs and against statistics."""

import numpy as np
import pytest
from scipy.special import ndtri
from scipy.stats import kstest

from behavgen.formulas.random_stream import (
    COIN,
    MISMATCH,
    NOISE,
    coin,
    path_seed,
    random_bits,
    standard_normal,
    stream_key,
)


def test_draws_are_the_outputs_of_splitmix64():
    # First outputs of SplitMix64 from seed 1234567, as widely tabulated (from memory).
    expected = [
        6457827717110365317,
        3203168211198807973,
        9817491932198370423,
        4593380528125082431,
        16408922859458223821,
    ]
    assert random_bits(1234567, range(5)).tolist() == expected


@pytest.mark.parametrize(
    ("text", "value"),
    # Test vectors of 64-bit FNV-1a published by its authors (from memory).
    [("", 0xCBF29CE484222325), ("a", 0xAF63DC4C8601EC8C), ("foobar", 0x85944171F73967E8)],
)
def test_path_seed_is_fnv_1a(text, value):
    assert path_seed(text) == value


def test_normals_invert_the_normal_distribution():
    bits = random_bits(stream_key(5, 0, NOISE), np.arange(20000))
    probability = ((bits >> np.uint64(12)).astype(float) + 0.5) * 2.0**-52
    expected = ndtri(probability)
    assert standard_normal(bits) == pytest.approx(expected, rel=1e-12, abs=1e-15)


def test_extreme_draws_stay_below_the_certain_bound():
    bits = np.array([0, 2**64 - 1], dtype=np.uint64)
    low, high = standard_normal(bits)
    assert low == -high
    assert 8.0 < high < 8.3


@pytest.mark.parametrize("channel", [NOISE, MISMATCH, COIN])
def test_normals_are_normal(channel):
    # Fixed seed: no false alarms; p-value of a correct stream is uniform.
    bits = random_bits(stream_key(11, 3, channel), np.arange(100_000))
    assert kstest(standard_normal(bits), "norm").pvalue > 1e-3


def test_streams_of_neighbouring_seeds_and_channels_are_uncorrelated():
    keys = [stream_key(seed, run, ch) for seed in (1, 2, 3) for run in (0, 1) for ch in range(3)]
    draws = np.array([standard_normal(random_bits(key, np.arange(20000))) for key in keys])
    between = np.corrcoef(draws)[np.triu_indices(len(keys), 1)]
    # 153 pairs; 5 standard errors of 1/sqrt(20000): family false-alarm rate below 1e-4.
    assert np.abs(between).max() < 5.0 / np.sqrt(20000)


def test_coin_is_fair():
    tosses = coin(random_bits(stream_key(7, 0, COIN), np.arange(100_000)))
    # 4.5 standard errors: false-alarm rate 7e-6.
    assert abs(tosses.mean() - 0.5) < 4.5 * 0.5 / np.sqrt(100_000)
