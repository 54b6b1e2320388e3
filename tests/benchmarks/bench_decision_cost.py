"""What a decision of the emitted model costs in Icarus, relative to an ideal comparator.

Run alone: ``python tests/benchmarks/bench_decision_cost.py``. A bare harness makes its
inputs from integers, without files or Python; the ideal comparator is
``outp <= inp > inn``. Processor time, the best of a few rounds, taken in turns.
Bounds: 7 times at overdrives over full scale, 15 times with every overdrive inside the
noise, 14 times with another common mode at every decision.
"""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path
from tempfile import TemporaryDirectory

sys.path.insert(0, str(Path(__file__).parents[2]))

from behavgen.emit.systemverilog import systemverilog
from tests.example_models import full_model

ROUNDS = 5
DECISIONS = 150_000
MOST = {"full scale": 7.0, "inside the noise": 15.0, "moving common mode": 14.0}
HARNESS = """\
`timescale 1ns/1fs
module top;
  real inp, inn, vdd, x, vcm;
  logic clk;
  wire outp, outn, unresolved;
  int number, kind, state;
  `CELL dut (.inp(inp), .inn(inn), .clk(clk), .outp(outp), .outn(outn), .vdd(vdd),
             .unresolved(unresolved));
  initial begin
    if (!$value$plusargs("kind=%d", kind)) kind = 0;
    clk = 0; vdd = 1.2; vcm = 0.65; inp = vcm; inn = vcm; state = 1;
    #1;
    for (number = 0; number < `DECISIONS; number = number + 1) begin
      state = (state * 25173 + 13849) & 65535;
      x = (state - 32767.5) * 4.5e-6;
      if (kind == 1) x = x * 4e-3 + 0.5e-3;
      if (kind == 2) vcm = 0.55 + state * 3.0e-6;
      inp = vcm + x;
      inn = vcm - x;
      #0.5 clk = 1;
      #0.5 clk = 0;
    end
    $finish;
  end
endmodule
"""
IDEAL = """\
`timescale 1ns/1fs
module ideal(input real inp, input real inn, input logic clk, output logic outp,
             output logic outn, input real vdd, output logic unresolved);
  always @(posedge clk) outp <= inp > inn;
endmodule
"""


def compiled(folder: Path, cell: str, text: str) -> Path:
    """Return the simulation of a cell in the harness."""
    (folder / f"{cell}.sv").write_text(text)
    (folder / "top.sv").write_text(HARNESS)
    options = ["-g2012", f"-DCELL={cell}", f"-DDECISIONS={DECISIONS}", "-s", "top"]
    sources = [f"{cell}.sv", "top.sv"]
    subprocess.run(["iverilog", *options, "-o", cell, *sources], cwd=folder, check=True)
    return folder / cell


def simulation_s(simulation: Path, kind: int) -> float:
    """Return the processor time of one simulation."""
    begin = os.times().children_user
    command = ["vvp", "-n", str(simulation), f"+kind={kind}"]
    subprocess.run(command, check=True, stdout=subprocess.DEVNULL)
    return os.times().children_user - begin


def main() -> int:
    """Print the figures; return 1 when a bound is exceeded."""
    model = full_model()
    with TemporaryDirectory() as name:
        folder = Path(name)
        cells = {
            "ideal": compiled(folder, "ideal", IDEAL),
            "model": compiled(folder, model.cell.name, systemverilog(model).text),
        }
        worse = 0
        for kind, (words, most) in enumerate(MOST.items()):
            best = dict.fromkeys(cells, float("inf"))
            for _ in range(ROUNDS):
                for cell, simulation in cells.items():
                    best[cell] = min(best[cell], simulation_s(simulation, kind))
            ratio = best["model"] / best["ideal"]
            cost_us = best["model"] / DECISIONS * 1e6
            print(f"{words:20} {cost_us:6.2f} us a decision, {ratio:5.1f} times the ideal one")
            worse += ratio > most
    return int(worse > 0)


if __name__ == "__main__":
    sys.exit(main())
