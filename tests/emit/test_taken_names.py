"""Pins that are named like something inside an emitted Verilog-A module."""

from __future__ import annotations

import pytest

from behavgen.emit.verilog_a import verilog_a
from behavgen.emit.verilog_a_event import verilog_a_event
from behavgen.errors import ProjectError
from behavgen.model import Pins
from tests.emit.verilog_a_text import compiled, declared
from tests.example_models import full_model

FORMS = {"continuous": verilog_a, "event": verilog_a_event}


@pytest.mark.parametrize("form", FORMS)
def test_every_name_inside_is_refused_as_a_pin(form):
    names = sorted(declared(FORMS[form](full_model(in_reset="hold")).text))
    assert len(names) > 40
    assert {"continuous": "n_latch", "event": "awaited"}[form] in names
    for name in names:
        pins = Pins(inp=name, outn="q")
        with pytest.raises(ProjectError) as refused:
            FORMS[form](full_model(in_reset="hold", pins=pins))
        assert [fault.column for fault in refused.value.faults] == ["cells.latch_full.pins.inp"]
        assert f"'{name}' is also a name inside" in str(refused.value)


def test_all_taken_names_are_told_at_once():
    """The pin `unresolved` is none of Verilog-A's."""
    pins = Pins(clk="sigma_v", outp="level_p", unresolved="delay_s")
    with pytest.raises(ProjectError) as refused:
        verilog_a_event(full_model(pins=pins))
    columns = [fault.column for fault in refused.value.faults]
    assert columns == ["cells.latch_full.pins.clk", "cells.latch_full.pins.outp"]


@pytest.mark.parametrize("form", FORMS)
def test_pins_named_like_words_of_the_comments_or_like_other_pins_compile(form, tmp_path):
    pins = Pins(inp="inn", inn="inp", clk="overdrive", outp="latch", outn="noise", vdd="supply",
                vss="phase", enable="imbalance")  # fmt: skip
    compilation = compiled(FORMS[form](full_model(pins=pins)).text, tmp_path)
    assert compilation.library is not None, compilation.message
    assert compilation.warnings == 0, compilation.message
