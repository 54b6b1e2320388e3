"""Many cells on the command line: several at a time, and what comes out does not depend on it."""

from __future__ import annotations

import pytest

from behavgen.__main__ import main
from behavgen.regress.spread import CELLS_OF_A_WORKER
from tests.regress.many_cells import cell_name, write_many_cells

CELLS = 2 * CELLS_OF_A_WORKER


def files_under(folder):
    return {
        file.relative_to(folder).as_posix(): file.read_bytes()
        for file in folder.rglob("*")
        if file.is_file()
    }


@pytest.mark.slow
def test_several_jobs_print_and_write_what_one_does(tmp_path, capsys, monkeypatch):
    said, written = [], []
    for jobs in ("1", "2"):
        folder = write_many_cells(tmp_path / jobs, CELLS)
        table = folder / "tables" / f"{cell_name(4)}_offset.csv"
        table.write_text(table.read_text(encoding="utf-8").replace("3,", "3,x", 1), "utf-8")
        monkeypatch.chdir(folder)
        assert main(["fit", "--jobs", jobs]) == 3
        said.append(capsys.readouterr())
        written.append(files_under(folder / "build"))
    assert said[0] == said[1]
    assert f"tables/{cell_name(4)}_offset.csv:5: offset: " in said[1].err
    assert written[0] == written[1]
    assert len({name.partition("/")[0] for name in written[1]}) == CELLS - 1


def test_the_invented_cells_say_that_they_are_invented(tmp_path):
    folder = write_many_cells(tmp_path, 3)
    text = (folder / "behavgen.toml").read_text(encoding="utf-8")
    assert text.startswith("# Invented numbers")
    assert text.count('description = "invented latch') == 3
    before = files_under(folder)
    assert before == files_under(write_many_cells(folder, 3))
