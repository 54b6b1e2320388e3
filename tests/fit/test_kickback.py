"""Kickback: charges and their slope come back."""

from functools import partial

import numpy as np
import pytest

from behavgen.fit.kickback import fit_kickback
from tests.fit.effect_tables import kickback_table, latch_column, latch_where

close = partial(pytest.approx, rel=1e-6, abs=0.0)
"""Relative only: what is compared here is far below the usual absolute tolerance."""


def constant(surface):
    assert surface.axes == ()
    return surface.variants[0].coefficients[0]


def test_a_differential_charge_in_proportion_to_the_input():
    vdiff = np.array([-0.1, 0.01, 0.2])
    found = fit_kickback(kickback_table(3e-15, 2e-18 - 4e-15 * vdiff, vdiff), ("nominal",)).effect
    assert constant(found.common) == close(3e-15)
    assert constant(found.differential) == close(2e-18)
    assert constant(found.differential_per_v) == close(-4e-15)
    assert found.differential_per_v.unit == "C/V"


def test_without_inputs_the_charge_is_a_mean():
    found = fit_kickback(kickback_table(1e-15, [2e-16, 4e-16]), ("nominal",)).effect
    assert constant(found.differential) == close(3e-16)
    assert found.differential_per_v is None


def test_charges_over_a_condition_get_a_surface():
    found = fit_kickback(
        kickback_table([1e-15, 2e-15, 3e-15], [0.0, 0.0, 0.0], vdd=[1.0, 1.1, 1.2]), ("nominal",)
    ).effect
    assert found.common.variants[0].coefficients == close([2e-15, 1e-15], rel=1e-3)
    assert constant(found.differential) == 0.0


def test_sources_that_matter_are_said():
    table = kickback_table([3e-15, 2e-15], [0.0, 0.0], resistance=[100.0, 10e3])
    assert any("source resistances" in n for n in fit_kickback(table, ("nominal",)).notices)


def test_the_latch_kicks_both_inputs_alike():
    table = kickback_table(
        latch_column("kickback", "q_cm_net_C"),
        latch_column("kickback", "q_diff_net_C"),
        latch_column("kickback", "vid_V"),
        latch_column("kickback", "rs_ohm"),
        **latch_where("kickback"),
    )
    found = fit_kickback(table, ("tt",))
    assert constant(found.effect.common) == close(-3.61e-15, rel=0.01)
    assert constant(found.effect.differential_per_v) == close(-2.69e-15, rel=0.01)
    assert found.notices == ()
