"""The text of the emitted event-driven Verilog-A model, and a strict compiler's word on it."""

from __future__ import annotations

import re
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import pytest

from behavgen.emit.verilog_a import verilog_a
from behavgen.emit.verilog_a_event import verilog_a_event
from tests.emit.delay_laws import LAWS, model_with
from tests.emit.verilog_a_text import compiled, declared
from tests.example_models import (
    complete_model,
    full_model,
    minimal_model,
    renamed_pins_model,
    with_energy,
)

GOLDEN = Path(__file__).parents[1] / "golden"
VARIANTS = {
    "complete": complete_model(),
    "full": full_model(),
    "minimal": minimal_model(),
    "renamed pins": renamed_pins_model(),
    "complete, held": complete_model(in_reset="hold", decides_on="falling"),
    "complete without delay": replace(complete_model(), delay=None),
    "energy by overdrive": with_energy("overdrive"),
    "constant energy": with_energy("constant"),
    "low": full_model(in_reset="low"),
    "mid": full_model(in_reset="mid"),
    "hold": full_model(in_reset="hold", decides_on="falling"),
    "no reset, no noise": replace(full_model(), reset=None, noise=None),
    "no tables": replace(minimal_model(), delay=None),
    **{law: model_with(law) for law in LAWS},
}


@pytest.mark.parametrize("model", [complete_model(), minimal_model()], ids=lambda m: m.cell.name)
def test_the_text_is_the_one_that_was_approved(model, request):
    emitted = verilog_a_event(model)
    approved = GOLDEN / emitted.path
    if request.config.getoption("--update-golden", default=False):
        approved.write_text(emitted.text, encoding="utf-8", newline="\n")
    assert emitted.text == approved.read_text(encoding="utf-8")


@pytest.mark.parametrize("name", VARIANTS)
def test_lines_are_plain_short_and_without_loose_ends(name):
    text = verilog_a_event(VARIANTS[name]).text
    assert text.isascii()
    assert text.endswith("endmodule\n")
    assert "\n\n\n" not in text
    assert not any(mark in text for mark in ("{{", "{%", "None", "nan", "(*"))
    for line in text.splitlines():
        assert len(line) <= 100, line
        assert line == line.rstrip(), line


@pytest.mark.parametrize("name", VARIANTS)
def test_all_but_the_events_compiles_without_a_warning(name, tmp_path):
    compilation = compiled(verilog_a_event(VARIANTS[name]).text, tmp_path)
    assert compilation.library is not None, compilation.message
    assert compilation.warnings == 0, compilation.message


def test_a_linter_for_its_events_has_nothing_to_say(tmp_path):
    source = tmp_path / "model.va"
    source.write_text(re.sub(r" exclude \d+", "", verilog_a_event(full_model()).text))
    command = [sys.executable, "-m", "evas", "lint", source]
    said = subprocess.run(command, capture_output=True, text=True, check=True).stdout
    assert said == "No EVAS lint diagnostics.\n"


def test_every_variable_is_used():
    for name, model in VARIANTS.items():
        code = re.sub(r"//.*", "", verilog_a_event(model).text)
        for variable in declared(code) - set(re.findall(r"parameter \w+ ([A-Z_]+)", code)):
            assert len(re.findall(rf"\b{variable}\b", code)) > 1, (name, variable)


def test_events_are_nowhere_conditional():
    """LRM 2.4, 4.5.1 and 5.10: analogue operators and events stand outside of conditions."""
    for model in VARIANTS.values():
        body = verilog_a_event(model).text.partition("  analog begin\n")[2]
        for line in body.splitlines():
            if "transition(" in line or line.lstrip().startswith("@("):
                assert re.match(r"    \S", line), line


def test_absent_effects_leave_no_trace_in_the_statements():
    text = verilog_a_event(minimal_model()).text
    statements = text.partition("// -- Constants")[2]
    for trace in (
        "sigma", "offset_v", "mismatch", "slope", "temperature", "vcm", "PROCESS", "$param_given",
        "clamp", "is_on;", "is_on ", "reset_s", "supply_v", "memory", "remembered", "aperture",
        "sampl", "energy", "edge_s",
    ):  # fmt: skip
        assert trace not in statements, trace


def test_parameters_are_described_by_comments():
    text = verilog_a_event(full_model()).text
    for lines in (
        "  // process: 0 typ, 3 slow\n"
        "  parameter integer PROCESS = 0 from [0:3] exclude 1 exclude 2;\n",
        "  // added to the trip point (V)\n  parameter real OFFSET_SHIFT_V = 0.0;\n",
        "  parameter integer SEED = 1;\n",
        "  // outputs after an unresolved decision: 0 half the supply, 1 coin, 2 hold\n"
        "  parameter integer UNRESOLVED_MODE = 0 from [0:2];\n",
        "  parameter integer FORCE_UNRESOLVED_EVERY = 0 from [0:inf);\n",
        "  parameter real MISMATCH_Z1 = 0.0 from [-10.0:10.0];\n",
        "  // duration of the output edges (s)\n"
        "  parameter real EDGE_S = 4e-12 from [1e-15:inf);\n",
    ):
        assert lines in text
    coin = verilog_a_event(full_model(when_unresolved="coin")).text
    assert "UNRESOLVED_MODE = 1 from" in coin


def test_pins_are_renamed_and_left_out():
    text = verilog_a_event(renamed_pins_model()).text
    assert "module latch_renamed_event(vip, vim, ck, en, q, vss);" in text
    assert "parameter real SUPPLY_V = 1.2 from [0.0:inf);" in text
    assert "outn" not in text.partition("`include")[2]
    assert "level_n" not in text


def test_the_head_says_how_noise_is_drawn_in_either_form():
    skipped = "no draws beyond 8.3 sigma"
    assert skipped in verilog_a_event(full_model()).text
    assert skipped not in verilog_a(full_model()).text
    assert "noise: Gaussian\n" in verilog_a(full_model()).text


def test_the_head_tells_what_is_modelled_and_what_cannot_be():
    head = verilog_a_event(complete_model()).text.partition("`include")[0].replace("\n//", "")
    modelled, _, rest = head.partition("Does not model:")
    absent = rest.partition("Values at")[0]
    for effect in ("memory of the previous decision", "aperture", "energy"):
        assert effect in modelled
        assert effect not in absent
    assert "kickback (though characterised)" in absent
    assert "kickback and supply charge flow in the continuous model only" in " ".join(head.split())
