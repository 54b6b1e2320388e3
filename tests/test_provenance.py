"""What the user says of a table travels with the model, and what does not go together is named."""

from __future__ import annotations

import pytest

from behavgen.errors import ProjectError
from behavgen.fit.fit import fit
from behavgen.model_file import dump_model, load_model
from behavgen.project import load_project
from behavgen.provenance import Provenance, mixed_provenance
from behavgen.tables.read import read_tables
from tests.small_project import PROJECT_TEXT, write_small_project

SAID = 'stage = "extracted"\nkit = "kit 2"\nnetlist_hash = "abc"\ndate = 2026-01-31\n'


def test_what_is_said_of_a_table_is_carried_into_the_model_file(tmp_path):
    text = PROJECT_TEXT.replace('file = "delay.csv"\n', f'file = "delay.csv"\n{SAID}')
    project = load_project(write_small_project(tmp_path, project=text))
    file = tmp_path / "latch.model.json"
    file.write_text(dump_model(fit(read_tables(project, "latch"))))
    said = {source.file: source.provenance for source in load_model(file).sources}
    assert said["noise.csv"] == Provenance()
    assert said["delay.csv"] == Provenance(
        stage="extracted", kit="kit 2", netlist_hash="abc", date="2026-01-31"
    )


def test_what_all_tables_share_is_said_once(tmp_path):
    text = '[defaults]\nkit = "kit 1"\ndate = "2026-01-31"\n\n' + PROJECT_TEXT.replace(
        'file = "noise.csv"\n', 'file = "noise.csv"\nkit = "kit 2"\n'
    )
    project = load_project(write_small_project(tmp_path, project=text))
    assert [table.provenance.kit for table in project.cells[0].tables] == ["kit 1", "kit 2"]
    assert {table.provenance.date for table in project.cells[0].tables} == {"2026-01-31"}


@pytest.mark.parametrize(
    ("line", "what"),
    [
        ('stage = "extrated"', "'extrated', did you mean 'extracted'?"),
        ('date = "31.1.2026"', "a date such as 2026-01-31 is needed"),
        ("kit = 3", "a text in quotes is needed"),
    ],
)
def test_a_faulty_word_is_told_with_its_line(tmp_path, line, what):
    text = PROJECT_TEXT + line + "\n"
    with pytest.raises(ProjectError) as refused:
        load_project(write_small_project(tmp_path, project=text))
    (fault,) = refused.value.faults
    assert what in str(fault)
    assert text.splitlines()[fault.row - 1] == line


def test_stages_kits_and_netlists_that_differ_are_named_and_dates_are_not():
    first = Provenance(stage="schematic", kit="1", date="2026-01-01")
    second = Provenance(stage="extracted", kit="1", date="2026-02-01")
    said = mixed_provenance([("a.csv", first), ("b.csv", second), ("c.csv", Provenance())])
    assert said == ("tables of different stages are mixed: schematic in a.csv; extracted in b.csv",)


def test_a_mixture_is_told_with_the_model(tmp_path):
    text = PROJECT_TEXT.replace('"delay"\n', '"delay"\nstage = "extracted"\n')
    text = text.replace('"noise"\n', '"noise"\nstage = "schematic"\n')
    project = load_project(write_small_project(tmp_path, project=text))
    notices = fit(read_tables(project, "latch")).notices
    assert any(text.startswith("Tables of different stages are mixed") for text in notices)


def test_rows_carry_their_file_and_line_into_the_model(tmp_path):
    project = load_project(write_small_project(tmp_path))
    model = fit(read_tables(project, "latch"))
    for points in model.points:
        rows = (tmp_path / points.files[0]).read_text().splitlines()
        for k in range(len(points.x)):
            file, line = points.place(k)
            cells = rows[line - 1].split(",")
            x = float(cells[1 if file == "delay.csv" else 0])
            assert points.x[k] == pytest.approx(x)
