"""How much cheaper a decision of the emitted model is than one of a transistor-level transient.

Run alone: ``python tests/benchmarks/bench_transistor_level.py``. A clocked latch of invented
device values, like the demo's, in ngspice's built-in BSIM3 model with ngspice's own step
control, against the emitted model of a cell with all effects in Icarus. Processor time a
decision. Bound: 100 times. With ngspice's simplest model (level 1) the ratio is smaller; it is
printed without a bound.
"""

from __future__ import annotations

import re
import resource
import subprocess
import sys
from pathlib import Path
from tempfile import TemporaryDirectory

sys.path.insert(0, str(Path(__file__).parents[2]))

from behavgen.emit.systemverilog import systemverilog
from tests.benchmarks.bench_decision_cost import DECISIONS, Bench, macros_for, simulation_s
from tests.example_models import complete_model

LEAST = 100.0
CYCLES = 40
CYCLE_NS = 1.0
DEVICES = {
    "BSIM3": (
        "level=8 version=3.3.0 vth0=0.35 tox=2.5n",
        "level=8 version=3.3.0 vth0=-0.35 tox=2.5n",
    ),
    "level 1": (
        "level=1 vto=0.35 kp=300u lambda=0.1 tox=2.5n cgso=0.3n cgdo=0.3n",
        "level=1 vto=-0.35 kp=100u lambda=0.12 tox=2.5n cgso=0.3n cgdo=0.3n",
    ),
}
"""Invented values: an n-channel and a p-channel device."""
NETLIST = """\
clocked latch of invented device values
.model n nmos {n_channel}
.model p pmos {p_channel}
vdd vdd 0 1.2
vclk clk 0 pulse(0 1.2 0.5n 20p 20p 0.48n 1n)
vip ip 0 pwl({positive})
vin in 0 pwl({negative})
mtail tail clk 0 0 n w=4u l=0.1u
minp x ip tail 0 n w=4u l=0.1u
minn y in tail 0 n w=4u l=0.1u
mn1 outn outp x 0 n w=2u l=0.1u
mn2 outp outn y 0 n w=2u l=0.1u
mp1 outn outp vdd vdd p w=2u l=0.1u
mp2 outp outn vdd vdd p w=2u l=0.1u
mr1 outn clk vdd vdd p w=2u l=0.1u
mr2 outp clk vdd vdd p w=2u l=0.1u
mr3 x clk vdd vdd p w=1u l=0.1u
mr4 y clk vdd vdd p w=1u l=0.1u
c1 outp 0 10f
c2 outn 0 10f
.control
set num_threads=1
tran {cycle}n {stop}n
let separation = v(outp) - v(outn)
{measures}
quit
.endc
.end
"""


def input_v(cycle: int) -> float:
    """Return half the differential input of a cycle in V."""
    state = 1
    for _ in range(cycle + 1):
        state = (state * 25173 + 13849) & 65535
    return (state - 32767.5) * 4.5e-6


def netlist(devices: tuple[str, str]) -> str:
    """Return the circuit with its inputs, and a measurement in each decision phase."""
    steps: dict[float, list[str]] = {1.0: [], -1.0: []}
    for sign, points in steps.items():
        for cycle in range(CYCLES):
            level = 0.65 + sign * input_v(cycle)
            points += [f"{cycle + 0.1:.2f}n {level:.9f}", f"{cycle + 1.05:.2f}n {level:.9f}"]
    measures = "\n".join(
        f"meas tran difference{k} find separation at={k + 0.95:.2f}n" for k in range(CYCLES)
    )
    return NETLIST.format(
        n_channel=devices[0], p_channel=devices[1], positive=" ".join(steps[1.0]),
        negative=" ".join(steps[-1.0]), cycle=CYCLE_NS, stop=CYCLES * CYCLE_NS, measures=measures,
    )  # fmt: skip


def transient_s(folder: Path, devices: tuple[str, str]) -> float:
    """Return the processor time of one decision; all must be right."""
    (folder / "latch.cir").write_text(netlist(devices))
    begin = resource.getrusage(resource.RUSAGE_CHILDREN).ru_utime
    command = ["ngspice", "-b", "latch.cir"]
    done = subprocess.run(command, cwd=folder, check=False, capture_output=True, text=True)
    spent = resource.getrusage(resource.RUSAGE_CHILDREN).ru_utime - begin
    found = dict(re.findall(r"^difference(\d+)\s*=\s*(\S+)", done.stdout, re.MULTILINE))
    assert len(found) == CYCLES, done.stdout[-2000:]
    wrong = [k for k, value in found.items() if (float(value) > 0.0) != (input_v(int(k)) > 0.0)]
    assert not wrong, wrong
    return spent / CYCLES


def main() -> int:
    """Print the figures; return 1 when the bound is missed."""
    model = complete_model()
    with TemporaryDirectory() as name:
        folder = Path(name)
        bench = Bench(folder=folder, cell=model.cell.name, text=systemverilog(model).text,
                      macros=macros_for(model, model.cell.name))  # fmt: skip
        emitted_s = simulation_s(bench.in_icarus(), 0) / DECISIONS
        ratios = {}
        for words, devices in DEVICES.items():
            transistor_s = transient_s(folder, devices)
            ratios[words] = transistor_s / emitted_s
            print(f"transient, {words:8} {1e6 * transistor_s:9.1f} us a decision, "
                  f"{ratios[words]:7.0f} times the model's {1e6 * emitted_s:.1f} us")  # fmt: skip
    return int(ratios["BSIM3"] < LEAST)


if __name__ == "__main__":
    sys.exit(main())
