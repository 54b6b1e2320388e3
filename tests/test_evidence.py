"""How far tables went, counted by hand from small ones."""

from __future__ import annotations

from dataclasses import replace

import pytest

from behavgen.evidence import evidence, outside
from behavgen.model import Condition, Range
from tests.example_models import full_model, minimal_model


def test_points_that_the_model_carries() -> None:
    found = evidence(full_model())
    # Shares 0.01, 0.1, 0.52, 0.97: the normal quantile of 0.01 is -2.326 (tables).
    assert found.sigmas == pytest.approx(2.326, abs=5e-4)
    # Half the narrower window of 1.5 uV lies below the smallest overdrive of 10 uV.
    assert found.overdrive_v == Range(low=0.75e-6, high=0.1)
    assert found.resolve_time_s == 4e-10


def test_shares_of_none_and_all_were_not_counted() -> None:
    model = full_model()
    points = tuple(
        replace(p, y=(0.0, 0.25, 1.0, 1.0)) if p.quantity == "noise" else p for p in model.points
    )
    # Quartiles of the normal distribution lie 0.6745 sigma out (tables).
    assert evidence(replace(model, points=points)).sigmas == pytest.approx(0.6745, abs=5e-5)


def test_a_model_without_points_has_its_box() -> None:
    found = evidence(minimal_model())
    assert (found.sigmas, found.resolve_time_s) == (None, None)
    assert found.overdrive_v == Range(low=1e-6, high=0.5)


def test_conditions_outside_a_process_of_one_condition() -> None:
    model = full_model()
    inside = Condition(process="slow", vdd_v=1.2, temperature_k=300.15, vcm_v=0.65)
    assert outside(model, inside) == ()
    assert outside(model, replace(inside, process="typ", vdd_v=1.32)) == ()
    found = outside(model, replace(inside, vdd_v=1.25))
    assert {one.quantity for one in found} == {"delay", "noise", "offset", "mismatch"}
    assert {(one.condition, one.measured) for one in found} == {("vdd_v", Range(low=1.2, high=1.2))}
    assert outside(model, Condition(process="slow")) == ()
