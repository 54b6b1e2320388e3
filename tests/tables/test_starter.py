"""Starter projects: what is guessed must be readable as it stands, and marked."""

from __future__ import annotations

import shutil
import tomllib
from pathlib import Path

import pytest

from behavgen.errors import TableError
from behavgen.project import load_project
from behavgen.tables.guess import guess_quantity
from behavgen.tables.read import read_tables
from behavgen.tables.starter import starter_project

LATCH_130N = Path(__file__).parents[1] / "data" / "latch_130n"
QUANTITIES = (
    "offset",
    "noise",
    "delay",
    "window",
    "memory",
    "aperture",
    "energy",
    "kickback",
)


@pytest.mark.parametrize("quantity", QUANTITIES)
def test_the_quantity_of_each_table_of_the_latch_is_guessed(quantity):
    header = (LATCH_130N / f"{quantity}.csv").read_text().splitlines()[0]
    assert guess_quantity(header.split(",")).quantity == quantity


def test_a_starter_from_the_latchs_tables_reads_without_change_and_alike(tmp_path, latch_130n):
    files = [Path(shutil.copy(LATCH_130N / f"{name}.csv", tmp_path)) for name in QUANTITIES]
    (tmp_path / "behavgen.toml").write_text(starter_project(files, tmp_path))
    project = load_project(tmp_path)
    tables = read_tables(project, project.cells[0].name)
    assert sorted(table.quantity for table in project.cells[0].tables) == sorted(QUANTITIES)
    for name in ("offset_v",):
        assert getattr(tables.offset, name).tolist() == getattr(latch_130n.offset, name).tolist()
    assert tables.delay.overdrive_v.tolist() == latch_130n.delay.overdrive_v.tolist()
    assert tables.delay.offset_v.tolist() == latch_130n.delay.offset_v.tolist()
    assert tables.noise.ones.tolist() == latch_130n.noise.ones.tolist()
    assert tables.window.window_v.tolist() == latch_130n.window.window_v.tolist()
    assert tables.processes == ("tt", "ss", "ff")


def test_every_guess_is_marked(tmp_path):
    files = [LATCH_130N / "delay.csv", LATCH_130N / "noise.csv"]
    lines = starter_project(files, tmp_path).splitlines()
    guesses = [line for line in lines if line.startswith(("columns.", "quantity ="))]
    assert len(guesses) > 8
    assert all("# guessed" in line for line in guesses)


def test_paths_are_relative_to_the_project(tmp_path):
    table = tmp_path / "tables" / "delay.csv"
    table.parent.mkdir()
    table.write_text("overdrive,delay\n1m,1p\n")
    (tmp_path / "project").mkdir()
    content = tomllib.loads(starter_project([table], tmp_path / "project"))
    (cell,) = content["cells"].values()
    assert cell["tables"][0]["file"] == "../tables/delay.csv"


def test_a_missing_unit_is_pointed_at(tmp_path):
    (tmp_path / "t.csv").write_text("vod,delay_ps,temperature\n1,1,27\n")
    lines = starter_project([tmp_path / "t.csv"], tmp_path).splitlines()
    (overdrive,) = [line for line in lines if line.startswith("columns.overdrive")]
    assert "in V" in overdrive and "units.overdrive" in overdrive
    (delay,) = [line for line in lines if line.startswith("columns.delay")]
    assert "units" not in delay


@pytest.mark.parametrize(
    ("headers", "quantity", "columns"),
    [
        ("vdd,T_C,Vod (mV),tpd [ps]", "delay", {"temp": "T_C", "overdrive": "Vod (mV)"}),
        ("corner,vin_mV,n,ones", "noise", {"process": "corner", "trials": "n"}),
        ("mc_run,voff_mV", "offset", {"instance": "mc_run", "offset": "voff_mV"}),
        ("seed,offset_mV,supply", "offset", {"instance": "seed", "vdd": "supply"}),
        ("t_resolve_ps,width_uV", "window", {"window": "width_uV"}),
        ("t_res_ns,trials,unresolved,span_mV", "window", {"unresolved": "unresolved"}),
        ("reset_delay_ps,VDD", "reset", {"reset_delay": "reset_delay_ps", "vdd": "VDD"}),
        ("sigma_uV,temp", "noise", {"sigma": "sigma_uV"}),
        ("vdiff,bit", "noise", {"bit": "bit"}),
    ],
)
def test_other_peoples_headers(headers, quantity, columns):
    guess = guess_quantity(headers.split(","))
    assert guess.quantity == quantity
    assert columns.items() <= guess.columns.items()


def test_what_cannot_be_guessed_is_left_as_a_comment(tmp_path):
    (tmp_path / "odd.csv").write_text("foo,bar\n1,2\n")
    (tmp_path / "t.csv").write_text("overdrive,delay\n1m,1p\n")
    text = starter_project([tmp_path / "odd.csv", tmp_path / "t.csv"], tmp_path)
    assert "# odd.csv was not understood. Its headers: foo, bar" in text
    (cell,) = tomllib.loads(text)["cells"].values()
    assert [table["file"] for table in cell["tables"]] == ["t.csv"]


def test_files_that_cannot_be_read_are_all_named(tmp_path):
    (tmp_path / "empty.csv").write_text("")
    with pytest.raises(TableError) as error:
        starter_project([tmp_path / "empty.csv", tmp_path / "none.csv"], tmp_path)
    assert [fault.file for fault in error.value.faults] == ["empty.csv", "none.csv"]


def test_without_tables_the_starter_is_a_valid_example(tmp_path):
    text = starter_project([], tmp_path)
    (tmp_path / "behavgen.toml").write_text(text)
    (cell,) = load_project(tmp_path).cells
    assert "invented" in text
    assert cell.tables[0].quantity == "delay"
    rows = [line.removeprefix("#").strip() for line in text.splitlines() if line.startswith("#   ")]
    (tmp_path / "delay.csv").write_text("\n".join(rows[:4]))
    tables = read_tables(load_project(tmp_path), cell.name)
    assert tables.delay.delay_s.size == 3
    assert tables.delay.conditions.vcm_v.tolist() == [0.6] * 3
