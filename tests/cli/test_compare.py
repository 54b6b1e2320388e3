"""compare: any two model files of a cell, their interface and their numbers."""

from __future__ import annotations

from dataclasses import replace

import pytest

from behavgen.model import Process
from behavgen.model_file import dump_model
from behavgen.provenance import Provenance
from tests.cli.commands import run
from tests.example_models import full_model, minimal_model


def written(folder, model, name):
    file = folder / name
    file.write_text(dump_model(model), encoding="utf-8")
    return file


@pytest.fixture
def outside(tmp_path, monkeypatch):
    """A folder without a project, to be in."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def test_a_model_is_what_it_is(outside, capsys):
    file = written(outside, full_model(), "a.model.json")
    ran = run(capsys, "compare", file, file)
    assert ran.exit_code == 0
    assert "OK  nothing moved farther than it may." in ran.stdout
    assert "sign-off" in ran.stdout


def test_a_recoded_process_is_an_interface_break(outside, capsys):
    model = full_model()
    typ, _ = model.processes
    recoded = replace(model, processes=(typ, Process(name="slow", code=9)))
    old, new = written(outside, model, "a.json"), written(outside, recoded, "b.json")
    ran = run(capsys, "compare", old, new, "--json")
    assert ran.exit_code == 1
    assert ran.json["comparison"]["interface"] == [
        {"what": "code of process slow", "old": "3", "new": "9", "breaks": True}
    ]
    assert ran.json["said"] == "the interface breaks"


def test_stages_that_differ_are_named(outside, capsys):
    def of_stage(stage):
        model = full_model()
        sources = tuple(replace(s, provenance=Provenance(stage=stage)) for s in model.sources)
        return replace(model, sources=sources)

    old = written(outside, of_stage("schematic"), "a.json")
    new = written(outside, of_stage("extracted"), "b.json")
    ran = run(capsys, "compare", old, new)
    assert ran.exit_code == 0
    assert "stage: schematic -> extracted" in ran.stdout


def test_limits_of_a_project_here_apply(outside, capsys):
    # The examples carry no errors: whatever differs is more than noise.
    model = full_model()
    later = replace(model, sources=())
    surface = model.reset.surface
    shifted = tuple(
        replace(v, coefficients=(v.coefficients[0] + 0.02, *v.coefficients[1:]))
        for v in surface.variants
    )
    later = replace(later, reset=replace(model.reset, surface=replace(surface, variants=shifted)))
    old, new = written(outside, model, "a.json"), written(outside, later, "b.json")
    assert run(capsys, "compare", old, new).exit_code == 1
    (outside / "behavgen.toml").write_text(
        '[[cells.latch_full.tables]]\nquantity = "delay"\nfile = "d.csv"\n'
        '[drift]\nreset_delay = "3 %"\n'
    )
    ran = run(capsys, "compare", old, new, "--json")
    assert ran.exit_code == 0
    moved = ran.json["comparison"]["quantities"]["reset_delay"]
    assert moved["state"] == "within limit"
    # exp(0.02) - 1
    assert moved["drifts"][0]["share"] == pytest.approx(0.0202, abs=1e-4)


def test_two_different_cells_break_by_name(outside, capsys):
    old = written(outside, full_model(), "a.json")
    new = written(outside, minimal_model(), "b.json")
    ran = run(capsys, "compare", old, new)
    assert ran.exit_code == 1
    assert "module name: interface break: latch_full -> latch_minimal" in ran.stdout
    assert "noise: was characterised, is not now" in ran.stdout


@pytest.mark.parametrize(
    ("text", "what"),
    [
        ("no model", "cannot be read as a model file"),
        ('{"format": 99}', "model file format 99"),
        ('{"some": "json"}', "model file format None"),
        ('{"format": 1}', "Field required"),
    ],
)
def test_what_is_no_model_file_is_refused_by_name(outside, capsys, text, what):
    model = written(outside, full_model(), "a.json")
    other = outside / "b.json"
    other.write_text(text)
    ran = run(capsys, "compare", model, other)
    assert ran.exit_code == 2
    assert what in ran.stderr
    assert str(other) in ran.stderr
    missing = run(capsys, "compare", model, outside / "none.json")
    assert missing.exit_code == 2
    assert "none.json" in missing.complaint


def test_two_files_are_needed(outside, capsys):
    assert run(capsys, "compare", "one.json").exit_code == 2
