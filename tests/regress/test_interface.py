"""Changes that break whoever instantiates a module are named one by one."""

from __future__ import annotations

from dataclasses import replace

import pytest

from behavgen.model import Pins, Process
from behavgen.regress.interface import interface_changes
from tests.example_models import full_model


def changes(**cell):
    model = full_model()
    return interface_changes(model, replace(model, cell=replace(model.cell, **cell)))


def test_nothing_changes_between_a_model_and_itself():
    assert interface_changes(full_model(), full_model()) == ()


@pytest.mark.parametrize(
    ("cell", "text"),
    [
        ({"name": "other"}, "module name: latch_full -> other"),
        ({"decides_on": "falling"}, "deciding edge: rising -> falling"),
        ({"in_reset": "mid"}, "outputs in reset: high -> mid"),
        ({"time_precision": "1ps"}, "time precision: 1fs -> 1ps"),
        ({"pins": Pins(clk="ck")}, "port clk: clk -> ck"),
        ({"pins": Pins(vdd=None)}, "port vdd: vdd -> absent"),
        ({"pins": Pins(enable="en")}, "port enable: absent -> en"),
    ],
)
def test_each_change_of_the_cell_is_a_break_with_its_name(cell, text):
    (change,) = changes(**cell)
    assert change.breaks
    assert change.text == text


def test_another_meaning_of_unresolved_outputs_is_another_default():
    (change,) = changes(when_unresolved="hold")
    assert change.what == "parameter UNRESOLVED_MODE"
    assert change.breaks


def test_a_process_may_be_added_but_not_lost_or_coded_anew():
    model = full_model()
    more = replace(model, processes=(*model.processes, Process(name="fast", code=4)))
    (added,) = interface_changes(model, more)
    assert (added.what, added.breaks) == ("code of process fast", False)
    (lost,) = interface_changes(more, model)
    assert (lost.what, lost.breaks) == ("code of process fast", True)
    typ, slow = model.processes
    recoded = replace(model, processes=(typ, replace(slow, code=7)))
    (change,) = interface_changes(model, recoded)
    assert change.text == "code of process slow: 3 -> 7"
    assert change.breaks


def test_a_lost_component_of_mismatch_is_a_lost_parameter_of_verilog_a():
    model = full_model()
    fewer = replace(
        model, mismatch=replace(model.mismatch, components=model.mismatch.components[:1])
    )
    (lost,) = interface_changes(model, fewer)
    assert (lost.what, lost.breaks) == ("parameter MISMATCH_Z1", True)
    (gained,) = interface_changes(fewer, model)
    assert not gained.breaks
