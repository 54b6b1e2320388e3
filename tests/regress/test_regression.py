"""Verdicts are kept while nothing that they follow from has changed."""

from __future__ import annotations

import pytest

from behavgen.errors import ProjectError
from behavgen.project import load_project
from behavgen.regress import compare as comparing
from behavgen.regress.baseline import ToRecord, write_baseline
from behavgen.regress.regression import Regression
from behavgen.regress.runs import run_cells
from tests.small_project import PROJECT_TEXT, write_small_project


@pytest.fixture
def folder(tmp_path):
    """A recorded project."""
    write_small_project(tmp_path)
    project = load_project(tmp_path)
    for run in run_cells(project):
        file = project.out / run.name / f"{run.name}.model.json"
        write_baseline(project.baseline, {run.name: ToRecord(file=file, tables={})})
    return tmp_path


def judged(folder):
    project = load_project(folder)
    regression = Regression.of(project)
    return [regression.judge(run) for run in run_cells(project)]


@pytest.fixture
def comparisons(monkeypatch):
    """Count how often models are compared."""
    calls = []
    compare = comparing.compare

    def counted(old, new, *rest, **options):
        calls.append(new.cell.name)
        return compare(old, new, *rest, **options)

    monkeypatch.setattr(comparing, "compare", counted)
    return calls


def test_a_verdict_read_back_is_the_verdict(folder, comparisons):
    first = judged(folder)
    assert comparisons == ["latch"]
    assert judged(folder) == first
    assert comparisons == ["latch"]


@pytest.mark.parametrize(
    "text",
    ['\n[drift]\ndelay = "2 %"\n', '\n[[limits]]\nof = "tau"\nbelow = "1n"\n'],
)
def test_another_limit_is_judged_anew(folder, comparisons, text):
    judged(folder)
    write_small_project(folder, project=PROJECT_TEXT + text)
    judged(folder)
    assert comparisons == ["latch", "latch"]


def test_another_baseline_is_compared_anew(folder, comparisons):
    judged(folder)
    file = folder / "other.model.json"
    model = folder / "build" / "latch" / "latch.model.json"
    file.write_text(model.read_text().replace("invented", "another"))
    write_baseline(folder / "baseline", {"latch": ToRecord(file=file, tables={})})
    judged(folder)
    assert comparisons == ["latch", "latch"]


def test_a_damaged_verdict_is_made_anew(folder, comparisons):
    first = judged(folder)
    (folder / "build" / "latch" / "verdict.json").write_text("{}")
    assert judged(folder) == first
    assert comparisons == ["latch", "latch"]


def test_without_baseline_and_limits_there_is_nothing_to_judge_by(tmp_path):
    write_small_project(tmp_path)
    with pytest.raises(ProjectError, match="nothing to judge by"):
        Regression.of(load_project(tmp_path))
