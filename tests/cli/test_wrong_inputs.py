"""Every mistake gets one clear message and the right exit code, and leaves nothing behind."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
from pathlib import Path

import pytest

from tests.cli.commands import Ran, run
from tests.small_project import DELAY_ROWS, NOISE_ROWS, PROJECT_TEXT, write_small_project

USAGE, TABLES = 2, 3


def fit(capsys: pytest.CaptureFixture[str], folder: Path) -> Ran:
    """Fit a faulty project and see that nothing was written."""
    ran = run(capsys, "-C", folder, "fit")
    assert not (folder / "build").exists()
    return ran


def with_row(rows: tuple[str, ...], line: int, row: str) -> tuple[str, ...]:
    """Replace the row on a line of the file; the header is line 1."""
    return (*rows[: line - 1], row, *rows[line:])


@pytest.mark.parametrize(
    ("row", "column", "words"),
    [
        ("1.0,1e-6,fast", "delay", ["'fast'", "number"]),
        ("1.0,1e-6,-3e-11", "delay", ["-3e-11"]),
        ("1.0,nan,3e-11", "overdrive", ["nan"]),
        ("1.0,1e-6,inf", "delay", ["inf"]),
        ('1.0,1e-6,"3,1e-11"', "delay", ["3,1e-11"]),
    ],
)
def test_a_cell_that_is_no_plausible_number(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], row: str, column: str, words: list[str]
) -> None:
    ran = fit(capsys, write_small_project(tmp_path, delay=with_row(DELAY_ROWS, 5, row)))
    assert ran.exit_code == TABLES
    assert ran.complaint.startswith(f"delay.csv:5: {column}: ")
    for word in words:
        assert word in ran.complaint


def test_more_ones_than_trials(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    rows = with_row(NOISE_ROWS, 4, "-1e-3,1000,1001")
    ran = fit(capsys, write_small_project(tmp_path, noise=rows))
    assert ran.exit_code == TABLES
    assert ran.complaint.startswith("noise.csv:4: ones: ")
    assert "1001" in ran.complaint


def test_a_missing_column_lists_the_headers(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    rows = ("vdd,overdrive,dely", *DELAY_ROWS[1:])
    ran = fit(capsys, write_small_project(tmp_path, delay=rows))
    assert ran.exit_code == TABLES
    assert ran.stderr.startswith("delay.csv")
    assert "delay" in ran.stderr
    assert "vdd, overdrive, dely" in ran.stderr


def test_an_unknown_unit(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    rows = ("vdd,overdrive,delay [parsec]", *DELAY_ROWS[1:])
    ran = fit(capsys, write_small_project(tmp_path, delay=rows))
    assert ran.exit_code in (USAGE, TABLES)
    assert "parsec" in ran.complaint


def test_an_empty_file(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = write_small_project(tmp_path)
    (folder / "delay.csv").write_bytes(b"")
    ran = fit(capsys, folder)
    assert ran.exit_code == TABLES
    assert ran.complaint.startswith("delay.csv")
    assert "empty" in ran.complaint


def test_a_table_that_is_not_there(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = write_small_project(tmp_path)
    (folder / "noise.csv").rename(folder / "nois.csv")
    ran = fit(capsys, folder)
    assert ran.exit_code == TABLES
    assert "noise.csv" in ran.complaint
    assert "did you mean 'nois.csv'?" in ran.complaint


def test_a_process_that_the_project_does_not_know(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    project = PROJECT_TEXT.replace("[cells.latch]\n", "[cells.latch]\nprocesses = { typ = 0 }\n")
    rows = (f"process,{DELAY_ROWS[0]}", *(f"tpy,{row}" for row in DELAY_ROWS[1:]))
    ran = fit(capsys, write_small_project(tmp_path, project=project, delay=rows))
    assert ran.exit_code == TABLES
    assert "'tpy'" in ran.stderr
    assert "typ" in ran.stderr


def test_all_faults_of_all_tables_at_once(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    folder = write_small_project(
        tmp_path,
        delay=with_row(with_row(DELAY_ROWS, 3, "1.0,x,1e-10"), 9, "1.0,1e-5,y"),
        noise=with_row(NOISE_ROWS, 2, "-2e-3,10,11"),
    )
    ran = fit(capsys, folder)
    places = [line.split(": ")[:2] for line in ran.stderr.splitlines()]
    assert sorted(places) == [
        ["delay.csv:3", "overdrive"], ["delay.csv:9", "delay"], ["noise.csv:2", "ones"]
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("project", "words"),
    [
        ("[cells.latch\n", ["behavgen.toml:1", "TOML"]),
        ("", ["cell"]),
        (PROJECT_TEXT + '\n[cells.latch]\nin_reset = "low"\n', ["latch", "twice"]),
        (PROJECT_TEXT.replace("cells.latch", "cells.module"), ["'module'", "keyword"]),
        (PROJECT_TEXT.replace("cells.latch", "cells.9lives"), ["9lives"]),
        (PROJECT_TEXT.replace('"delay"', '"dealy"'), ["'dealy'", "did you mean 'delay'?"]),
        (PROJECT_TEXT.replace("description", "descripton"), ["did you mean 'description'?"]),
        (PROJECT_TEXT.replace('description = "invented latch"', 'in_reset = "up"'), ["'up'"]),
    ],
)
def test_a_faulty_project_file(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], project: str, words: list[str]
) -> None:
    ran = fit(capsys, write_small_project(tmp_path, project=project))
    assert ran.exit_code == USAGE
    assert ran.stderr.startswith("behavgen.toml")
    for word in words:
        assert word in ran.stderr


def test_no_project_at_all(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "-C", tmp_path, "fit")
    assert ran.exit_code == USAGE
    assert "no behavgen.toml" in ran.complaint
    assert "behavgen new" in ran.complaint


def test_a_folder_that_is_not_there(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "-C", tmp_path / "nowhere")
    assert ran.exit_code == USAGE
    assert "nowhere" in ran.complaint


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (["fti"], "no command 'fti', did you mean 'fit'?; see: behavgen --help"),
        (["zzz"], "no command 'zzz'; see: behavgen --help"),
        (
            ["fit", "--strct"],
            "behavgen fit has no option '--strct', did you mean '--strict'?; "
            "see: behavgen fit --help",
        ),
        (["check", "--mod=x.sv"], "behavgen check has no option '--mod', did you mean '--model'?"),
        (["fit", "--stric"], "did you mean '--strict'?"),
        (["--vers"], "behavgen has no option '--vers', did you mean '--version'?"),
        (["fit", "--jobs", "none"], "--jobs: 'none', a whole number from 1 is needed"),
        (["fit", "--jobs", "0"], "--jobs: '0', a whole number from 1 is needed"),
        (["fit", "--color", "blue"], "--color"),
        (["fit", "-C"], "-C"),
        (["fit", "-q", "-v"], "not allowed with"),
        (["new"], "DIR"),
        (["tools", "latch"], "behavgen tools has no argument 'latch'"),
    ],
)
def test_a_command_line_that_is_not_understood(
    capsys: pytest.CaptureFixture[str], words: list[str], told: str
) -> None:
    ran = run(capsys, *words)
    assert ran.exit_code == USAGE
    assert told in ran.complaint
    assert ran.stdout == ""


def test_unknown_cells(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    ran = run(capsys, "-C", write_small_project(tmp_path), "fit", "lacht", "latch", "other")
    assert ran.exit_code == USAGE
    first, second = ran.stderr.splitlines()
    assert first == "behavgen.toml: no cell 'lacht', did you mean 'latch'?; cells: latch"
    assert second == "behavgen.toml: no cell 'other'; cells: latch"
    assert not (tmp_path / "build").exists()


def test_a_usage_error_is_given_as_json_where_that_is_asked_for(
    capsys: pytest.CaptureFixture[str],
) -> None:
    ran = run(capsys, "fit", "--josn", "--json")
    assert ran.json["exit_code"] == ran.exit_code == USAGE
    assert ran.json["failed_by"] == ["usage"]
    assert ran.json["faults"][0]["what"].endswith("did you mean '--json'?")


def test_an_output_folder_that_cannot_be_written(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    folder = write_small_project(tmp_path)
    (folder / "build").write_text("a file where the folder should be", encoding="utf-8")
    ran = run(capsys, "-C", folder, "fit")
    assert ran.exit_code == USAGE
    assert "cannot be written" in ran.complaint
    assert sorted(path.name for path in folder.iterdir()) == [
        "behavgen.toml", "build", "delay.csv", "noise.csv"
    ]  # fmt: skip


def test_a_disk_that_fills_up_leaves_the_old_result(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    folder = write_small_project(tmp_path)
    assert run(capsys, "-C", folder, "-q", "fit").exit_code == 0
    before = {path: path.read_bytes() for path in folder.rglob("*") if path.is_file()}
    write_small_project(tmp_path, delay=DELAY_ROWS[:-1])
    before[folder / "delay.csv"] = (folder / "delay.csv").read_bytes()

    def full(self: Path, data: bytes) -> int:
        with self.open("wb") as file:
            file.write(data[:100])
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(Path, "write_bytes", full)
    ran = run(capsys, "-C", folder, "fit")
    assert ran.exit_code == USAGE
    assert "No space left on device" in ran.complaint
    assert {path: path.read_bytes() for path in folder.rglob("*") if path.is_file()} == before


def test_a_refused_fit(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    separated = ("vdiff,trials,ones", "-1e-3,1000,0", "1e-3,1000,1000")
    ran = fit(capsys, write_small_project(tmp_path, noise=separated))
    assert ran.exit_code == 5
    assert "noise" in ran.stderr


def test_a_bug_is_told_in_two_lines(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.delenv("BEHAVGEN_DEBUG", raising=False)
    monkeypatch.setattr("behavgen.cli.cells.load_project", lambda _: 1 / 0)
    ran = run(capsys, "-C", tmp_path, "fit")
    assert ran.exit_code == 70
    assert ran.stderr.splitlines() == [
        "behavgen: this is a bug: ZeroDivisionError: division by zero",
        "please report it; -v shows where it happened",
    ]


def test_interrupting_a_fit(tmp_path: Path) -> None:
    folder = write_small_project(tmp_path)
    script = (
        "import sys, time; import behavgen.cli.fit; from behavgen.__main__ import main;"
        "behavgen.cli.fit.fit_cell = lambda _: (print('busy', flush=True), time.sleep(60));"
        "sys.exit(main())"
    )
    process = subprocess.Popen(
        [sys.executable, "-c", script, "-C", str(folder), "fit"],
        stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True,
    )  # fmt: skip
    assert process.stdout is not None
    assert process.stdout.readline() == "busy\n"
    os.kill(process.pid, signal.SIGINT)
    stdout, stderr = process.communicate(timeout=30)
    assert process.returncode == 130
    assert stdout == ""
    assert stderr == "behavgen: interrupted; no file is half-written\n"
