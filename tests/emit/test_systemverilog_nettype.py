"""The core behind a user-defined nettype: slang elaborates it, and executes its resolution."""

from __future__ import annotations

import re
from pathlib import Path

import numpy as np
import pytest
from pyslang.ast import ScriptSession

from behavgen.emit.systemverilog import systemverilog
from behavgen.emit.systemverilog_nettype import systemverilog_nettype
from behavgen.errors import ProjectError
from behavgen.model import Pins
from behavgen.simulators.slang import elaborate
from tests.example_models import complete_model, minimal_model, renamed_pins_model

GOLDEN = Path(__file__).parents[1] / "golden"
MODELS = (complete_model(), minimal_model(), renamed_pins_model())
TOP = """
module top;
  import behavgen_node::*;
  logic clk, outp, outn, unresolved, q, unknown;
  real one = 0.6, other = 0.7;
  node_t signal, reference, supply;
  assign signal = '{volts: one, siemens: 1e-3};
  assign signal = '{volts: other, siemens: 2e-3};
  assign reference = '{volts: 0.65, siemens: 1e12};
  assign supply = '{volts: 1.2, siemens: 1e12};
  latch_complete_nettype #(.SEED(7)) a (.inp(signal), .inn(reference), .clk(clk), .outp(outp),
      .outn(outn), .vdd(supply), .unresolved(unresolved));
  latch_renamed_nettype b (.vip(signal), .vim(reference), .ck(clk), .q(q), .en(1'b1),
      .unresolved(unknown));
endmodule
"""


@pytest.fixture
def sources(tmp_path):
    files = [made(model) for model in MODELS for made in (systemverilog_nettype, systemverilog)]
    paths = [tmp_path / file.path for file in files]
    for path, file in zip(paths, files, strict=True):
        path.write_text(file.text)
    return paths


def test_the_text_is_the_one_that_was_approved(request):
    file = systemverilog_nettype(minimal_model())
    approved = GOLDEN / file.path
    if request.config.getoption("--update-golden"):
        approved.write_text(file.text, encoding="utf-8", newline="\n")
    assert file.text == approved.read_text(encoding="utf-8")
    assert all(len(line) <= 100 for line in file.text.splitlines())


def test_two_drivers_on_a_net_and_cells_side_by_side(sources, tmp_path):
    texts = [path.read_text() for path in sources]
    for number, order in enumerate((texts, texts[::-1])):
        unit = tmp_path / f"unit{number}.sv"  # as simulators take the files of one command
        unit.write_text("".join(order) + "`timescale 1ns/1fs\n" + TOP)
        said = elaborate([unit], top="top")
        assert (said.errors, said.warnings) == (0, 0), said.text


def test_a_second_compilation_unit_may_declare_the_package_again(sources, tmp_path):
    top = tmp_path / "top.sv"
    top.write_text("`timescale 1ns/1fs\n" + TOP)
    said = elaborate([*sources, top], top="top")
    assert said.errors == 0, said.text
    assert said.text.count("warning:") == said.text.count("duplicate definition of 'behavgen_node'")


@pytest.mark.parametrize("model", MODELS, ids=lambda model: model.cell.name)
def test_a_file_needs_no_other(model, tmp_path):
    file = systemverilog_nettype(model)
    (tmp_path / file.path).write_text(file.text)
    said = elaborate([tmp_path / file.path], top=f"{model.cell.name}_nettype")
    assert (said.errors, said.warnings) == (0, 0), said.text


def test_drivers_are_joined_by_kirchhoffs_law():
    text = systemverilog_nettype(minimal_model()).text
    declared = re.search(r"  typedef struct.*?endfunction\n", text, re.DOTALL)[0]
    session = ScriptSession()
    session.eval(declared)
    rng = np.random.default_rng(5)
    for count in rng.integers(1, 9, 200):
        volts = rng.uniform(-2.0, 2.0, count)
        siemens = 10.0 ** rng.uniform(-9.0, 3.0, count) * (rng.random(count) < 0.9)
        drivers = ", ".join(
            f"'{{{v!r}, {s!r}}}" for v, s in zip(volts.tolist(), siemens.tolist(), strict=True)
        )
        session.eval(f"source_t drivers_{count}[] = '{{{drivers}}};")
        node = session.eval(f"joined('{{{drivers}}});").value
        found_v, found_s = float(node[0].value), float(node[1].value)
        assert found_s == pytest.approx(siemens.sum(), rel=1e-12)
        into_node = (siemens * (volts - found_v)).sum()
        assert abs(into_node) <= 1e-12 * (siemens * np.abs(volts)).sum()
        assert siemens.any() or found_v == 0.0


def test_a_pin_named_like_something_inside_is_refused():
    with pytest.raises(ProjectError, match="core"):
        systemverilog_nettype(minimal_model(pins=Pins(clk="core")))
