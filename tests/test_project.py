"""Project files: what is read, what is merged, and that every fault is found at its line."""

from __future__ import annotations

from pathlib import Path

import pytest

from behavgen.errors import ProjectError
from behavgen.project import find_project_file, load_project

TABLE = '[[cells.a.tables]]\nquantity = "delay"\nfile = "delay.csv"\n'
LATCH_130N = Path(__file__).parent / "data" / "latch_130n"


@pytest.fixture
def project(tmp_path):
    def write(text):
        (tmp_path / "behavgen.toml").write_text(text, encoding="utf-8")
        return load_project(tmp_path)

    return write


@pytest.fixture
def faults(project):
    """Return the (line, key, text) of every fault of a project file."""

    def collect(text):
        with pytest.raises(ProjectError) as error:
            project(text)
        found = error.value.faults
        assert all(fault.file == "behavgen.toml" for fault in found)
        return [(fault.row, fault.column, f"{fault.what}; {fault.allowed}") for fault in found]

    return collect


def test_defaults_of_a_minimal_project(project, tmp_path):
    read = project(TABLE)
    (cell,) = read.cells
    (table,) = cell.tables
    assert read.out == tmp_path / "build"
    assert (cell.name, cell.decides_on, cell.when_unresolved) == ("a", "rising", "x")
    assert cell.time_precision == "1fs"
    assert cell.process_codes == {}
    assert cell.reset_delay_s is None and cell.supply_off_v is None
    assert cell.pins == {
        "inp": "inp",
        "inn": "inn",
        "clk": "clk",
        "outp": "outp",
        "outn": "outn",
        "vdd": "vdd",
        "unresolved": "unresolved",
        "enable": None,
        "vss": "vss",
    }
    assert (table.quantity, table.file, table.line) == ("delay", "delay.csv", 1)


def test_everything_a_cell_may_say(project):
    read = project(
        '[project]\nout = "results"\n'
        '[cells.a]\ndescription = "d"\ndecides_on = "falling"\nin_reset = "hold"\n'
        'when_unresolved = "coin"\nprocesses = { tt = 3, ss = 1 }\nreset_delay = "25p"\n'
        'supply_off = "0.6"\ntime_precision = "1ps"\n'
        'pins = { inp = "vip", vdd = false, enable = true, outn = "qb" }\n'
        + TABLE
        + "[corners.hot]\nprocess = 'ss'\ntemp = 125\nvdd = 1.62\n[corners.k]\ntemp = '300 K'\n"
    )
    (cell,) = read.cells
    assert (cell.decides_on, cell.in_reset, cell.when_unresolved) == ("falling", "hold", "coin")
    assert cell.process_codes == {"tt": 3, "ss": 1}
    assert (cell.reset_delay_s, cell.supply_off_v) == (25e-12, 0.6)
    assert cell.pins["inp"] == "vip" and cell.pins["vdd"] is None
    assert cell.pins["enable"] == "enable" and cell.pins["outn"] == "qb"
    hot, kelvin = read.corners
    assert (hot.process, hot.vdd_v, hot.vcm_v) == ("ss", 1.62, None)
    assert hot.temperature_k == pytest.approx(398.15)
    assert kelvin.temperature_k == 300.0


def test_a_tables_own_entry_wins_over_the_defaults(project):
    read = project(
        '[defaults]\ncolumns = { vdd = "vdd_V", temp = "temp_C", ones = "n1" }\n'
        'units = { delay = "ps", vdd = "mV" }\nat = { vcm = 0.9, process = "tt" }\n'
        'failed = ["x"]\nmeasured = "shared"\nwhere = { circuit = "A1", kind = "pre" }\n'
        + TABLE
        + 'columns = { vdd = "supply", delay = "d" }\nunits = { vdd = "V" }\n'
        'at = { temp = 27, vcm = 1.1 }\nfailed = ["y"]\nwhere = { circuit = ["A2", 7] }\n'
        + TABLE
        + 'columns = { vcm = "cm" }\nmeasured = "shared"\n'
    )
    first, second = read.cells[0].tables
    assert first.columns == {"vdd": "supply", "delay": "d"}
    assert first.default_columns == frozenset()
    assert first.at == {"temp": 27, "vcm": 1.1, "process": "tt"}
    assert first.default_at == {"process"}
    assert first.units == {"delay": "ps", "vdd": "V"}
    assert (first.failed, first.measured) == (("y",), "shared")
    assert first.where == {"circuit": ("A2", 7), "kind": ("pre",)}
    assert second.columns == {"vdd": "vdd_V", "temp": "temp_C", "vcm": "cm"}
    assert second.default_columns == {"vdd", "temp"}
    assert second.at == {"process": "tt"}
    assert second.failed == ("x",)


def test_a_project_is_found_upward_from_a_folder(tmp_path, monkeypatch):
    (tmp_path / "behavgen.toml").write_text(TABLE)
    below = tmp_path / "some" / "where"
    below.mkdir(parents=True)
    assert find_project_file(below) == tmp_path / "behavgen.toml"
    monkeypatch.chdir(below)
    assert load_project(Path()).file == tmp_path / "behavgen.toml"


def test_a_project_may_have_another_name_when_it_is_given_as_a_file(tmp_path):
    file = tmp_path / "other.toml"
    file.write_text(TABLE)
    assert load_project(file).file == file


def test_where_there_is_no_project_the_command_that_starts_one_is_named(tmp_path):
    with pytest.raises(ProjectError, match="behavgen new"):
        load_project(tmp_path)
    with pytest.raises(ProjectError, match="no such file or folder"):
        load_project(tmp_path / "nowhere")


ALL_AT_ONCE = """\
[project]
oot = "x"
[defaults]
columns = { vddd = "x" }
failed = [""]
[cells.module]
decides_on = "risng"
reset_delay = "25q"
supply_off = -1
processes = { tt = 0, ss = 0, ff = -1, sf = "1" }
pins = { inp = "wire", inn = "q", outp = "q", clk = false, enable = "idt", foo = "x", vdd = 1 }
[[cells.module.tables]]
quantity = "dealy"
fil = "x"
[[cells.module.tables]]
quantity = "delay"
file = "x.csv"
columns = { overdive = "x", vdd = 3 }
where = { x = [], y = true }
at = { vdd = "x", temp = -300, process = "sx", corner = "c" }
units = { process = "V", delay = "pss" }
[cells.b]
[cells.B]
tables = 3
[corners.x]
temp = "-300"
tmp = 1
"""

EXPECTED = [
    (2, "project.oot", "did you mean 'out'"),
    (4, "defaults.columns.vddd", "did you mean 'vdd'"),
    (5, "defaults.failed[0]", "empty text"),
    (6, "cells.module", "SystemVerilog keyword"),
    (7, "cells.module.decides_on", "did you mean 'rising'"),
    (8, "cells.module.reset_delay", "'25q' is not a number"),
    (9, "cells.module.supply_off", "at least 0"),
    (10, "cells.module.processes.sf", "a whole number"),
    (10, "cells.module.processes.ss", "code 0 is that of 'tt'"),
    (10, "cells.module.processes.ff", "code -1"),
    (11, "cells.module.pins.inp", "SystemVerilog keyword"),
    (11, "cells.module.pins.outp", "names 'inn' too"),
    (11, "cells.module.pins.clk", "cannot be left out"),
    (11, "cells.module.pins.enable", "Verilog-A keyword"),
    (11, "cells.module.pins.foo", "no pin 'foo'"),
    (11, "cells.module.pins.vdd", "false to leave the pin out"),
    (12, "cells.module.tables[0].file", "missing"),
    (13, "cells.module.tables[0].quantity", "did you mean 'delay'"),
    (14, "cells.module.tables[0].fil", "did you mean 'file'"),
    (18, "cells.module.tables[1].columns.vdd", "a text in quotes"),
    (18, "cells.module.tables[1].columns.overdive", "did you mean 'overdrive'"),
    (19, "cells.module.tables[1].where.x", "empty list"),
    (19, "cells.module.tables[1].where.y", "a text or a number"),
    (20, "cells.module.tables[1].at.vdd", "'x' is not a number"),
    (20, "cells.module.tables[1].at.temp", "absolute zero"),
    (20, "cells.module.tables[1].at.process", "no process 'sx'"),
    (20, "cells.module.tables[1].at.corner", "no corner 'c'"),
    (21, "cells.module.tables[1].units.process", "holds names"),
    (21, "cells.module.tables[1].units.delay", "unknown unit 'pss'"),
    (22, "cells.b", "no tables"),
    (23, "cells.B", "in capitals only"),
    (24, "cells.B.tables", "a list is needed"),
    (26, "corners.x.temp", "above 0"),
    (27, "corners.x.tmp", "did you mean 'temp'"),
]


def test_all_faults_are_reported_at_once_each_at_its_line_and_nothing_else(faults):
    found = faults(ALL_AT_ONCE)
    assert sorted(row_and_key[:2] for row_and_key in found) == sorted(e[:2] for e in EXPECTED)
    for row, key, words in EXPECTED:
        assert any(words in text for r, k, text in found if (r, k) == (row, key)), (row, key)


@pytest.mark.parametrize(
    ("text", "row", "key", "words"),
    [
        ("", None, "cells", "no cell"),
        ("cells = 3\n", 1, "cells", "a table is needed"),
        ("[cels.a]\n", 1, "cels", "did you mean 'cells'"),
        ("[cells.a]\nx = \n", 2, "", "not valid TOML"),
        (f"{TABLE}[cells.b]\n[cells.b]\n", 5, "cells.b", "given twice"),
        (f"[cells.a]\nin_reset='low'\nin_reset='low'\n{TABLE}", 3, "in_reset", "given twice"),
        (f"[cells.2a]\n{TABLE.replace('.a.', '.2a.')}", 1, "cells.2a", "no identifier"),
        (
            f"{TABLE}columns.vdd = 'v'\nat.vdd = 1\n",
            5,
            "cells.a.tables[0].at.vdd",
            "one of the two",
        ),
        (
            f"{TABLE}[cells.a_event]\n{TABLE.replace('.a.', '.a_event.')}",
            4,
            "cells.a_event",
            "a module that is written for the cell 'a'",
        ),
        (
            f"{TABLE}[cells.A_nettype]\n{TABLE.replace('.a.', '.A_nettype.')}",
            4,
            "cells.A_nettype",
            "a module that is written for the cell 'a'",
        ),
        (f"{TABLE}units.vdd = 'ps'\n", 4, "cells.a.tables[0].units.vdd", "unknown unit"),
        (f"{TABLE}at.corner = 'hot'\n", 4, "cells.a.tables[0].at.corner", "[corners.hot]"),
        (f"[cells.a]\npins.inp = 'SEED'\n{TABLE}", 2, "cells.a.pins.inp", "taken"),
        (f"[cells.a]\npins.vdd = 'vss'\n{TABLE}", 2, "cells.a.pins.vdd", "names 'vss' too"),
    ],
)
def test_single_faults(faults, text, row, key, words):
    found = faults(text)
    assert any((r, k) == (row, key) and words in said for r, k, said in found), found


def test_delay_and_window_must_be_measured_alike(faults):
    window = TABLE.replace("delay", "window")
    found = faults(f"{TABLE}measured = 'x'\n{window}measured = 'y'\n")
    assert [(row, key) for row, key, _ in found] == [(8, "cells.a.tables[1].measured")]


def test_a_file_that_is_not_utf8_is_named_with_its_line(tmp_path):
    (tmp_path / "behavgen.toml").write_bytes(b"[cells.a]\n# \xb5\n")
    with pytest.raises(ProjectError, match=r"behavgen\.toml:2: not UTF-8"):
        load_project(tmp_path)


def test_a_byte_order_mark_and_carriage_returns_are_fine(tmp_path):
    text = b"\xef\xbb\xbf" + TABLE.replace("\n", "\r\n").encode()
    (tmp_path / "behavgen.toml").write_bytes(text)
    assert load_project(tmp_path).cells[0].name == "a"


def test_an_unreadable_file_is_a_fault(tmp_path, monkeypatch):
    (tmp_path / "behavgen.toml").write_text(TABLE)

    def refuse(self):
        raise PermissionError(13, "Permission denied")

    monkeypatch.setattr(Path, "read_bytes", refuse)
    with pytest.raises(ProjectError, match="cannot be read: Permission denied"):
        load_project(tmp_path)


def test_the_characterised_latch_is_a_valid_project():
    (cell,) = load_project(LATCH_130N).cells
    assert cell.name == "latch_130n"
    assert [table.quantity for table in cell.tables][:4] == ["offset", "noise", "delay", "window"]
    assert cell.process_codes == {"tt": 0, "ss": 1, "ff": 2}
