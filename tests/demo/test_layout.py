"""The demo project is laid out whole, and never over somebody's own files."""

from __future__ import annotations

import tomllib

import pytest

from behavgen.demo import copy_demo
from behavgen.errors import ProjectError


def test_project_file_names_only_tables_that_are_there(tmp_path):
    project_file = copy_demo(tmp_path / "new" / "folder")
    project = tomllib.loads(project_file.read_text())
    assert list(project["cells"]) == ["sense_latch", "slicer"]
    for cell in project["cells"].values():
        for table in cell["tables"]:
            assert (project_file.parent / table["file"]).is_file()


def test_project_file_and_tables_say_that_they_are_invented(tmp_path):
    project_file = copy_demo(tmp_path)
    assert "invented" in project_file.read_text().splitlines()[0]
    assert "Invented" in (tmp_path / "tables" / "README.md").read_text().splitlines()[0]


def test_demo_may_be_laid_out_twice_in_one_folder(tmp_path):
    copy_demo(tmp_path)
    before = sorted(tmp_path.rglob("*"))
    copy_demo(tmp_path)
    assert sorted(tmp_path.rglob("*")) == before


def test_files_of_the_user_are_never_overwritten_and_all_are_named(tmp_path):
    (tmp_path / "behavgen.toml").write_text("[cells.mine]\n")
    mine = tmp_path / "tables" / "slicer" / "noise.csv"
    mine.parent.mkdir(parents=True)
    mine.write_text("mine\n")
    with pytest.raises(ProjectError) as caught:
        copy_demo(tmp_path)
    assert sorted(fault.file for fault in caught.value.faults) == sorted(
        [str(tmp_path / "behavgen.toml"), str(mine)]
    )
    assert mine.read_text() == "mine\n"
    assert not (tmp_path / "tables" / "sense_latch").exists()


def test_a_file_in_the_place_of_the_folder_is_a_fault(tmp_path):
    (tmp_path / "taken").write_text("")
    with pytest.raises(ProjectError, match="taken"):
        copy_demo(tmp_path / "taken")
