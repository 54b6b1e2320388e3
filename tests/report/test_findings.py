"""The verdict says what the check found, about this very model."""

from dataclasses import replace

import pytest

from behavgen.report.findings import findings
from tests.example_models import full_model
from tests.report.sample_cells import failing_check, passing_check


def test_no_check_is_not_a_passed_check():
    found = findings(full_model(), None)
    assert found.status == "absent"
    assert "behavgen check" in found.sentence


def test_a_passed_check_names_simulator_and_decisions():
    found = findings(full_model(), passing_check(full_model()))
    assert found.status == "passed"
    assert "25\N{NARROW NO-BREAK SPACE}312 decisions" in found.sentence
    assert "invented simulator 1.0" in found.sentence


def test_a_failed_check_counts_what_went_wrong():
    found = findings(full_model(), failing_check(full_model()))
    assert found.status == "failed"
    for words in ("1 bench failed", "7 decisions disagree", "1 stratum is too thin"):
        assert words in found.sentence


def test_a_check_of_another_model_does_not_speak_for_this_one():
    other = replace(full_model(), notices=("Something changed.",))
    found = findings(full_model(), passing_check(other))
    assert found.status == "stale"
    assert found.tables


@pytest.mark.parametrize("passed", [True, False])
def test_every_bench_stratum_and_disagreement_is_a_row(passed):
    check = passing_check(full_model()) if passed else failing_check(full_model())
    rows = [row for table in findings(full_model(), check).tables for row in table.rows]
    assert len(rows) == len(check.benches) + len(check.strata) + len(check.disagreements)
    assert any(row.mark == "bad" for row in rows) is not passed
