"""Icarus Verilog is found, judged by its version and called as intended."""

from pathlib import Path

import pytest

from behavgen.errors import ToolError
from behavgen.simulators.icarus import find_icarus
from tests.simulators.mock_tools import calls, put_on_path

STATED = "print('Icarus Verilog version {} (stable) ()')"


def test_the_version_is_as_stated(tmp_path, monkeypatch):
    put_on_path(tmp_path, monkeypatch, iverilog=STATED.format("12.0"), vvp="")
    icarus = find_icarus()
    assert icarus.version == "Icarus Verilog 12.0 (stable)"
    assert icarus.vvp == tmp_path / "vvp"


@pytest.mark.parametrize("version", ["10.3", "0.9", "nonsense"])
def test_an_older_one_is_refused_with_what_to_do(version, tmp_path, monkeypatch):
    put_on_path(tmp_path, monkeypatch, iverilog=STATED.format(version), vvp="")
    with pytest.raises(ToolError, match=r"11 or newer: apt-get install iverilog") as caught:
        find_icarus()
    assert version in str(caught.value)
    assert caught.value.exit_code == 4


@pytest.mark.parametrize("present", [{}, {"iverilog": STATED.format("11.0")}, {"vvp": ""}])
def test_a_missing_one_is_refused_with_what_to_do(present, tmp_path, monkeypatch):
    put_on_path(tmp_path, monkeypatch, **present)
    with pytest.raises(ToolError, match="not on the PATH; install Icarus Verilog"):
        find_icarus()


def test_the_command_lines(tmp_path, monkeypatch):
    put_on_path(tmp_path / "bin", monkeypatch, iverilog=STATED.format("11.0"), vvp="print('ran')")
    icarus, output = find_icarus(), tmp_path / "a.vvp"
    icarus.compile(
        [Path("one.sv"), Path("two.sv")], top="top", output=output, log=tmp_path / "compile.log",
        macros={"LEVEL": "1'b1"},
    )  # fmt: skip
    ran = icarus.simulate(
        output, log=tmp_path / "run.log", plusargs=("seed=1",), library="/lib/vpi.so",
        environment={"ONLY": "this"},
    )  # fmt: skip
    assert ran.code == 0
    assert ran.text == "ran\n"
    _, compiled = calls(tmp_path / "bin", "iverilog")
    expected = ["-g2012", "-Wall", "-s", "top", "-o", str(output), "-DLEVEL=1'b1", "one.sv"]
    assert compiled["words"][1:] == [*expected, "two.sv"]
    assert compiled["folder"] == str(tmp_path)
    (simulated,) = calls(tmp_path / "bin", "vvp")
    assert simulated["words"][1:] == ["-n", "-m", "/lib/vpi.so", str(output), "-none", "+seed=1"]
    assert simulated["environment"]["ONLY"] == "this"
    assert "HOME" not in simulated["environment"]
