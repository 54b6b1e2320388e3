"""What a decision of the emitted model costs, relative to an ideal comparator in Icarus.

Run alone: ``python tests/benchmarks/bench_decision_cost.py``. A bare harness makes its
inputs from integers, without files or Python; the ideal comparator is
``outp <= inp > inn``. All effects are on, memory, aperture and energy among them. Processor
time, the best of a few rounds, taken in turns. Verilator's figures are relative to the ideal
comparator in Icarus as well.
"""

from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

sys.path.insert(0, str(Path(__file__).parents[2]))

from behavgen import fit, load_project, read_tables
from behavgen.emit.systemverilog import systemverilog
from behavgen.model import ComparatorModel
from behavgen.reference import Reference
from behavgen.simulators.verilator import find_verilator
from tests.example_models import complete_model

LATCH_130N = Path(__file__).parents[1] / "data" / "latch_130n"
ROUNDS = 5
DECISIONS = 150_000
KINDS = ("full scale", "inside the noise", "moving common mode")
MOST_IN_ICARUS = dict(zip(KINDS, (6.0, 15.0, 12.0), strict=True))
MOST_IN_VERILATOR = 1.5
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
    clk = 0; vdd = `VDD; vcm = `VCM; inp = vcm; inn = vcm; state = 1;
    #1;
    for (number = 0; number < `DECISIONS; number = number + 1) begin
      state = (state * 25173 + 13849) & 65535;
      x = (state - 32767.5) * 4.5e-6;
      if (kind == 1) x = (state - 32767.5) * `THREE_SIGMA + `TRIP;
      if (kind == 2) vcm = `LOW_VCM + state * `VCM_STEP;
      inp = vcm + x;
      inn = vcm - x;
      #`HALF clk = 1;
      #`HALF clk = 0;
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


@dataclass(frozen=True, slots=True, kw_only=True)
class Bench:
    """A cell in the harness, in a simulator."""

    folder: Path
    cell: str
    text: str
    macros: dict[str, object]

    def sources(self) -> list[Path]:
        """Write and return the files."""
        paths = [self.folder / f"{self.cell}.sv", self.folder / "top.sv"]
        for path, text in zip(paths, (self.text, HARNESS), strict=True):
            path.write_text(text)
        return paths

    def in_icarus(self) -> list[str]:
        """Return the command of a simulation."""
        options = [f"-D{name}={value}" for name, value in self.macros.items()]
        compiled = self.folder / f"{self.cell}.vvp"
        command = ["iverilog", "-g2012", *options, "-s", "top", "-o", compiled, *self.sources()]
        subprocess.run(command, check=True)
        return ["vvp", "-n", str(compiled)]

    def in_verilator(self) -> list[str]:
        """Return the command of a simulation."""
        program = self.folder / f"{self.cell}.program"
        macros = {name: str(value) for name, value in self.macros.items()}
        done = find_verilator().build(
            self.sources(), top="top", output=program, log=self.folder / "log", macros=macros
        )
        assert done.code == 0, done.tail(20)
        return [str(program)]


def macros_for(model: ComparatorModel, cell: str) -> dict[str, object]:
    """Return conditions in the middle of the range, and a clock slow enough to decide."""
    reference, box = Reference(model), model.box
    assert box.vdd_v is not None
    assert box.vcm_v is not None
    slowest_ns = float(reference.delay(1e-7)) * 1e9 + float(reference.reset_delay()) * 1e9
    return {
        "CELL": cell, "DECISIONS": DECISIONS, "VDD": box.vdd_v.middle, "VCM": box.vcm_v.middle,
        "LOW_VCM": box.vcm_v.low, "VCM_STEP": (box.vcm_v.high - box.vcm_v.low) / 65536,
        "THREE_SIGMA": 1.5 * float(reference.noise_sigma()) / 32768,
        "TRIP": 0.5 * float(reference.offset()), "HALF": round(max(0.5, slowest_ns), 3),
    }  # fmt: skip


def simulation_s(command: list[str], kind: int) -> float:
    """Return the processor time of one simulation."""
    begin = os.times().children_user
    subprocess.run([*command, f"+kind={kind}"], check=True, stdout=subprocess.DEVNULL)
    return os.times().children_user - begin


def latch_130n() -> ComparatorModel:
    """Return the model of the transistor-level characterisation."""
    project = load_project(LATCH_130N)
    return fit(read_tables(project, "latch_130n"))


def judged(model: ComparatorModel, folder: Path) -> int:
    """Print a cell's figures; return how many exceed their bound."""
    text, name = systemverilog(model).text, model.cell.name
    ideal = Bench(folder=folder, cell="ideal", text=IDEAL, macros=macros_for(model, "ideal"))
    bench = Bench(folder=folder, cell=name, text=text, macros=macros_for(model, name))
    runs = {"ideal": ideal.in_icarus(), "Icarus": bench.in_icarus()}
    runs["Verilator"] = bench.in_verilator()
    worse = 0
    for kind, words in enumerate(KINDS):
        best = dict.fromkeys(runs, float("inf"))
        for _ in range(ROUNDS):
            for simulator, command in runs.items():
                best[simulator] = min(best[simulator], simulation_s(command, kind))
        most = {"Icarus": MOST_IN_ICARUS[words], "Verilator": MOST_IN_VERILATOR}
        for simulator, bound in most.items():
            ratio = best[simulator] / best["ideal"]
            cost_us = best[simulator] / DECISIONS * 1e6
            print(f"{name:15} {words:19} {simulator:10} {cost_us:6.2f} us a decision, "
                  f"{ratio:5.2f} times the ideal one (bound {bound:g})")  # fmt: skip
            worse += ratio > bound
    return worse


def main() -> int:
    """Print the figures; return 1 when a bound is exceeded."""
    with TemporaryDirectory() as name:
        return int(sum(judged(model, Path(name)) for model in (complete_model(), latch_130n())) > 0)


if __name__ == "__main__":
    sys.exit(main())
