"""Memory, aperture and energy as drawn, against numbers worked out by hand."""

import xml.etree.ElementTree as ET
from dataclasses import replace

import numpy as np
import pytest

from behavgen.model import Condition, CurvePoints, EnergyEffect, MemoryEffect, MemoryTerm
from behavgen.reference import Reference
from behavgen.report.aperture_figures import aperture_figure
from behavgen.report.conditions import middle_condition
from behavgen.report.energy_figures import energy_figure, energy_law_words
from behavgen.report.memory_figures import memory_figure
from tests.example_models import complete_model, constant_surface, minimal_model
from tests.report.drawings import line_places, marker_places, tick_places

NBSP = "\N{NO-BREAK SPACE}"


def constant(unit, transform, value):
    return constant_surface(unit, transform, value, "typ", "slow")


def drawn(figure):
    return ET.fromstring(figure.svg)


def test_the_memory_falls_straight_on_its_paper_below_the_cap():
    model = complete_model()
    term = MemoryTerm(shift=constant("V", "log", 0.0), tau=constant("s", "log", np.log(30e-12)))
    memory = MemoryEffect(terms=(term,), floor=None, cap_v=0.1)
    x = (4e-11, 9e-11, 3e-10)
    rows = CurvePoints(quantity="memory", condition=Condition(), x=x,
                       y=(0.1, *np.exp(-np.array(x[1:]) / 30e-12).tolist()))  # fmt: skip
    model = replace(model, memory=memory, points=(rows,))
    svg = drawn(memory_figure(model, Reference(model), middle_condition(model)))
    line, across, along = line_places(svg, "line s0"), tick_places(svg, "x"), tick_places(svg, "y")
    assert line[:2, 1] == pytest.approx(along[f"100{NBSP}mV"], abs=0.11)
    per_s = (across["200"] - across["100"]) / 100e-12
    start = 100e-12 + (line[1, 0] - across["100"]) / per_s
    # 1 V exp(-t / 30 ps) is 0.1 V at 69.1 ps; the line has a point every few ps.
    assert start == pytest.approx(30e-12 * np.log(10.0), abs=4e-12)
    per_decade = along[f"10{NBSP}mV"] - along[f"100{NBSP}mV"]
    fall = (line[-1, 1] - line[-2, 1]) / (line[-1, 0] - line[-2, 0]) * per_s / per_decade
    assert fall == pytest.approx(1.0 / (30e-12 * np.log(10.0)), rel=0.01)
    assert len(line) <= 4


def test_bounds_are_drawn_as_bounds():
    model = complete_model()
    figure = memory_figure(model, Reference(model), middle_condition(model))
    assert len(marker_places(drawn(figure), "solid ink", "triangle")) == 1
    assert any("at least" in entry.text for entry in figure.legend)
    without = replace(model, points=tuple(p for p in model.points if "least" not in p.quantity))
    figure = memory_figure(without, Reference(without), middle_condition(without))
    assert not any("at least" in entry.text for entry in figure.legend)


def test_the_input_is_drawn_as_sampled_at_the_centre():
    model = complete_model()
    centre = constant("s", "plain", 2e-11)
    model = replace(model, aperture=replace(model.aperture, centre=centre))
    figure = aperture_figure(model)
    across = tick_places(drawn(figure), "x")
    upright = line_places(drawn(figure), "line s0")
    assert upright[:, 0] == pytest.approx(across["20"], abs=0.11)
    assert f"sampled at 20{NBSP}ps" in figure.legend[0].text


def test_an_aperture_before_the_edge_is_drawn_at_the_edge():
    model = complete_model()
    centre = constant("s", "plain", -5e-12)
    figure = aperture_figure(replace(model, aperture=replace(model.aperture, centre=centre)))
    upright = line_places(drawn(figure), "line s0")
    assert upright[:, 0] == pytest.approx(tick_places(drawn(figure), "x")["0"], abs=0.11)


def test_a_constant_energy_is_a_level_line():
    model = complete_model()
    energy = EnergyEffect(law="constant", fixed=constant("J", "log", np.log(6e-14)))
    model = replace(model, energy=energy)
    figure = energy_figure(model, Reference(model), middle_condition(model))
    line = line_places(drawn(figure), "line s0")
    assert len(line) == 2
    assert line[:, 1] == pytest.approx(tick_places(drawn(figure), "y")["60"], abs=0.11)
    # Rows of 74, 65 and 50 fJ: 60 / 74 is 19 % too little, 60 / 50 is 20 % too much.
    assert f"20{NBSP}% at worst" in figure.caption


@pytest.mark.parametrize("law", ["constant", "delay", "overdrive"])
def test_every_law_of_the_energy_has_words(law):
    effect = EnergyEffect(law=law, fixed=constant("J", "log", -30.0))
    assert energy_law_words(effect).endswith(".")
    assert "clock period" not in energy_law_words(effect)


def test_nothing_is_drawn_of_what_was_not_characterised():
    model = minimal_model()
    reference, middle = Reference(model), middle_condition(model)
    assert memory_figure(model, reference, middle) is None
    assert energy_figure(model, reference, middle) is None
    assert aperture_figure(model) is None
