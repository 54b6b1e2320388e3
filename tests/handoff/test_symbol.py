"""The schematic symbol: from the project file to a module with its pins."""

from __future__ import annotations

import re

import pytest

from behavgen.errors import ProjectError
from behavgen.handoff.package import Wishes
from behavgen.handoff.symbol import symbol_of
from behavgen.project import load_project
from tests.example_models import full_model, renamed_pins_model
from tests.handoff.packages import files_of, started, written
from tests.small_project import PROJECT_TEXT, write_small_project

SYMBOL = """
[cells.latch.symbol]
name = "CMP_A"
supply = "1.25"
[cells.latch.symbol.pins]
QB = "outn"
Q = "outp"
VIP = "inp"
VIN = "inn"
CK = "clk"
AVDD = "vdd"
DVDD = "vdd"
AVSS = "vss"
NC = "open"
"""


def symbol_from(tmp_path, text):
    return load_project(write_small_project(tmp_path, project=PROJECT_TEXT + text)).cells[0].symbol


def test_the_pins_keep_the_order_of_the_project_file(tmp_path):
    symbol = symbol_from(tmp_path, SYMBOL)
    assert symbol.name == "CMP_A"
    assert symbol.supply_v == 1.25
    assert [name for name, _ in symbol.pins] == [
        "QB", "Q", "VIP", "VIN", "CK", "AVDD", "DVDD", "AVSS", "NC",
    ]  # fmt: skip
    text = files_of(full_model(), Wishes(symbol=symbol))["models/CMP_A.sv"].text
    declared = re.findall(r"^  (?:input|output|inout) +\w+ +(\w+),?  //", text, re.MULTILINE)
    assert declared == [name for name, _ in symbol.pins]


def test_the_symbol_needs_all_its_supplies(tmp_path):
    symbol = symbol_from(tmp_path / "project", SYMBOL)
    folder = written(full_model(), tmp_path, Wishes(symbol=symbol))
    (folder / "top.sv").write_text("""
`timescale 1ps/1fs
module top;
  real vip = 0.655, vin = 0.65;
  logic ck = 0, avdd = 1, dvdd = 1, avss = 0;
  wire q, qb;
  CMP_A #(.NOISE_ON(0)) u1 (.VIP(vip), .VIN(vin), .CK(ck), .Q(q), .QB(qb), .AVDD(avdd),
                            .DVDD(dvdd), .AVSS(avss), .NC());
  initial begin
    #100 $display("supply %0.2f rest %b%b", u1.core_inside.vdd, q, qb);
    ck = 1; #900 $display("one %b%b", q, qb);
    ck = 0; vip = 0.6; #1000 ck = 1; #900 $display("zero %b%b", q, qb);
    dvdd = 0; #1 $display("supply %0.2f off %b%b", u1.core_inside.vdd, q, qb);
    dvdd = 1; ck = 0; #100 $display("back %b%b", q, qb);
    avss = 1; #1 $display("ground lost %b%b", q, qb);
    avss = 0; avdd = 1'bx; #1 $display("unknown %b%b", q, qb);
    $finish;
  end
endmodule
""")
    line = ("iverilog", "-g2012", "-o", "top.vvp", "-s", "top", "-c", "files.f", "top.sv")
    code, said = started(folder, *line)
    assert (code, said) == (0, "")
    _, said = started(folder, "vvp", "-n", "top.vvp")
    assert said.splitlines()[:7] == [
        "supply 1.25 rest 11", "one 10", "zero 01", "supply 0.00 off xx", "back 11",
        "ground lost xx", "unknown xx",
    ]  # fmt: skip


def test_without_a_symbol_the_pins_are_the_cells_own():
    symbol = symbol_of(renamed_pins_model(), None)
    pins = renamed_pins_model().cell.pins
    present = (pins.inp, pins.inn, pins.clk, pins.enable, pins.outp, pins.outn, pins.vdd, pins.vss)
    assert tuple(name for name, _ in symbol.pins) == tuple(pin for pin in present if pin)


FAULTS = {
    'pins = { A = "inp", B = "inn", C = "clk" }': "no pin is outp; each of them once",
    'pins = { A = "inp", B = "inn", C = "clk", D = "outq" }': "no role 'outq', did you mean 'outp'",
    'pins = { A = "inp", B = "inp", C = "clk", D = "outp", E = "inn" }': "2 pins are 'inp'; one",
    'pins = { A = "inp", B = "inn", C = "clk", D = "outp", E = "enable" }':
        "the cell has no pin 'enable'",
    'pins = { wire = "inp", B = "inn", C = "clk", D = "outp" }':
        "'wire' is a SystemVerilog keyword",
    'pins = { SEED = "inp", B = "inn", C = "clk", D = "outp" }': "'SEED' is taken",
    'pins = { core_inside = "inp", B = "inn", C = "clk", D = "outp" }':
        "'core_inside' is taken inside the module",
    'name = "latch"\npins = { A = "inp", B = "inn", C = "clk", D = "outp" }':
        "'latch' is the name of another module",
    'supply = "0"\npins = { A = "inp", B = "inn", C = "clk", D = "outp" }': "above 0",
    'name = "CMP"': "pins: missing",
}  # fmt: skip


@pytest.mark.parametrize("text", FAULTS)
def test_faults_name_their_place_and_what_is_allowed(text, tmp_path):
    with pytest.raises(ProjectError) as caught:
        symbol_from(tmp_path, f"[cells.latch.symbol]\n{text}\n")
    said = str(caught.value)
    assert FAULTS[text] in said
    assert said.startswith("behavgen.toml:")
    assert "cells.latch.symbol" in said
