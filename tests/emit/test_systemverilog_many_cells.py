"""Two cells, three instances each, in one simulation: who shares random numbers, and who does not.

Draws hang on the seed alone, not on the cell: an explicit seed gives the same numbers wherever
it is given; without one, every instance has its own.
"""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from behavgen.emit.systemverilog import systemverilog
from behavgen.simulators.icarus import find_icarus
from behavgen.simulators.process import run_logged
from behavgen.simulators.verilator import find_verilator
from tests.example_models import complete_model, full_model

CELLS = ("latch_full", "latch_complete")
SEEDS = (5, 5, 0)
DECISIONS = 400
INSTANCES = [(cell, number) for cell in CELLS for number in range(3)]


def top() -> str:
    """Return a design in another time unit that prints what noise adds, and the mismatch."""
    lines = []
    for cell, number in INSTANCES:
        name = f"{cell}_{number}"
        lines.append(
            f"  wire p_{name}, n_{name}, u_{name};\n"
            f"  {cell} #(.SEED({SEEDS[number]}), .MEMORY_ON(0)) {name} (.inp(inp),"
            f" .inn(0.65), .clk(clk),\n      .outp(p_{name}), .outn(n_{name}), .vdd(1.2),"
            f" .unresolved(u_{name}));\n"
        )
    shown = ", ".join(
        f"{cell}_{number}.{what}"
        for what in ("overdrive_v", "mismatch0_z")
        for cell, number in INSTANCES
    )
    places = " ".join(["%.17g"] * 2 * len(INSTANCES))
    return (
        "`timescale 1ps/1ps\nmodule top;\n  real inp = 0.651;\n  logic clk = 1'b0;\n"
        f"{''.join(lines)}"
        f"  initial begin\n    repeat ({DECISIONS}) begin\n      #2000 clk = 1'b1;\n"
        f'      #2000 $display("D {places}", {shown});\n      clk = 1'
        "'b0;\n    end\n    $finish;\n  end\nendmodule\n"
    )


def in_icarus(sources, folder) -> str:
    icarus, compiled = find_icarus(), folder / "top.vvp"
    assert icarus.compile(sources, top="top", output=compiled, log=folder / "c.log").code == 0
    return icarus.simulate(compiled, log=folder / "s.log").text


def in_verilator(sources, folder) -> str:
    program = folder / "simulation"
    built = find_verilator().build(sources, top="top", output=program, log=folder / "b.log")
    assert built.code == 0, built.tail(20)
    return run_logged([program], log=folder / "v.log", folder=folder).text


def drawn(text: str) -> dict[tuple[str, int], tuple[np.ndarray, np.ndarray]]:
    """Return the overdrives and the mismatch in sigmas of each instance."""
    rows = [line.split()[1:] for line in text.splitlines() if line.startswith("D ")]
    assert len(rows) == DECISIONS
    overdrives, mismatches = np.split(np.array(rows, dtype=float).T, 2)
    return dict(zip(INSTANCES, zip(overdrives, mismatches, strict=True), strict=True))


@pytest.mark.slow
@pytest.mark.parametrize("simulate", [in_icarus, in_verilator])
@pytest.mark.parametrize("reverse", [False, True])
def test_equal_seeds_share_numbers_and_paths_do_not(simulate, reverse, tmp_path):
    if reverse and simulate is in_verilator:
        pytest.skip("the order of files is tried in one simulator")
    texts = {
        model.cell.name: systemverilog(model).text for model in (full_model(), complete_model())
    }
    texts["top"] = top()
    sources = [tmp_path / f"{name}.sv" for name in texts]
    for source, text in zip(sources, texts.values(), strict=True):
        source.write_text(text)
    found = drawn(simulate(sources[::-1] if reverse else sources, tmp_path))
    for other in [("latch_full", 1), ("latch_complete", 0), ("latch_complete", 1)]:
        assert np.array_equal(found["latch_full", 0], found[other])
    own = [("latch_full", 0), ("latch_full", 2), ("latch_complete", 2)]
    for one, other in itertools.combinations(own, 2):
        (noise, mismatch), (other_noise, other_mismatch) = found[one], found[other]
        assert mismatch[0] != other_mismatch[0]
        assert noise.std() > 1e-4
        # Five sigmas of the correlation of independent samples: 1 false alarm in 10^6
        assert abs(np.corrcoef(noise, other_noise)[0, 1]) < 5.0 / DECISIONS**0.5
