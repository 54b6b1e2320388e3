"""What came back and what is random stand in the page with their worst rows."""

from dataclasses import replace

from behavgen.check.verdict import ClosureResult, ClosureRow, DistributionResult
from behavgen.report.closure_tables import closure_table, distribution_table, left_out_table
from behavgen.report.findings import findings
from tests.example_models import full_model
from tests.report.sample_cells import passing_check

ROW = ClosureRow(
    quantity="delay", condition="process typ, supply 1.2 V", point=7, x=1e-3, table=1e-10,
    measured=1.01e-10, relative_error=0.01, z=1.5, told="100 ps at 1 mV, 101 ps again",
)  # fmt: skip
CLOSURE = ClosureResult(
    quantity="delay", passed=True, rms_relative=0.004, limit="0.4 % rms, at most 2 %",
    worst=(ROW,), rows=1015,
)  # fmt: skip
STATISTIC = DistributionResult(
    name="ones at +0.5 sigma", sample=800, p_value=0.2, least_p=2e-5, told="0.69 expected"
)


def check(**more):
    return replace(passing_check(full_model()), **more)


def test_without_answers_there_are_no_tables():
    assert closure_table(check()) is distribution_table(check()) is left_out_table(check()) is None


def test_the_worst_row_is_named():
    (row,) = closure_table(check(closure=(CLOSURE,))).rows
    text = " ".join(row.cells)
    for words in ("delay", "supply 1.2 V, point 7", "100 ps at 1 mV, 101 ps again", "at most 2 %"):
        assert words in text
    assert row.mark == ""
    (row,) = closure_table(check(closure=(replace(CLOSURE, passed=False),))).rows
    assert row.mark == "bad"


def test_the_least_probable_statistic_comes_first():
    rare = replace(STATISTIC, name="rare", p_value=1e-9)
    found = distribution_table(check(distribution=(STATISTIC, rare))).rows
    assert [row.cells[0] for row in found] == ["rare", STATISTIC.name]
    assert [row.mark for row in found] == ["bad", ""]


def test_the_verdict_says_what_else_was_asked():
    said = findings(full_model(), check(closure=(CLOSURE,), distribution=(STATISTIC,))).sentence
    assert "gives 1\N{NARROW NO-BREAK SPACE}015 table rows back" in said or "1015" in said
    assert "1 statistic" in said
