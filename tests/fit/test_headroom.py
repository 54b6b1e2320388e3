"""Two common modes whose bend the supplies tell: laws with known shares."""

import itertools

import numpy as np
import pytest

from behavgen.fit.headroom import headroom_of
from behavgen.fit.pair_overdrive import choose_through_pair

SHAPES = {"temperature_k": "reciprocal", "vdd_v": "reciprocal_square", "vcm_v": "plain"}
TEMPERATURE_K, VDD_V, VCM_V = (233.0, 300.0, 398.0), (0.8, 0.95, 1.1), (0.4, 0.6)


def grid(*levels):
    return np.array(list(itertools.product(*levels)))


def log_delay(values, share):
    """Return ln of a delay that falls with the headroom, and a little with the temperature."""
    temperature_k, vdd_v, vcm_v = values.T
    room_v = vdd_v - share * vcm_v
    return (0.3 / room_v**1.5 + 0.02 * vcm_v**-3.0 - 1e-3 * temperature_k)[:, None] - 20.0


def unit_metric(values):
    return np.ones((len(values), 1, 1))


@pytest.mark.parametrize("share", [0.25, 0.5, 0.75, 1.0])
def test_the_share_is_found(share):
    values = grid(TEMPERATURE_K, VDD_V, VCM_V)
    found = headroom_of(values, log_delay(values, share), unit_metric(values))
    assert found.share == pytest.approx(share, abs=0.126)  # a step of the search


def test_a_common_mode_that_takes_nothing_off_the_supply_has_none():
    values = grid(TEMPERATURE_K, VDD_V, VCM_V)
    assert headroom_of(values, log_delay(values, 0.0), unit_metric(values)) is None


@pytest.mark.parametrize(
    "levels",
    [
        (TEMPERATURE_K, VDD_V, (0.4, 0.5, 0.6)),  # three tell their own bend
        (TEMPERATURE_K, VDD_V[:2], VCM_V),  # two supplies tell none
        (TEMPERATURE_K, VDD_V, (0.0, 0.6)),  # no power law through ground
        (TEMPERATURE_K, VDD_V, (np.nan,)),
    ],
)
def test_tables_that_cannot_tell_have_none(levels):
    values = grid(*levels)
    targets = np.log(values[:, :1] / values[:, 1:2])
    assert headroom_of(values, targets, unit_metric(values)) is None


def test_a_star_of_conditions_tells_nothing_of_both():
    star = [(300, 0.95, 0.4), (233, 0.95, 0.4), (300, 0.8, 0.4), (300, 1.1, 0.4), (300, 0.95, 0.6)]
    values = np.array(star, dtype=float)
    assert headroom_of(values, log_delay(values, 0.5), unit_metric(values)) is None


@pytest.mark.parametrize("share", [0.5, 1.0])
def test_delays_between_two_common_modes_are_foreseen(share):
    # At most half of what the straight line misses that a two-level axis shows by itself.
    values = grid(TEMPERATURE_K, VDD_V, VCM_V)
    between = grid((240.0, 270.0, 350.0), (0.84, 1.0), (0.45, 0.5, 0.55))
    truth = log_delay(between, share)
    targets = log_delay(values, share)
    fit = choose_through_pair(values, targets, unit_metric(values), SHAPES)
    straight = [
        np.interp(v, VCM_V, log_delay(np.array([[t, s, c] for c in VCM_V]), share)[:, 0])
        for t, s, v in between
    ]
    missed = np.abs(fit.predict(between) - truth).max()
    assert missed < 0.5 * np.abs(np.array(straight) - truth[:, 0]).max()
    np.testing.assert_allclose(fit.predict(values), targets, atol=0.003)


def test_conditions_without_temperature_are_served():
    values = grid((np.nan,), VDD_V, VCM_V)
    at = np.column_stack([np.full(len(values), 300.0), values[:, 1:]])
    targets = log_delay(at, 0.75)
    fit = choose_through_pair(values, targets, unit_metric(values), SHAPES)
    np.testing.assert_allclose(fit.predict(values), targets, atol=0.005)
