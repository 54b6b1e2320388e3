"""Benches see their own environment, and a results file is read as it was meant."""

import sys
from pathlib import Path

import pytest

from behavgen.simulators.cocotb_benches import bench_environment, read_outcomes, vpi_library

RESULTS = """<testsuites name="x"><testsuite name="m" tests="{tests}" failures="{failures}" errors="0">
<testcase classname="m" name="good"/>
<testcase classname="m" name="bad"><failure message="went &lt;wrong&gt;">trace</failure></testcase>
</testsuite></testsuites>"""  # noqa: E501


def environment(tmp_path):
    return bench_environment(
        modules=("test_one", "test_two"), folder=tmp_path, top="top",
        results=tmp_path / "results.xml", variables={"OWN": "1"},
    )  # fmt: skip


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("COCOTB_TEST_FILTER", "nothing"),
        ("COCOTB_MAX_FAILURES", "1"),
        ("GPI_EXTRA", "x.so"),
        ("PYGPI_USERS", "nobody"),
        ("PYTHONOPTIMIZE", "1"),
        ("PYTHONHOME", "/nowhere"),
        ("PYTHONWARNINGS", "error"),
        ("TESTCASE", "none"),
        ("COVERAGE", "1"),
    ],
)
def test_what_the_shell_says_to_python_and_cocotb_does_not_reach_them(
    name, value, tmp_path, monkeypatch
):
    monkeypatch.setenv(name, value)
    assert name not in environment(tmp_path)


def test_everything_else_does(tmp_path, monkeypatch):
    monkeypatch.setenv("LD_LIBRARY_PATH", "/some/where")
    monkeypatch.setenv("PYTHONHASHSEED", "77")
    found = environment(tmp_path)
    assert found["LD_LIBRARY_PATH"] == "/some/where"
    assert found["PYTHONHASHSEED"] == "0"
    assert found["OWN"] == "1"
    assert found["COCOTB_TEST_MODULES"] == "test_one,test_two"
    assert found["PYGPI_PYTHON_BIN"] == sys.executable
    paths = found["PYTHONPATH"].split(":")
    assert paths[0] == str(tmp_path)
    assert all(Path(path).is_absolute() for path in paths)


def test_the_library_exists():
    assert Path(vpi_library("icarus")).is_file()


def test_failures_keep_their_message(tmp_path):
    path = tmp_path / "results.xml"
    path.write_text(RESULTS.format(tests=2, failures=1))
    good, bad = read_outcomes(path)
    assert (good.module, good.name, good.message) == ("m", "good", "")
    assert bad.message == "went <wrong>"


def test_a_file_that_contradicts_itself_is_a_failure(tmp_path):
    path = tmp_path / "results.xml"
    path.write_text(RESULTS.format(tests=2, failures=2))
    assert "counts 2 tests and 2 failures" in read_outcomes(path)[-1].message


@pytest.mark.parametrize("text", [None, "", "<testsuites>"])
def test_a_missing_or_torn_file_has_no_outcomes(text, tmp_path):
    path = tmp_path / "results.xml"
    if text is not None:
        path.write_text(text)
    assert read_outcomes(path) == ()
