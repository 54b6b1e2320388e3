"""The text of the emitted Verilog-A model; what it does is tested in a circuit simulator."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from behavgen.emit.verilog_a import verilog_a
from behavgen.emit.verilog_a_surfaces import surface_statements, wrapped
from behavgen.model import Axis, Box, Process, Range, Surface, Variant
from tests.example_models import complete_model, full_model, minimal_model, renamed_pins_model

GOLDEN = Path(__file__).parents[1] / "golden"
VARIANTS = {
    "complete": complete_model(),
    "full": full_model(),
    "minimal": minimal_model(),
    "renamed pins": renamed_pins_model(),
    "hold": full_model(in_reset="hold", decides_on="falling"),
    "no tables": replace(minimal_model(), delay=None),
}


@pytest.mark.parametrize("model", [complete_model(), minimal_model()], ids=lambda m: m.cell.name)
def test_the_text_is_the_one_that_was_approved(model, request):
    emitted = verilog_a(model)
    approved = GOLDEN / emitted.path
    if request.config.getoption("--update-golden", default=False):
        approved.write_text(emitted.text, encoding="utf-8", newline="\n")
    assert emitted.text == approved.read_text(encoding="utf-8")


@pytest.mark.parametrize("name", VARIANTS)
def test_lines_are_plain_short_and_without_loose_ends(name):
    text = verilog_a(VARIANTS[name]).text
    assert text.isascii()
    assert text.endswith("endmodule\n")
    assert not any(mark in text for mark in ("{{", "{%", "None", "nan"))
    for line in text.splitlines():
        assert len(line) <= 100, line
        assert line == line.rstrip(), line


def test_absent_effects_leave_no_trace_in_the_equations():
    text = verilog_a(minimal_model()).text
    equations = text.partition("module latch_minimal")[2].partition("// -- Form")[2]
    for trace in (
        "white_noise", "sigma", "offset_v", "mismatch", "slope", "temperature", "vcm", "PROCESS",
        "$param_given", "clamp(supply_v", "is_on ", "n_held",
    ):  # fmt: skip
        assert trace not in equations, trace


def test_parameters_carry_ranges_units_and_descriptions():
    text = verilog_a(full_model()).text
    assert "parameter integer PROCESS = 0 from [0:3] exclude 1 exclude 2;" in text
    assert "parameter real TEMPERATURE_C = 27.0 from [-273.15:inf);" in text
    assert 'units = "V", desc = "added to the trip point"' in text
    assert "MEMORY_ON = 1 from [0:1];" in text
    assert "memory of the previous decision: 0 off, 1 on (not characterised: does nothing)" in text
    assert "parameter real MISMATCH_Z1 = 0.0 from [-10.0:10.0];" in text


def test_pins_are_renamed_and_left_out():
    text = verilog_a(renamed_pins_model()).text
    assert "module latch_renamed(vip, vim, ck, en, q, vss);" in text
    assert "parameter real SUPPLY_V = 1.2 from [0.0:inf);" in text
    assert "outn" not in text.partition("`include")[2]
    assert "level_n" not in text


def random_surface(random, powers):
    """Return a surface of one process and a function that evaluates it on its own terms."""
    axes = (
        Axis(condition="temperature_k", shape="reciprocal", centre=0.0034, half_range=9e-4),
        Axis(condition="vdd_v", shape="reciprocal_square", centre=0.7, half_range=0.2),
        Axis(condition="vcm_v", shape="plain", centre=0.6, half_range=0.2),
    )
    grid = np.stack(np.meshgrid(*(np.arange(p) for p in powers)), axis=-1).reshape(-1, 3)
    kept = grid[random.random(len(grid)) < 0.7]
    exponents = tuple(tuple(row) for row in kept.tolist())
    coefficients = np.round(random.normal(size=len(kept)), 4)
    box = Box(vdd_v=Range(low=1.0, high=1.4), temperature_k=Range(low=230.0, high=400.0),
              vcm_v=Range(low=0.4, high=0.8))  # fmt: skip
    variant = Variant(process="p", coefficients=tuple(coefficients.tolist()), box=box)
    surface = Surface(
        unit="V", transform="log", axes=axes, exponents=exponents, variants=(variant,)
    )

    def evaluate(temperature_k, supply_v, vcm_v):
        t, v, c = (
            np.clip(temperature_k, 230, 400),
            np.clip(supply_v, 1.0, 1.4),
            np.clip(vcm_v, 0.4, 0.8),
        )
        x = np.array([(1 / t - 0.0034) / 9e-4, (v**-2 - 0.7) / 0.2, (c - 0.6) / 0.2])
        return np.exp(sum(a * np.prod(x**row) for a, row in zip(coefficients, kept, strict=True)))

    return surface, evaluate


@pytest.mark.parametrize("powers", [(1, 1, 1), (3, 1, 1), (1, 3, 1), (1, 1, 2), (3, 3, 3)])
@pytest.mark.parametrize("seed", range(4))
def test_statements_evaluate_to_the_polynomial(powers, seed):
    """The statements happen to be Python too, once they are joined into lines."""
    random = np.random.default_rng(seed)
    surface, evaluate = random_surface(random, powers)
    if not surface.exponents:
        pytest.skip("no term was drawn")
    statements = surface_statements({"value": surface}, (Process(name="p", code=0),))
    assert max(map(len, statements.lines)) <= 94
    code = " ".join(line.strip() for line in statements.lines).replace(";", "\n")
    code = "\n".join(line.strip() for line in code.splitlines())
    for _ in range(20):
        point = {
            "temperature_k": random.uniform(200, 430),
            "supply_v": random.uniform(0.8, 1.6),
            "vcm_v": random.uniform(0.2, 1.0),
        }
        names = {"clamp": lambda x, low, high: min(max(x, low), high), "exp": np.exp, "pow": pow}
        scope = names | point
        exec(code, {"__builtins__": {}}, scope)
        assert scope["value"] == pytest.approx(evaluate(**point), rel=1e-9)


def test_processes_are_told_apart_only_where_they_differ():
    processes = tuple(
        Process(name=name, code=code) for name, code in (("a", 2), ("b", 5), ("c", 9))
    )

    def constant(*values):
        variants = tuple(
            Variant(process=process.name, coefficients=(value,), box=Box())
            for process, value in zip(processes, values, strict=True)
        )
        return Surface(unit="V", transform="plain", axes=(), exponents=((),), variants=variants)

    assert surface_statements({"x": constant(1.0, 1.0, 1.0)}, processes).lines == ("x = 1.0;",)
    assert surface_statements({"x": constant(1.0, 2.0, -3.0)}, processes).lines == (
        "if (PROCESS == 2) begin  // a",
        "  x = 1.0;",
        "end else if (PROCESS == 5) begin  // b",
        "  x = 2.0;",
        "end else begin  // c",
        "  x = -3.0;",
        "end",
    )


def test_long_statements_break_before_sums_and_never_inside_a_product():
    terms = " + ".join(f"1.2345e-06 * x_temperature * x_supply * x_{k}" for k in range(9))
    lines = wrapped(f"value = {terms};")
    assert " ".join(line.strip() for line in lines) == f"value = {terms};"
    assert all(line.startswith("  + ") for line in lines[1:])
