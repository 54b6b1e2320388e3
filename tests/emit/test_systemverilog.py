"""The text of the emitted SystemVerilog, and what three front ends say of it."""

from __future__ import annotations

import itertools
import json
import re
from dataclasses import replace
from pathlib import Path

import pytest

from behavgen.emit.emit import emit
from behavgen.emit.systemverilog import systemverilog
from behavgen.emit.systemverilog_nettype import systemverilog_nettype
from behavgen.errors import ProjectError
from behavgen.model import Pins
from behavgen.model_file import dump_model, load_model
from behavgen.simulators.icarus import find_icarus
from behavgen.simulators.slang import elaborate
from behavgen.simulators.verible import find_verible
from behavgen.simulators.verilator import find_verilator
from tests.example_models import (
    complete_model,
    full_model,
    minimal_model,
    renamed_pins_model,
)

GOLDEN = Path(__file__).parents[1] / "golden"
EXAMPLES = (full_model(), minimal_model(), renamed_pins_model(), complete_model())
VARIANTS = [
    made(decides_on=edge, in_reset=state, when_unresolved=mode)
    for made in (full_model, complete_model)
    for edge, state, mode in itertools.product(
        ("rising", "falling"), ("high", "low", "mid", "hold"), ("x", "coin", "hold")
    )
]
SMALL_PINS = Pins(outn=None, vdd=None, unresolved=None)
PARAMETERS = {
    "OFFSET_SHIFT_V", "NOISE_ON", "MISMATCH_ON", "MEMORY_ON", "DELAY_ON", "SEED", "TEMPERATURE_C",
    "PROCESS", "UNRESOLVED_MODE", "FORCE_UNRESOLVED_EVERY", "WARNINGS",
}  # fmt: skip


def name_of(model):
    cell = model.cell
    return f"{cell.name}-{cell.decides_on}-{cell.in_reset}-{cell.when_unresolved}"


def written(model, folder):
    file = systemverilog(model)
    path = folder / file.path
    path.write_text(file.text, encoding="utf-8")
    return path


@pytest.mark.parametrize("model", EXAMPLES, ids=name_of)
def test_the_text_is_the_one_that_was_approved(model, request):
    file = systemverilog(model)
    approved = GOLDEN / file.path
    if request.config.getoption("--update-golden"):
        approved.write_text(file.text, encoding="utf-8", newline="\n")
    assert file.text == approved.read_text(encoding="utf-8")


@pytest.mark.parametrize("model", [*EXAMPLES, *VARIANTS[:3]], ids=name_of)
def test_lines_are_plain_and_short(model):
    text = systemverilog(model).text
    assert text.isascii()
    assert not any(mark in text for mark in ("{{", "{%", "None", " nan", "\t"))
    for line in text.splitlines():
        assert len(line) <= 100, line
        assert line == line.rstrip(), line


@pytest.mark.parametrize("model", EXAMPLES, ids=name_of)
def test_every_parameter_is_always_there(model):
    header = systemverilog(model).text.partition(") (")[0]
    assert set(re.findall(r"^\s+parameter .*?(\w+)\s*=", header, re.MULTILINE)) == PARAMETERS


def test_absent_effects_leave_no_equation():
    body = systemverilog(minimal_model()).text.partition("endtask")[2]
    for trace in ("sigma", "mismatch", "standard_normal", "offset_v", "fold_supply"):
        assert trace not in body, trace


def test_pins_are_named_as_the_user_wishes_and_may_be_left_out():
    ports = systemverilog(renamed_pins_model()).text.partition(") (")[2].partition(");")[0]
    names = re.findall(r"^\s+(?:input|output)\s+\w+\s+(\w+)", ports, re.MULTILINE)
    assert set(names) == {"vip", "vim", "ck", "q", "en", "unresolved"}


def test_a_pin_named_like_something_inside_is_refused():
    pins = Pins(clk="overdrive_v", outp="q", vdd="task")
    with pytest.raises(ProjectError) as refused:
        systemverilog(full_model(pins=pins))
    columns = [fault.column for fault in refused.value.faults]
    assert columns == ["cells.latch_full.pins.clk", "cells.latch_full.pins.vdd"]


def test_pins_may_swap_their_usual_names(tmp_path):
    model = full_model(pins=Pins(inp="inn", inn="inp", outp="outn", outn="outp"))
    source = written(model, tmp_path)
    assert "overdrive_v = ((inn - inp) - trip_v) - mismatch_v;" in source.read_text()
    said = elaborate([source], top=model.cell.name)
    assert (said.errors, said.warnings) == (0, 0), said.text


def test_process_names_are_the_words_of_a_user(tmp_path):
    odd = 'slow, 5 % \\ "corner"'
    text = dump_model(full_model()).replace('"slow"', json.dumps(odd))
    (tmp_path / "model.json").write_text(text)
    model = load_model(tmp_path / "model.json")
    assert model.processes[1].name == odd
    source = written(model, tmp_path)
    said = elaborate([source], top=model.cell.name)
    assert (said.errors, said.warnings) == (0, 0), said.text


@pytest.mark.parametrize("model", [*EXAMPLES, *VARIANTS[:4]], ids=name_of)
def test_no_array_element_is_assigned_by_a_constant_index(model):
    """Icarus 11 drops such assignments to reals after a comparison that came out equal."""
    assert not re.search(r"\w\[\d+\]\s*=[^=]", systemverilog(model).text)


def test_the_default_process_is_the_first_one():
    model = full_model()
    turned = replace(model, processes=model.processes[::-1])
    assert re.search(r"PROCESS\s*=\s*3,", systemverilog(turned).text)


def test_one_cell_gives_one_file_for_each_language():
    paths = [file.path for file in emit(full_model())]
    assert paths[:3] == ["latch_full.sv", "latch_full_nettype.sv", "latch_full.va"]


@pytest.mark.parametrize("model", [*EXAMPLES, *VARIANTS], ids=name_of)
def test_icarus_compiles_it_without_a_warning(model, tmp_path):
    source = written(model, tmp_path)
    log = tmp_path / "log"
    done = find_icarus().compile(
        [source], top=model.cell.name, output=tmp_path / "compiled", log=log
    )
    assert done.code == 0
    assert "warning" not in log.read_text()


@pytest.mark.parametrize("model", [*EXAMPLES, *VARIANTS[::5]], ids=name_of)
def test_slang_finds_nothing_to_say(model, tmp_path):
    said = elaborate([written(model, tmp_path)], top=model.cell.name)
    assert (said.errors, said.warnings) == (0, 0), said.text


@pytest.mark.parametrize(
    "model",
    [*EXAMPLES, *VARIANTS[::7], minimal_model(pins=SMALL_PINS, time_precision="1ps")],
    ids=name_of,
)
def test_verilator_lint_is_clean(model, tmp_path):
    log = tmp_path / "log"
    done = find_verilator().lint([written(model, tmp_path)], top=model.cell.name, log=log)
    assert done.code == 0, log.read_text()


@pytest.mark.parametrize("model", [*EXAMPLES, *VARIANTS[::7]], ids=name_of)
def test_veribles_default_rules_are_kept(model, tmp_path):
    nettype = systemverilog_nettype(model)
    (tmp_path / nettype.path).write_text(nettype.text, encoding="utf-8")
    sources = [written(model, tmp_path), tmp_path / nettype.path]
    done = find_verible().lint(sources, log=tmp_path / "log")
    assert done.code == 0, done.text


def test_two_cells_live_in_one_simulation_in_any_order(tmp_path):
    sources = [written(model, tmp_path) for model in EXAMPLES]
    top = tmp_path / "top.sv"
    top.write_text(
        "`timescale 1us/1ns\n"
        "module top; real v; logic c; wire [8:0] y;\n"
        "  latch_full a(.inp(v), .inn(v), .clk(c), .outp(y[0]), .outn(y[1]), .vdd(v),"
        " .unresolved(y[2]));\n"
        "  latch_minimal b(.inp(v), .inn(v), .clk(c), .outp(y[3]), .outn(y[4]), .vdd(v),"
        " .unresolved(y[5]));\n"
        "  latch_renamed d(.vip(v), .vim(v), .ck(c), .q(y[6]), .en(c), .unresolved(y[7]));\n"
        "endmodule\n"
    )
    for order in ([top, *sources], [*sources[::-1], top]):
        log = tmp_path / "log"
        done = find_icarus().compile(order, top="top", output=tmp_path / "compiled", log=log)
        assert done.code == 0, log.read_text()
