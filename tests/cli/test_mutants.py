"""What came of mutants, as the command line tells it, keeps it and reads it back."""

from __future__ import annotations

from contextlib import nullcontext
from dataclasses import replace
from types import SimpleNamespace

import pytest

from behavgen.check.mutation.summary import (
    MUTANTS_FILE,
    Excused,
    MutationSummary,
    dump_summary,
    load_summary,
)
from behavgen.cli import mutants
from behavgen.cli.cells import CellResult
from behavgen.errors import ModelFileError
from behavgen.files import sha256_of_text
from behavgen.model_file import dump_model
from tests.example_models import minimal_model

MODEL = minimal_model()
FOUND = MutationSummary(
    cell="latch", model_sha256=sha256_of_text(dump_model(MODEL)), emitted_sha256="0" * 64,
    possible=1000, tried=7, caught={"constant": 4, "edge": 1},
    excused=(Excused(change="line 3, comparison: '<' becomes '<='", reason="at a tie"),) * 2,
    missed=(),
)  # fmt: skip


@pytest.fixture
def told(monkeypatch):
    """Return what is said of a summary."""

    def tell(found):
        monkeypatch.setattr(mutants, "fit_cell", lambda place: place)
        monkeypatch.setattr(mutants, "emit_cell", lambda fitted: fitted)
        monkeypatch.setattr(mutants, "mutate_cell", lambda emitted, **given: found)
        terminal = SimpleNamespace(progress=lambda text: nullcontext())
        options = SimpleNamespace(mutants=7, jobs=1)
        place = SimpleNamespace(name="latch")
        return mutants.mutated_too(place, CellResult(lines=["checked"]), options, terminal)

    return tell


def test_counts_and_reasons_are_told(told):
    result = told(FOUND)
    assert result.agrees
    text = "\n".join(result.lines)
    assert "7 of 1000 mutants tried: 5 caught, 2 that nobody can tell" in text
    assert "2: at a tie" in text
    assert result.data["mutants"]["caught"] == {"constant": 4, "edge": 1}
    assert "line 3" in "\n".join(result.more)


def test_a_missed_mutant_fails_the_check_and_is_named(told):
    result = told(replace(FOUND, missed=("line 9, operator: '+' becomes '-'",)))
    assert not result.agrees
    assert "line 9, operator" in "\n".join(result.lines)


def test_the_file_comes_back_for_its_model_alone(tmp_path):
    assert load_summary(tmp_path, MODEL) is None
    (tmp_path / "check").mkdir()
    (tmp_path / "check" / MUTANTS_FILE).write_text(dump_summary(FOUND), encoding="utf-8")
    assert load_summary(tmp_path, MODEL) == FOUND
    assert load_summary(tmp_path, replace(MODEL, generator="another")) is None


def test_a_broken_file_says_how_to_make_it_anew(tmp_path):
    (tmp_path / "check").mkdir()
    (tmp_path / "check" / MUTANTS_FILE).write_text("{}", encoding="utf-8")
    with pytest.raises(ModelFileError, match="behavgen check --mutants"):
        load_summary(tmp_path, MODEL)
