"""The comparison of languages, as the command line tells it."""

from __future__ import annotations

from contextlib import nullcontext
from dataclasses import replace
from types import SimpleNamespace

import pytest

from behavgen.__main__ import main
from behavgen.cli import languages
from behavgen.cli.cells import CellResult
from tests.cli.commands import run
from tests.report.test_language_table import ABSENT, COLUMN, COMPARISON
from tests.small_project import write_small_project


@pytest.fixture
def told(monkeypatch):
    """Return what is said of a comparison."""

    def tell(comparison):
        monkeypatch.setattr(languages, "fit_cell", lambda place: place)
        monkeypatch.setattr(languages, "emit_cell", lambda fitted: fitted)
        monkeypatch.setattr(languages, "compare_cell", lambda emitted, progress: comparison)
        terminal = SimpleNamespace(progress=lambda text: nullcontext())
        place = SimpleNamespace(name="latch")
        return languages.compared_too(place, CellResult(lines=["checked"]), terminal)

    return tell


def test_each_language_has_a_line_and_the_missing_one_says_how_to_get_it(told):
    result = told(COMPARISON)
    assert result.agrees
    text = "\n".join(result.lines)
    assert text.startswith("checked\n")
    assert "SystemVerilog: 2 of 2 decisions agree within one unit of time" in text
    assert "Verilog-A, continuous: VACASK not installed; see behavgen tools" in text
    assert result.data["languages"]["cell"] == "latch"


def test_a_language_that_disagrees_fails_the_check(told):
    wrong = replace(COLUMN, outcomes=(replace(COLUMN.outcomes[0], agrees=False),))
    result = told(replace(COMPARISON, columns=(wrong, ABSENT)))
    assert not result.agrees
    assert "0 of 1 decisions agree" in "\n".join(result.lines)


def test_every_emitted_file_has_words_of_its_own(tmp_path, capsys):
    folder = write_small_project(tmp_path)
    assert main(["-C", str(folder), "-q", "fit"]) == 0
    capsys.readouterr()
    shown = run(capsys, "-C", folder, "emit").stdout
    for words in ("Verilog-A, event-driven", "Verilog-A, continuous", "SystemVerilog, real ports"):
        assert shown.count(words) == 1
