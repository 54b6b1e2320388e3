"""The declarations agree with each other, and with what users are promised."""

from __future__ import annotations

import pytest

from behavgen.quantities import QUANTITIES, column_named, columns_of
from behavgen.tables import guess
from behavgen.tables.assemble import ASSEMBLERS
from behavgen.units import unit_spellings

PROMISED = {
    "offset": [{"instance", "offset"}, {"mean", "sigma", "instances"}],
    "noise": [{"vdiff", "trials", "ones"}, {"vdiff", "bit"}, {"sigma"}],
    "delay": [{"overdrive", "delay"}, {"vdiff", "delay"}],
    "window": [{"resolve_time", "window"}, {"resolve_time", "trials", "unresolved", "span"}],
    "memory": [{"reset_time", "memory_shift"}],
    "reset": [{"reset_delay"}],
    "aperture": [{"step_time", "step_weight"}],
    "energy": [{"overdrive", "energy"}, {"vdiff", "energy"}],
    "kickback": [{"charge_common", "charge_differential"}],
}
"""Which columns suffice for each quantity, as the documentation of the project file says."""


def test_every_promised_form_of_every_quantity_is_declared():
    declared = {
        name: [{*form.required} for form in quantity.forms] for name, quantity in QUANTITIES.items()
    }
    assert declared == PROMISED


@pytest.mark.parametrize("quantity", QUANTITIES.values(), ids=lambda quantity: quantity.name)
def test_forms_and_rules_name_declared_columns(quantity):
    known = {column.name for column in quantity.columns}
    named = {name for form in quantity.forms for name in (*form.required, *form.optional)}
    assert named == known
    assert {name for pair in quantity.ordered for name in pair} <= known


def test_a_column_name_means_the_same_unit_in_every_quantity():
    for quantity in QUANTITIES:
        for name, column in columns_of(quantity).items():
            assert column_named(name).unit == column.unit
            assert column.is_text or unit_spellings(column.unit)


def test_every_column_can_be_guessed():
    names = {name for quantity in QUANTITIES for name in columns_of(quantity)} - {"corner"}
    for name in names:
        column = column_named(name)
        assert guess.guess_column(column, ["something else", name]) == name


def test_every_quantity_can_be_assembled_and_nothing_else():
    assert QUANTITIES.keys() == ASSEMBLERS.keys()


def test_messages_on_limits_are_readable():
    delay = columns_of("delay")
    assert delay["delay"].allowed == "a number in s above 0, or empty"
    assert delay["decision"].allowed == "0 or 1, or empty"
    assert columns_of("noise")["trials"].allowed == "a whole number at least 1"
    assert columns_of("aperture")["step_weight"].allowed == "a number at least -0.2 and at most 1.2"
