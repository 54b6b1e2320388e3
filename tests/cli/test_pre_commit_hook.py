"""The hook that other repositories run before a commit does what it says."""

from __future__ import annotations

import re
from pathlib import Path

from tests.cli.commands import run
from tests.small_project import DELAY_ROWS, write_small_project

HOOKS = (Path(__file__).parents[2] / ".pre-commit-hooks.yaml").read_text(encoding="utf-8")


def value_of(key):
    return re.search(rf"^  {key}: (.*)$", HOOKS, flags=re.MULTILINE)[1]


def test_the_hook_refuses_a_wrong_cell_by_its_place(tmp_path, capsys):
    program, *words = value_of("entry").split()
    assert program == "behavgen"
    folder = write_small_project(tmp_path)
    assert run(capsys, "-C", folder, *words).exit_code == 0
    write_small_project(tmp_path, delay=(*DELAY_ROWS, "1.0,1e-3,fast"))
    ran = run(capsys, "-C", folder, *words)
    assert ran.exit_code == 3
    assert "delay.csv:28: delay: 'fast'" in ran.stderr


def test_the_hook_looks_at_projects_and_tables_and_nothing_else():
    wanted = re.compile(value_of("files"))
    assert wanted.search("chips/a/behavgen.toml")
    assert wanted.search("tables/delay.csv")
    assert wanted.search("t.parquet")
    assert not wanted.search("src/behavgen.toml.orig")
    assert not wanted.search("readme.md")
