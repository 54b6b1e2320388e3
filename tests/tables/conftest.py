"""A project of one cell, written into a temporary folder and read."""

from __future__ import annotations

from pathlib import Path

import pytest

from behavgen.errors import TableError
from behavgen.project import load_project
from behavgen.tables.read import read_tables

LATCH_130N = Path(__file__).parents[1] / "data" / "latch_130n"


@pytest.fixture
def read(tmp_path):
    """Return a function that reads cell ``a`` from the text of tables and of the project.

    `tables` maps file names to contents; `entries` are the lines of each table's entry,
    `more` is the rest of the project file.
    """

    def from_texts(tables, *entries, more=""):
        for name, content in tables.items():
            file = tmp_path / name
            file.parent.mkdir(parents=True, exist_ok=True)
            file.write_bytes(content if isinstance(content, bytes) else content.encode())
        blocks = [f"[[cells.a.tables]]\n{entry}\n" for entry in entries]
        (tmp_path / "behavgen.toml").write_text("".join([*blocks, more]), encoding="utf-8")
        return read_tables(load_project(tmp_path), "a")

    return from_texts


@pytest.fixture
def faults(read):
    """Return a function that reads the same and returns its faults as texts."""

    def from_texts(*arguments, **keywords):
        with pytest.raises(TableError) as error:
            read(*arguments, **keywords)
        return [str(fault) for fault in error.value.faults]

    return from_texts


@pytest.fixture(scope="session")
def latch_130n():
    """Return the characterised latch as read from its files."""
    return read_tables(load_project(LATCH_130N), "latch_130n")
