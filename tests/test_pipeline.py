"""Steps are done when something they follow from has changed, and only then."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from behavgen import cell_place, pipeline
from behavgen.errors import TableError
from behavgen.files import files_named
from behavgen.freshness import RECORD_FILE
from behavgen.model_file import load_model
from behavgen.pipeline import CellPlace, emit_cell, fit_cell, report_cell, step_states
from behavgen.project import load_project
from behavgen.tables.read import read_tables
from tests.small_project import DELAY_ROWS, PROJECT_TEXT, write_small_project

ALL_CURRENT = {"fit": "current", "emit": "current", "check": "missing", "report": "current"}


def place_in(folder: Path) -> CellPlace:
    project = load_project(folder)
    return CellPlace(project=project, settings=project.cells[0])


def walk(folder: Path) -> CellPlace:
    """Take the cell from its tables to its page, without a check."""
    place = place_in(folder)
    report_cell(emit_cell(fit_cell(place)), None)
    return place


@pytest.fixture(scope="module")
def walked_once(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = write_small_project(tmp_path_factory.mktemp("walked"))
    walk(folder)
    return folder


@pytest.fixture
def walked(walked_once: Path, tmp_path: Path) -> Path:
    """A copy of a project all of whose steps are done."""
    folder = tmp_path / "project"
    for path in walked_once.rglob("*"):
        if path.is_file():
            copy = folder / path.relative_to(walked_once)
            copy.parent.mkdir(parents=True, exist_ok=True)
            copy.write_bytes(path.read_bytes())
    return folder


def test_nothing_is_there_at_first(tmp_path: Path) -> None:
    place = place_in(write_small_project(tmp_path))
    assert set(step_states(place).values()) == {"missing"}


def test_what_is_current_is_not_done_again(walked: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(*_: object, **__: object) -> None:
        raise AssertionError("a current step was done again")

    place = place_in(walked)
    assert step_states(place) == ALL_CURRENT
    monkeypatch.setattr(pipeline, "dump_model", refuse)
    fitted = fit_cell(place)
    emitted = emit_cell(fitted)
    assert not fitted.made
    assert not emitted.made
    assert not report_cell(emitted, None).made
    assert emitted.systemverilog.text == (place.folder / "latch.sv").read_text(encoding="utf-8")


def test_a_touched_but_unchanged_table_changes_nothing(walked: Path) -> None:
    os.utime(walked / "delay.csv", (0, 0))
    assert step_states(place_in(walked)) == ALL_CURRENT


def test_a_project_may_move(walked: Path, tmp_path: Path) -> None:
    walked.rename(tmp_path / "elsewhere")
    assert step_states(place_in(tmp_path / "elsewhere")) == ALL_CURRENT


@pytest.mark.parametrize(
    ("file", "old", "new"),
    [
        ("delay.csv", "1.0,1e-06,", "1.0,1.1e-06,"),
        ("noise.csv", "0,1000,500", "0,1000,501"),
        ("behavgen.toml", "invented latch", "another invented latch"),
        ("behavgen.toml", "[cells.latch]\n", '[cells.latch]\ndecides_on = "falling"\n'),
        ("behavgen.toml", "[cells.latch]\n", "[corners.hot]\ntemp = 125\n\n[cells.latch]\n"),
    ],
)
def test_all_that_follows_from_a_changed_input_is_stale(
    walked: Path, file: str, old: str, new: str
) -> None:
    text = (walked / file).read_text(encoding="utf-8")
    assert old in text
    (walked / file).write_text(text.replace(old, new, 1), encoding="utf-8")
    states = step_states(place_in(walked))
    assert states == {"fit": "stale", "emit": "stale", "check": "missing", "report": "stale"}


def test_a_changed_program_makes_everything_stale(
    walked: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(cell_place, "code_version", lambda: "another")
    assert step_states(place_in(walked))["fit"] == "stale"


def test_a_new_file_under_a_glob_is_noticed(tmp_path: Path) -> None:
    project = PROJECT_TEXT.replace("delay.csv", "delay*.csv")
    folder = write_small_project(tmp_path, project=project)
    place = walk(folder)
    assert step_states(place)["fit"] == "current"
    more = [row.replace("1.0,", "1.1,") for row in DELAY_ROWS if not row.startswith("1.2")]
    (folder / "delay_more.csv").write_text("\n".join(more) + "\n", encoding="utf-8")
    assert step_states(place)["fit"] == "stale"
    assert fit_cell(place).model.sources[1].file == "delay_more.csv"


def test_an_edited_result_is_written_anew(walked: Path) -> None:
    place = place_in(walked)
    file = place.folder / "latch.sv"
    whole = file.read_text(encoding="utf-8")
    file.write_text(whole + "// mine\n", encoding="utf-8")
    assert step_states(place)["emit"] == "stale"
    assert emit_cell(fit_cell(place)).made
    assert file.read_text(encoding="utf-8") == whole


def test_a_deleted_result_is_missing_and_made_again(walked: Path) -> None:
    place = place_in(walked)
    place.report_file.unlink()
    assert step_states(place)["report"] == "missing"
    assert report_cell(emit_cell(fit_cell(place)), None).made
    assert place.report_file.is_file()


@pytest.mark.parametrize("content", ["", "{", "[]", '{"format": 99}', '{"format": 1, "steps": 3}'])
def test_an_unreadable_record_has_noted_nothing(walked: Path, content: str) -> None:
    place = place_in(walked)
    (place.folder / RECORD_FILE).write_text(content, encoding="utf-8")
    assert set(step_states(place).values()) == {"missing"}


def test_the_same_inputs_give_the_same_bytes(walked: Path, tmp_path: Path) -> None:
    again = walk(write_small_project(tmp_path / "again"))
    for name in ("latch.model.json", "latch.sv", "latch.va", "report.html"):
        there = place_in(walked).folder / name
        assert (again.folder / name).read_bytes() == there.read_bytes(), name


def test_a_model_read_back_is_the_model_that_was_fitted(tmp_path: Path) -> None:
    fitted = fit_cell(place_in(write_small_project(tmp_path)))
    assert fitted.made
    assert load_model(fitted.place.model_file) == fitted.model


def in_processes(*names: str) -> tuple[str, ...]:
    """Return the delay table with each of its rows in each of the processes."""
    header, *rows = DELAY_ROWS
    return (f"process,{header}", *(f"{name},{row}" for name in names for row in rows))


def test_process_codes_stay_when_the_table_is_reordered(tmp_path: Path) -> None:
    def codes_of(*names: str) -> dict[str, int]:
        place = place_in(write_small_project(tmp_path, delay=in_processes(*names)))
        return {process.name: process.code for process in fit_cell(place).model.processes}

    assert codes_of("typ", "slow") == {"typ": 0, "slow": 1}
    assert codes_of("slow", "typ") == {"typ": 0, "slow": 1}
    assert codes_of("fast", "slow", "typ") == {"typ": 0, "slow": 1, "fast": 2}
    assert codes_of("fast", "slow") == {"slow": 1, "fast": 2}


def test_declared_process_codes_win_over_those_of_an_old_model(tmp_path: Path) -> None:
    write_small_project(tmp_path, delay=in_processes("typ", "slow"))
    fit_cell(place_in(tmp_path))
    declared = PROJECT_TEXT.replace(
        "[cells.latch]\n", "[cells.latch]\nprocesses = { slow = 7, typ = 3 }\n"
    )
    place = place_in(
        write_small_project(tmp_path, project=declared, delay=in_processes("typ", "slow"))
    )
    codes = {process.name: process.code for process in fit_cell(place).model.processes}
    assert codes == {"typ": 3, "slow": 7}


def test_a_table_that_changes_while_it_is_read_is_told(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    place = place_in(write_small_project(tmp_path))

    def read_and_disturb(*given: object) -> object:
        tables = read_tables(*given)  # type: ignore[arg-type]
        with (tmp_path / "delay.csv").open("a", encoding="utf-8") as file:
            file.write("1.2,0.2,5e-11\n")
        return tables

    monkeypatch.setattr("behavgen.tables.read.read_tables", read_and_disturb)
    with pytest.raises(TableError, match="latch changed while they were read"):
        fit_cell(place)
    assert not place.model_file.exists()


def test_files_are_named_by_path_or_glob_and_sorted(tmp_path: Path) -> None:
    for name in ("b.csv", "a.csv", "c[1].csv", "deep/d.csv"):
        (tmp_path / name).parent.mkdir(exist_ok=True)
        (tmp_path / name).touch()

    def named(pattern: str) -> list[str]:
        return [file.relative_to(tmp_path).as_posix() for file in files_named(tmp_path, pattern)]

    assert named("?.csv") == ["a.csv", "b.csv"]
    assert named("c[1].csv") == ["c[1].csv"]
    assert named("**/d.csv") == ["deep/d.csv"]
    assert named(f"{tmp_path}/a.csv") == ["a.csv"]
    assert named("deep") == []
    assert named("none*.csv") == []
