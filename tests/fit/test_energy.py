"""Energy: known laws come back, and the one that fits is taken."""

from dataclasses import replace
from functools import partial

import numpy as np
import pytest

from behavgen.errors import FitError
from behavgen.fit.energy import fit_energy
from behavgen.model import Box, Range
from behavgen.reference import Reference
from tests.example_models import full_model, minimal_model
from tests.fit.effect_tables import energy_table

close = partial(pytest.approx, rel=1e-6, abs=0.0)
"""Relative only: what is compared here is far below the usual absolute tolerance."""

OVERDRIVES = np.array([1e-5, 1e-4, 1e-3, 1e-2, 0.1])


def constant(surface):
    assert surface.axes == ()
    return np.exp(surface.variants[0].coefficients[0])


def without_delay():
    return replace(minimal_model(), delay=None, box=Box())


def test_a_current_while_deciding_is_told_from_the_rest():
    model = full_model()
    delay_s = Reference(model).delay(OVERDRIVES)
    found = fit_energy(energy_table(OVERDRIVES, 5e-14 + 1.2e-4 * delay_s), model)
    assert found.effect.law == "delay"
    assert constant(found.effect.fixed) == close(5e-14, rel=1e-6)
    assert constant(found.effect.rise) == close(1.2e-4, rel=1e-6)
    assert found.effect.rise.unit == "W"
    assert found.fits[0].worst_relative < 1e-6


def test_without_a_delay_the_logarithm_of_the_overdrive_rules():
    energy_j = 5e-14 + 3e-15 * np.log(0.1 / OVERDRIVES)
    found = fit_energy(energy_table(OVERDRIVES, energy_j), without_delay())
    assert found.effect.law == "overdrive"
    assert constant(found.effect.fixed) == close(5e-14, rel=1e-6)
    assert constant(found.effect.rise) == close(3e-15, rel=1e-6)
    assert found.effect.overdrive_v == Range(low=1e-5, high=0.1)


def test_an_energy_that_hangs_on_nothing_is_a_constant():
    rng = np.random.default_rng(4)
    energy_j = 4e-14 * (1.0 + 0.01 * rng.standard_normal(len(OVERDRIVES)))
    found = fit_energy(energy_table(OVERDRIVES, energy_j), full_model())
    assert found.effect.law == "constant"
    assert found.effect.rise is None
    assert constant(found.effect.fixed) == close(4e-14, rel=0.02)


def test_an_energy_that_falls_with_the_delay_is_not_given_a_negative_current():
    delay_s = Reference(full_model()).delay(OVERDRIVES)
    found = fit_energy(energy_table(OVERDRIVES, 9e-14 - 5e-5 * delay_s), full_model())
    assert found.effect.law == "constant"


def test_the_model_gives_the_energy_back_at_every_condition():
    model = full_model()
    vdd = np.repeat([1.1, 1.2, 1.3], len(OVERDRIVES))
    overdrive = np.tile(OVERDRIVES, 3)
    here = {"temp_c": 27.0, "vcm": 0.65}
    energy_j = 5e-14 * vdd**2 + 1e-4 * vdd * Reference(model).delay(overdrive, vdd=vdd, **here)
    table = energy_table(overdrive, energy_j, vdd=vdd, temperature=300.15, vcm=0.65)
    found = fit_energy(table, model)
    assert [axis.condition for axis in found.effect.fixed.axes] == ["vdd_v"]
    emitted = Reference(replace(model, energy=found.effect))
    assert emitted.energy(overdrive, vdd=vdd, **here) == close(energy_j, rel=0.01)


def test_an_input_is_taken_relative_to_the_trip_point():
    model = full_model()
    reference = Reference(model)
    offset = float(reference.offset())
    energy_j = 5e-14 + 1e-4 * reference.delay(OVERDRIVES)
    table = energy_table(np.full(len(OVERDRIVES), np.nan), energy_j)
    found = fit_energy(replace(table, vdiff_v=offset + OVERDRIVES), model)
    assert found.overdrive_v == close(OVERDRIVES, rel=1e-9)
    assert constant(found.effect.rise) == close(1e-4, rel=1e-6)


def test_leakage_is_told_from_the_decision_by_the_clock_period():
    model = full_model()
    overdrive = np.tile(OVERDRIVES, 2)
    cycle_s = np.repeat([2e-9, 5e-9], len(OVERDRIVES))
    energy_j = 5e-14 + 1e-4 * Reference(model).delay(overdrive) + 3e-6 * (cycle_s - 2e-9)
    found = fit_energy(energy_table(overdrive, energy_j, cycle_s), model)
    assert found.effect.cycle_time_s == 2e-9
    assert constant(found.effect.fixed) == close(5e-14, rel=1e-6)
    assert found.is_shortest.sum() == len(OVERDRIVES)
    assert any("3e-06 W" in notice and "leakage" in notice for notice in found.notices)


def test_a_single_clock_period_is_named():
    found = fit_energy(energy_table(OVERDRIVES, np.full(5, 4e-14), 2e-9), full_model())
    assert found.effect.cycle_time_s == 2e-9
    assert any("2 ns" in notice for notice in found.notices)


def test_conditions_at_a_single_overdrive_carry_a_constant():
    found = fit_energy(energy_table([0.1, 0.1], [4e-14, 6e-14], vdd=[1.1, 1.3]), full_model())
    assert found.effect.law == "constant"
    assert [axis.condition for axis in found.effect.fixed.axes] == ["vdd_v"]


def test_energies_that_are_not_positive_are_refused():
    with pytest.raises(FitError, match="1 energies are not above 0"):
        fit_energy(energy_table([0.1, 0.01], [-4e-14, 6e-14]), full_model())


@pytest.mark.parametrize("scale", [1e-3, 1e3])
def test_energies_of_any_size(scale):
    delay_s = Reference(full_model()).delay(OVERDRIVES)
    found = fit_energy(energy_table(OVERDRIVES, scale * (5e-14 + 1e-4 * delay_s)), full_model())
    assert found.effect.law == "delay"
    assert constant(found.effect.fixed) == close(scale * 5e-14, rel=1e-6)
