"""Symbol and timing show the cell's own pins, edge, reset state and unresolved outputs."""

import itertools
import xml.etree.ElementTree as ET

import pytest

from behavgen.model import Cell, Pins
from behavgen.report.symbol import draw_symbol
from behavgen.report.timing import draw_timing, timing_words, waves

RENAMED = Pins(inp="vip", inn="vim", clk="ck", outp="q", outn=None, vdd=None, enable="en",
               unresolved=None)  # fmt: skip
EVERY_WAY = list(itertools.product(("rising", "falling"), ("high", "low", "mid", "hold"),
                                   ("x", "coin", "hold")))  # fmt: skip


def texts(svg):
    return [e.text for e in ET.fromstring(svg).iter("text")]


def test_the_symbol_shows_the_pins_that_are_there():
    shown = texts(draw_symbol(Cell(name="a", pins=RENAMED)))
    assert {"vip", "vim", "ck", "q", "en"} <= set(shown)
    assert not {"vdd", "outn", "outp", "inp", "unresolved"} & set(shown)


def test_a_bubble_marks_the_falling_edge():
    assert "<circle" in draw_symbol(Cell(name="a", decides_on="falling"))
    assert "<circle" not in draw_symbol(Cell(name="a"))


@pytest.mark.parametrize(("edge", "reset", "unresolved"), EVERY_WAY)
def test_every_kind_of_cell_can_be_drawn(edge, reset, unresolved):
    cell = Cell(name="a", decides_on=edge, in_reset=reset, when_unresolved=unresolved)
    assert {"clk", "outp", "outn", "unresolved"} <= set(texts(draw_timing(cell)))
    lone = Cell(name="a", decides_on=edge, in_reset=reset, when_unresolved=unresolved, pins=RENAMED)
    assert "their" not in timing_words(lone)
    assert edge in timing_words(cell)


def level(wave, time):
    return [value for start, value in wave.steps if start <= time][-1]


def test_a_precharged_cell_behaves_as_the_developers_guide_says():
    cell = Cell(name="a", in_reset="high", when_unresolved="x")
    clk, outp, outn, flag = waves(cell)
    (rise_1, fall_1), (_, fall_2) = [
        (t, next(u for u, w in clk.steps if u > t and w == "0")) for t, v in clk.steps if v == "1"
    ][:2]
    assert (level(outp, rise_1 + 1), level(outn, rise_1 + 1)) == ("1", "1")  # not ready yet
    assert (level(outp, fall_1), level(outn, fall_1)) == ("1", "0")  # a one
    assert (level(outp, fall_2 - 1), level(flag, fall_2 - 1)) == ("1", "0")  # nothing shown
    assert (level(outp, fall_2), level(outn, fall_2), level(flag, fall_2)) == ("x", "x", "1")
    assert (level(outp, 410.0), level(outn, 400.0)) == ("1", "1")  # reset again after the zero


def test_a_holding_cell_keeps_its_decision_and_stays_unknown():
    cell = Cell(name="a", in_reset="hold", when_unresolved="coin", decides_on="falling")
    clk, outp, _, _ = waves(cell)
    assert level(clk, 0.0) == "1"
    assert level(outp, 0.0) == "x"  # before the first decision
    assert level(outp, 170.0) == "1"  # held through the reset
    assert level(outp, 330.0) == "c"  # until the next ready
    assert level(outp, 400.0) == "0"
