"""evas-sim: found, run on a circuit with a known answer, and its faults."""

from __future__ import annotations

import numpy as np
import pytest

from behavgen.errors import ToolError
from behavgen.simulators.evas import find_evas

FOLLOWER = """
`include "disciplines.vams"
module follower(a, b);
  input a; output b;
  electrical a, b;
  real level;
  analog begin
    @(cross(V(a) - 0.5, +1, 1e-15)) level = 1.0;
    V(b) <+ transition(level, 2e-9, 1e-9, 1e-9);
  end
endmodule
"""
DECK = """simulator lang=spectre
global 0
ahdl_include "follower.va"
Va (a 0) vsource type=pwl wave=[0 0 1e-9 0 2e-9 1]
X1 (a b) follower
tran tran stop=6n
save b:17e
"""


@pytest.fixture
def folder(tmp_path):
    (tmp_path / "follower.va").write_text(FOLLOWER)
    return tmp_path


def test_the_circuit_answers_as_its_events_do(folder):
    waves = find_evas().run(DECK, folder=folder)
    expected = np.clip((waves["time"] - 3.5e-9) / 1e-9, 0.0, 1.0)
    np.testing.assert_allclose(waves["b"], expected, atol=1e-6)
    assert 0.0 < expected.mean() < 1.0


def test_a_failing_deck_shows_the_simulators_own_words(folder):
    (folder / "follower.va").write_text(FOLLOWER.replace("analog begin", "analog"))
    with pytest.raises(ToolError, match="Failed to compile") as fault:
        find_evas().run(DECK, folder=folder)
    assert "deck.scs" in str(fault.value)


def test_a_deck_that_takes_too_long_is_ended(folder):
    with pytest.raises(ToolError, match=r"not done after 0\.01 s"):
        find_evas().run(DECK, folder=folder, timeout_s=0.01)


def test_a_missing_package_is_a_fault_that_says_how_to_get_it(monkeypatch):
    monkeypatch.setattr("importlib.util.find_spec", lambda name: None)
    with pytest.raises(ToolError, match="pip install evas-sim"):
        find_evas()


def test_its_version_is_stated():
    assert find_evas().version.startswith("evas-sim ")
