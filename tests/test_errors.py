"""Errors carry all faults, say where they are, and cost the exit code they promise."""

from __future__ import annotations

import pytest

from behavgen.errors import (
    BehavgenError,
    Fault,
    FitError,
    ModelFileError,
    ProjectError,
    TableError,
    ToolError,
)


@pytest.mark.parametrize(
    ("error", "code"),
    [(ProjectError, 2), (ModelFileError, 2), (TableError, 3), (ToolError, 4), (FitError, 5)],
)
def test_exit_codes_are_those_of_the_documentation(error, code):
    assert error("x").exit_code == code
    assert issubclass(error, BehavgenError)


@pytest.mark.parametrize(
    ("fault", "text"),
    [
        (Fault(what="w"), "w"),
        (Fault(what="w", allowed="a"), "w; a"),
        (Fault(what="w", file="d.csv"), "d.csv: w"),
        (Fault(what="w", allowed="a", file="d.csv", row=7, column="t"), "d.csv:7: t: w; a"),
        (Fault(what="w", column="t"), "t: w"),
    ],
)
def test_a_fault_reads_file_row_column_what_allowed(fault, text):
    assert str(fault) == text


def test_an_error_shows_every_fault_on_a_line_of_its_own():
    error = TableError(Fault(what="one", file="a.csv", row=2), "two")
    assert str(error).splitlines() == ["a.csv:2: one", "two"]
    assert error.faults[1] == Fault(what="two")
