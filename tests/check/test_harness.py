"""The harness is fitted to a cell by macros, and gets its stimulus as words of 64 bits."""

import struct

from behavgen.check.given import own_text
from behavgen.check.harness import harness_macros, top_text, write_stimulus
from behavgen.check.preparation import plan_check
from tests.check.hand_made import run_with, three_decisions
from tests.example_models import full_model, minimal_model, renamed_pins_model


def test_macros_name_the_pins_that_there_are():
    macros = harness_macros(renamed_pins_model(decides_on="falling"), "bit SEED; int x_cause;")
    assert macros == {
        "CELL": "latch_renamed", "PARAMETERS": ".SEED(SEED)", "TICK": "1fs",
        "DECIDING": "1'b0", "READS_X_CAUSE": "1",
        "PIN_INP": "vip", "PIN_INN": "vim", "PIN_CLK": "ck", "PIN_OUTP": "q",
        "PIN_UNRESOLVED": "unresolved", "PIN_ENABLE": "en",
    }  # fmt: skip


def test_what_cannot_be_read_is_not_read():
    macros = harness_macros(minimal_model(time_precision="1ps"), "int my_x_cause_too;")
    assert "READS_X_CAUSE" not in macros
    assert macros["TICK"] == "1ps"
    assert macros["DECIDING"] == "1'b1"


def test_every_run_is_an_instance_with_all_parameters():
    model = full_model()
    plan = plan_check(own_text(model), seed=1, jobs=2)
    text = top_text(model, plan.runs)
    assert text.count("block_harness #(") == len(plan.runs)
    assert text.count("  latch_full as_declared ();") == 1
    slow = next(run for run in plan.runs if run.name == "slow, noise on, offset shifted")
    instance = text.split(f"// {slow.name}\n")[1].split(f"{slow.instance} ();")[0]
    assert ".PROCESS(3)" in instance
    assert ".OFFSET_SHIFT_V(0.0137)" in instance
    assert f".SEED(64'h{slow.given.seed:016x})" in instance


def test_plans_have_unique_names_and_indices_in_a_row():
    plan = plan_check(own_text(full_model()), seed=1, jobs=3)
    assert [run.index for run in plan.runs] == list(range(len(plan.runs)))
    assert len({run.name for run in plan.runs}) == len(plan.runs)
    names = [batch.name for batch in (*plan.blocks, plan.directed)]
    assert len(set(names)) == len(names)
    for batch in plan.blocks:
        indices = [run.index for run in batch.runs]
        assert indices == list(range(indices[0], indices[-1] + 1))


def test_files_hold_big_endian_words(tmp_path):
    write_stimulus(tmp_path, run_with(), three_decisions())
    clock = (tmp_path / "0.clock").read_bytes()
    assert struct.unpack(">6Q", clock) == (100, 100, 100, 50, 150, 100)
    inputs = (tmp_path / "0.inputs").read_bytes()
    assert struct.unpack(">Q3d", inputs[32:64]) == (250, 0.6, 0.6, 1.2)
    assert struct.unpack(">Q3d", inputs[96:]) == (170, 0.599, 0.6, 1.2)
