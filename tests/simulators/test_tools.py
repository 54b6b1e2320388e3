"""The list of tools says what is there and how to get the rest."""

from behavgen.simulators.tools import list_tools
from tests.simulators.mock_tools import put_on_path


def test_needed_tools_come_first():
    needed = [tool.needed for tool in list_tools()]
    assert needed == sorted(needed, reverse=True)
    assert any(needed)


def test_a_missing_tool_says_how_to_get_it(tmp_path, monkeypatch):
    put_on_path(tmp_path, monkeypatch)
    icarus = next(tool for tool in list_tools() if tool.name == "Icarus Verilog")
    assert not icarus.found
    assert icarus.version == ""
    assert "iverilog" in icarus.problem
    assert "apt-get install iverilog" in icarus.how_to_get


def test_a_tool_that_is_there_states_its_version(tmp_path, monkeypatch):
    stated = "print('Icarus Verilog version 11.0 (stable) ()')"
    put_on_path(tmp_path, monkeypatch, iverilog=stated, vvp="")
    icarus = next(tool for tool in list_tools() if tool.name == "Icarus Verilog")
    assert icarus.found
    assert icarus.version == "Icarus Verilog 11.0 (stable)"
