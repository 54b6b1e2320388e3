"""One verdict, one next step, one exit code; with --json one object and nothing else."""

from __future__ import annotations

import pytest

from behavgen.cli.parser import Options
from behavgen.cli.terminal import Terminal
from behavgen.cli.verdict import Outcome, finish
from behavgen.errors import (
    BehavgenError,
    Fault,
    FitError,
    ModelFileError,
    ProjectError,
    TableError,
    ToolError,
)
from tests.cli.commands import Ran


def ended(capsys: pytest.CaptureFixture[str], outcome: Outcome, **options: object) -> Ran:
    asked = Options(command="check", **options)
    exit_code = finish(outcome, asked, Terminal(asked))
    printed = capsys.readouterr()
    return Ran(exit_code, printed.out, printed.err)


def test_all_went_well(capsys: pytest.CaptureFixture[str]) -> None:
    ran = ended(capsys, Outcome(said="2 cells fitted", next_step="behavgen emit"))
    assert ran == Ran(0, "OK  2 cells fitted.  Next: behavgen emit\n", "")


@pytest.mark.parametrize(
    ("errors", "exit_code", "failed_by"),
    [
        ([ProjectError("x")], 2, ["usage"]),
        ([ModelFileError("x")], 2, ["usage"]),
        ([TableError("x")], 3, ["tables"]),
        ([ToolError("x")], 4, ["tools"]),
        ([FitError("x")], 5, ["fit"]),
        ([FitError("x"), TableError("y"), ToolError("z")], 3, ["fit", "tables", "tools"]),
    ],
)
def test_exit_codes_of_errors(
    capsys: pytest.CaptureFixture[str],
    errors: list[BehavgenError],
    exit_code: int,
    failed_by: list[str],
) -> None:
    ran = ended(capsys, Outcome(errors=tuple(errors)), json=True)
    assert ran.exit_code == ran.json["exit_code"] == exit_code
    assert ran.json["failed_by"] == failed_by
    assert ran.json["ok"] is False


def test_a_disagreement_is_a_verdict(capsys: pytest.CaptureFixture[str]) -> None:
    outcome = Outcome(said="1 cell checked", next_step="read on", disagreements=("latch",))
    assert ended(capsys, outcome) == Ran(1, "NOT OK  1 cell checked.  Next: read on\n", "")
    told = ended(capsys, outcome, json=True).json
    assert (told["failed_by"], told["disagreements"]) == (["disagreement"], ["latch"])


def test_warnings_fail_when_strict(capsys: pytest.CaptureFixture[str]) -> None:
    outcome = Outcome(said="1 cell fitted", warnings=("latch: few conditions",))
    assert ended(capsys, outcome) == Ran(0, "OK  1 cell fitted.\n", "")
    ran = ended(capsys, outcome, strict=True)
    assert ran.exit_code == 1
    assert ran.complaint == "warning: latch: few conditions"
    assert ran.stdout == "NOT OK  1 cell fitted; 1 warning fails under --strict.\n"
    assert ended(capsys, outcome, strict=True, json=True).json["failed_by"] == ["warnings"]


def test_a_fault_met_in_several_cells_is_told_once(capsys: pytest.CaptureFixture[str]) -> None:
    missing = Fault(what="no simulator found", allowed="install one")
    ran = ended(capsys, Outcome(errors=(ToolError(missing), ToolError(missing))))
    assert ran.complaint == "no simulator found; install one"


def test_the_caution_stands_under_results_and_nowhere_else(
    capsys: pytest.CaptureFixture[str],
) -> None:
    shown = ended(capsys, Outcome(said="1 cell fitted", shows_results=True))
    assert "sign-off" in shown.stdout
    assert "safety process" in " ".join(shown.stdout.split())
    assert "sign-off" not in ended(capsys, Outcome(said="project started")).stdout
    assert "sign-off" in ended(capsys, Outcome(shows_results=True), json=True).json["caution"]


def test_quiet_prints_the_verdict_alone(capsys: pytest.CaptureFixture[str]) -> None:
    outcome = Outcome(said="1 cell fitted", next_step="behavgen emit", shows_results=True)
    assert ended(capsys, outcome, quiet=True).stdout == "OK  1 cell fitted.  Next: behavgen emit\n"


def test_json_cannot_be_overruled_by_a_command(capsys: pytest.CaptureFixture[str]) -> None:
    outcome = Outcome(data={"exit_code": 9, "cells": {}})
    assert ended(capsys, outcome, json=True).json == {
        "format": 1, "command": "check", "ok": True, "exit_code": 0, "failed_by": [],
        "disagreements": [], "warnings": [], "faults": [], "said": "", "next": "", "cells": {},
    }  # fmt: skip
