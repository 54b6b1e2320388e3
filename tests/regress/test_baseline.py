"""The recorded models: diffable, whole or not at all, and never taken on trust."""

from __future__ import annotations

import json
import os
from pathlib import Path

import pytest

from behavgen.errors import ModelFileError, ProjectError
from behavgen.model_file import dump_model
from behavgen.regress.baseline import (
    INDEX_FILE,
    ToRecord,
    has_baseline,
    read_baseline,
    recorded_models,
    write_baseline,
)
from tests.example_models import full_model, minimal_model


@pytest.fixture
def models(tmp_path):
    """Two model files outside the baseline."""
    found = {}
    for model in (full_model(), minimal_model()):
        file = tmp_path / f"{model.cell.name}.model.json"
        file.write_bytes(dump_model(model).encode())
        found[model.cell.name] = ToRecord(
            file=file, tables={source.file: source.sha256 for source in model.sources}
        )
    return found


def contents(folder: Path) -> dict[str, bytes]:
    return {file.name: file.read_bytes() for file in folder.iterdir()}


def test_what_was_recorded_is_read_back(tmp_path, models):
    folder = tmp_path / "baseline"
    assert not has_baseline(folder)
    assert write_baseline(folder, models) == ("latch_full", "latch_minimal")
    assert [*recorded_models(folder)] == ["latch_full", "latch_minimal"]
    assert read_baseline(folder, "latch_full") == full_model()
    assert read_baseline(folder, "unknown") is None


def test_the_index_names_every_table_by_its_hash(tmp_path, models):
    write_baseline(tmp_path / "b", models)
    index = json.loads((tmp_path / "b" / INDEX_FILE).read_text())
    assert index["cells"]["latch_full"]["tables"] == {"delay.csv": "0" * 64, "noise.csv": "1" * 64}


def test_recording_the_same_again_changes_no_byte(tmp_path, models):
    folder = tmp_path / "baseline"
    write_baseline(folder, models)
    before = contents(folder)
    assert write_baseline(folder, dict(reversed(models.items()))) == ()
    assert contents(folder) == before


def test_cells_not_named_stay_or_are_forgotten(tmp_path, models):
    folder = tmp_path / "baseline"
    write_baseline(folder, models)
    one = {"latch_full": models["latch_full"]}
    assert write_baseline(folder, one, keep=frozenset({"latch_minimal"})) == ()
    assert [*recorded_models(folder)] == ["latch_full", "latch_minimal"]
    assert write_baseline(folder, one) == ("latch_minimal",)
    assert set(contents(folder)) == {INDEX_FILE, "latch_full.model.json"}


def test_all_cells_are_recorded_or_none(tmp_path, models):
    folder = tmp_path / "baseline"
    write_baseline(folder, models)
    before = contents(folder)
    models["latch_full"].file.write_text("changed")
    models["latch_minimal"].file.unlink()
    with pytest.raises(ProjectError):
        write_baseline(folder, models)
    assert contents(folder) == before


def test_a_rename_that_fails_midway_is_taken_back(tmp_path, models, monkeypatch):
    folder = tmp_path / "baseline"
    write_baseline(folder, models)
    before = contents(folder)
    models["latch_full"].file.write_text("changed")
    rename = Path.replace

    def full_disk(self, target):
        if self.name.startswith(f".{INDEX_FILE}.") and "before" not in self.name:
            raise OSError(28, os.strerror(28))
        return rename(self, target)

    monkeypatch.setattr(Path, "replace", full_disk)
    with pytest.raises(ProjectError, match="cannot be written"):
        write_baseline(folder, models)
    monkeypatch.undo()
    assert contents(folder) == before


def test_a_model_changed_behind_the_index_is_refused(tmp_path, models):
    folder = tmp_path / "baseline"
    write_baseline(folder, models)
    file = folder / "latch_minimal.model.json"
    file.write_text(file.read_text().replace("latch_minimal", "latch_other"))
    with pytest.raises(ModelFileError, match=r"not the model that was recorded; .*baseline"):
        read_baseline(folder, "latch_minimal")
    file.unlink()
    with pytest.raises(ModelFileError, match="missing"):
        read_baseline(folder, "latch_minimal")


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("{", "cannot be read as the index"),
        ("[]", "baseline format None"),
        ('{"format": 99, "cells": {}}', "baseline format 99"),
        ('{"format": 1, "cells": {"a": 3}}', "without the hash"),
    ],
)
def test_a_faulty_index_is_named_with_what_to_do(tmp_path, text, what):
    (tmp_path / INDEX_FILE).write_text(text)
    with pytest.raises(ModelFileError, match=what) as refused:
        recorded_models(tmp_path)
    assert "behavgen baseline" in str(refused.value)
