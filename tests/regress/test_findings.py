"""A verdict as a flat list: what passes, what wants a look, what fails."""

from __future__ import annotations

from types import SimpleNamespace

import pytest

from behavgen.limits import Limit
from behavgen.regress.findings import KINDS, LEVELS, cell_findings, run_findings
from behavgen.regress.verdict import (
    MET,
    NOT_MET,
    UNCHARACTERISED,
    UNDECIDED,
    CellVerdict,
    LimitVerdict,
    RunVerdict,
)
from tests.regress.verdicts import drifted_run


def test_a_run_passes_if_and_only_if_no_finding_fails(first, slower):
    run = drifted_run(first, slower)
    for cell in run.cells:
        assert cell.passed == (not any(f.fails for f in cell_findings(cell)))
    assert not run.passed
    calm = RunVerdict(project_file="behavgen.toml", cells=run.cells[1:2])
    assert calm.passed
    assert not any(finding.fails for finding in run_findings(calm))


def test_kinds_and_levels_are_the_known_ones(first, slower):
    findings = run_findings(drifted_run(first, slower))
    assert {f.kind for f in findings} <= KINDS.keys()
    assert {f.level for f in findings} <= set(LEVELS)


@pytest.mark.parametrize(
    ("state", "cell", "level"),
    [
        (MET, "", "passed"),
        (NOT_MET, "", "failed"),
        (UNDECIDED, "", "warning"),
        (UNCHARACTERISED, "latch", "warning"),
        # A limit of all cells need not concern every one of them.
        (UNCHARACTERISED, "", "note"),
    ],
)
def test_the_state_of_a_limit_gives_its_level(state, cell, level):
    verdict = LimitVerdict(limit=Limit(of="tau", below=1e-9, line=5, cell=cell), state=state)
    (finding,) = cell_findings(CellVerdict(name="latch", limits=(verdict,)))
    assert finding.level == level
    assert finding.spots[0].line == 5


@pytest.mark.parametrize(("passed", "level"), [(True, "passed"), (False, "failed")])
def test_a_check_that_disagrees_fails_the_cell(passed, level):
    check = SimpleNamespace(passed=passed, decisions=20_000)
    cell = CellVerdict(name="latch", check=check)
    (finding,) = cell_findings(cell)
    assert (finding.kind, finding.level) == ("check", level)
    assert cell.passed is passed
