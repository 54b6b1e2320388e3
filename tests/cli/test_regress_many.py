"""regress over many cells: one that drifted fails the run, is named, and alone is looked at."""

from __future__ import annotations

import pytest

from behavgen.regress import compare as comparing
from tests.cli.commands import run
from tests.regress.many_cells import cell_name, scale_delays, write_many_cells

pytestmark = pytest.mark.slow


@pytest.fixture(scope="module")
def project(tmp_path_factory):
    return write_many_cells(tmp_path_factory.mktemp("many") / "chip", 30)


def test_one_drifted_cell_of_many_fails_and_is_named(project, capsys, monkeypatch):
    assert run(capsys, "-C", project, "baseline", "-q").exit_code == 0
    assert run(capsys, "-C", project, "regress", "-q").exit_code == 0
    compared = []
    compare = comparing.compare

    def counted(old, new, *rest, **options):
        compared.append(new.cell.name)
        return compare(old, new, *rest, **options)

    monkeypatch.setattr(comparing, "compare", counted)
    assert run(capsys, "-C", project, "regress", "-q").exit_code == 0
    assert compared == []
    scale_delays(project, 17, 1.05)
    ran = run(capsys, "-C", project, "regress", "--json")
    assert ran.exit_code == 1
    assert ran.json["disagreements"] == [cell_name(17)]
    assert compared == [cell_name(17)]
    failed = [f for f in ran.json["findings"] if f["fails"]]
    assert {f["cell"] for f in failed} == {cell_name(17)}
    assert any(
        spot["file"] == f"tables/{cell_name(17)}_delay.csv" for f in failed for spot in f["spots"]
    )
