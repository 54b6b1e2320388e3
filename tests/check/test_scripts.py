"""Sequences without a rhythm: what is right agrees, and what nobody else looks at is caught."""

import re
from dataclasses import replace

import numpy as np
import pytest

from behavgen.check.harness import harness_macros, top_text
from behavgen.check.irregular import kinds_of, make_sequence
from behavgen.check.script import HIGH, LOW, Change, X, script_of, write_script
from behavgen.check.script_runs import prepare_script, script_runs
from behavgen.check.scripts import play_scripts
from behavgen.check.simulation import IcarusSimulation
from behavgen.simulators.icarus import find_icarus
from tests.check.checking import emitted_text
from tests.check.hand_made import run_with
from tests.example_models import complete_model, full_model, minimal_model, renamed_pins_model

MODELS = {
    "every pin state": full_model(),
    "holds, picoseconds": full_model(in_reset="hold", time_precision="1ps"),
    "enable, mid": renamed_pins_model(in_reset="mid"),
    "falling edge": minimal_model(in_reset="low", decides_on="falling"),
}


def played(model, folder, text=""):
    text = text or emitted_text(model)
    simulation = IcarusSimulation(icarus=find_icarus(), work=folder, logs=folder)
    runs = script_runs(model, first_index=0, seed=1)
    compiled = simulation.compile(
        model.cell.name, text, top_text(model, runs), harness_macros(model, text)
    )
    assert compiled.code == 0, compiled.tail()
    return play_scripts(simulation, model, runs, seed=1)


@pytest.mark.slow
@pytest.mark.parametrize("model", MODELS.values(), ids=MODELS.keys())
def test_what_is_emitted_agrees_and_every_kind_is_met(model, tmp_path):
    found = played(model, tmp_path)
    assert [result for _, result in found.suites if not result.passed] == []
    assert [stratum for stratum in found.strata if stratum.short] == []
    assert found.decisions > 1500


MUTANTS = {
    "a clock from X decides": (
        r"case \(\{clk_level, clk\}\)",
        "case ({clk_level === 1'b1, clk})",
    ),
    "a supply that comes back is not noticed": (r"is_on = !is_on;", "is_on = 1'b0;"),
    "an unknown clock changes nothing": (r"lose_outputs\(4\);", ";"),
    "an input that is no number changes nothing": (r"lose_outputs\(3\);", ";"),
    "a supply that is lost changes nothing": (r"lose_outputs\(2\);", ";"),
}


@pytest.mark.slow
@pytest.mark.parametrize("name", MUTANTS)
def test_what_is_wrong_in_a_disturbance_is_told(name, tmp_path):
    model = full_model()
    pattern, replacement = MUTANTS[name]
    text, count = re.subn(pattern, replacement, emitted_text(model))
    assert count > 0, f"the emitted text has no {pattern} any more: name its successor"
    found = played(model, tmp_path, text)
    first = found.disagreements[0]
    assert first.what in ("outputs", "stray change")
    assert first.expected != first.got


def test_a_script_is_in_order_and_one_change_a_tick():
    changes = [
        Change(time=0, pin="vdd", level=1.0),
        Change(time=0, pin="inputs", level=(0.5, 0.4)),
        Change(time=7, pin="clk", level=HIGH),
        Change(time=5, pin="clk", level=LOW),
        Change(time=7, pin="inputs", level=(0.3, 0.4)),
    ]
    script = script_of(changes, after_last=100)
    assert script.time.tolist() == [0, 5, 7, 8]
    assert script.clk.tolist() == [X, LOW, HIGH, HIGH]
    assert script.inp_v.tolist() == [0.5, 0.5, 0.5, 0.3]
    assert script.vdd_v.tolist() == [1.0] * 4
    assert script.finish == 108


def test_a_script_is_written_as_words(tmp_path):
    script = script_of(
        [Change(time=0, pin="vdd", level=1.0), Change(time=3, pin="clk", level=LOW)],
        after_last=4,
    )  # fmt: skip
    write_script(tmp_path, run_with(), script)
    words = np.fromfile(tmp_path / "0.script", dtype=">u8").reshape(-1, 5)
    assert words[:, 0].tolist() == [0, 3, 4]
    assert words[:, 1].tolist() == [X + 4, LOW + 4, LOW + 4]
    assert words[:, 4].view(">f8").tolist() == [1.0] * 3


@pytest.mark.parametrize("model", [complete_model(), renamed_pins_model()])
def test_nothing_hangs_on_a_tick(model):
    for run in script_runs(model, first_index=0, seed=5):
        one = prepare_script(model, replace(run, decisions=200), seed=5, two_states=False)
        due = np.array(one.waveform.due)
        assert np.abs(one.script.time[:, None] - due).min() > 2


def test_a_simulator_without_x_meets_no_x():
    model = renamed_pins_model()
    run = script_runs(model, first_index=0, seed=1)[0]
    sequence = make_sequence(model, run, seed=1, two_states=True)
    levels = {c.level for c in sequence.changes if c.pin in ("clk", "enable")}
    assert levels == {LOW, HIGH}
    assert set(sequence.kinds) == set(kinds_of(model, two_states=True))
