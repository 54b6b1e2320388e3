"""Instances leave each other alone: also in a simulator that ends waits in all of them at once."""

from __future__ import annotations

import pytest

from behavgen.emit.systemverilog import systemverilog
from behavgen.simulators.icarus import find_icarus
from behavgen.simulators.process import run_logged
from behavgen.simulators.verilator import find_verilator
from tests.example_models import full_model

# `hasty` ends each decision long before it is done, while `patient` waits for its own.
TOP = """
`timescale 1fs/1fs
module top;
  logic slow_clk = 0, fast_clk = 0;
  wire outp, outn, unresolved, hasty_p, hasty_n, hasty_flag;
  latch_full #(.NOISE_ON(0), .SEED(1)) patient (.inp(0.655), .inn(0.65), .clk(slow_clk),
      .outp(outp), .outn(outn), .vdd(1.2), .unresolved(unresolved));
  latch_full #(.NOISE_ON(0), .SEED(2)) hasty (.inp(0.651001), .inn(0.65), .clk(fast_clk),
      .outp(hasty_p), .outn(hasty_n), .vdd(1.2), .unresolved(hasty_flag));
  time edge_at;
  int shown = 0;
  always @(posedge slow_clk) edge_at = $time;
  always @(negedge outn) if (slow_clk && shown < 5) begin
    shown = shown + 1;
    $display("shown after %0d", $time - edge_at);
  end
  always #(50_000) fast_clk = !fast_clk;
  always #(1_000_003) slow_clk = !slow_clk;
  initial #(10_000_000) $finish;
endmodule
"""


@pytest.fixture
def sources(tmp_path):
    module, top = tmp_path / "latch_full.sv", tmp_path / "top.sv"
    module.write_text(systemverilog(full_model()).text)
    top.write_text(TOP)
    return [module, top]


def delays(text: str) -> list[int]:
    return [int(line.split()[-1]) for line in text.splitlines() if line.startswith("shown after")]


def in_icarus(sources, folder):
    compiled = folder / "top.vvp"
    icarus = find_icarus()
    assert icarus.compile(sources, top="top", output=compiled, log=folder / "c.log").code == 0
    return delays(icarus.simulate(compiled, log=folder / "s.log").text)


def test_in_icarus(sources, tmp_path):
    found = in_icarus(sources, tmp_path)
    assert len(found) == 5
    assert len(set(found)) == 1


@pytest.mark.slow
def test_in_verilator(sources, tmp_path):
    program = tmp_path / "simulation"
    built = find_verilator().build(sources, top="top", output=program, log=tmp_path / "b.log")
    assert built.code == 0, built.tail(20)
    found = delays(run_logged([program], log=tmp_path / "v.log", folder=tmp_path).text)
    assert found == in_icarus(sources, tmp_path)
