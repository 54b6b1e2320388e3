"""SARIF that obeys the published schema and points at the user's own lines."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from jsonschema import Draft4Validator

from behavgen.regress.findings import run_findings
from behavgen.regress.sarif import sarif_json
from tests.regress.verdicts import drifted_run

PUBLISHED = Path(__file__).parents[1] / "published"
SCHEMA = Draft4Validator(json.loads((PUBLISHED / "sarif_2_1_0_schema.json").read_text()))


@pytest.fixture(scope="module")
def log(first, slower):
    findings = run_findings(drifted_run(first, slower))
    text = sarif_json(
        findings, project_file="chips/one/behavgen.toml", version="0.1.0", caution="!"
    )
    return json.loads(text)


def places(result, which="locations"):
    found = []
    for location in result.get(which, ()):
        physical = location["physicalLocation"]
        line = physical.get("region", {}).get("startLine")
        found.append((physical["artifactLocation"]["uri"], line))
    return found


def result(log, text):
    (found,) = (r for r in log["runs"][0]["results"] if text in r["message"]["text"])
    return found


def test_the_log_obeys_the_published_schema(log):
    SCHEMA.validate(log)
    SCHEMA.validate(json.loads(sarif_json((), project_file="behavgen.toml")))


def test_the_schema_would_notice_a_fault(log):
    broken = json.loads(json.dumps(log))
    broken["runs"][0]["results"][0]["level"] = "fatal"
    assert not SCHEMA.is_valid(broken)


def test_a_drift_points_at_its_table_rows_and_the_cell(log):
    drift = result(log, "latch: delay: ")
    assert drift["level"] == "error"
    ((file, line),) = places(drift)
    assert file == "chips/one/delay.csv"
    assert 41 <= line <= 53  # rows of the slow process
    assert ("chips/one/behavgen.toml", 3) in places(drift, "relatedLocations")


def test_a_limit_points_at_its_line_of_the_project_file(log):
    assert places(result(log, "noise below 1 uV")) == [("chips/one/behavgen.toml", 11)]
    undecided = result(log, "memory after 100 ps of reset below 1 mV")
    assert undecided["level"] == "warning"


def test_a_refused_row_is_pointed_at_in_a_legal_reference(log):
    refused = [r for r in log["runs"][0]["results"] if r["ruleId"] == "inputs"]
    assert places(refused[0]) == [("chips/one/tables/in%20put.csv", 12)]
    assert places(refused[1]) == [("chips/one/behavgen.toml", 40)]


def test_what_passed_is_left_out(log):
    assert not any("calm" in r["message"]["text"] for r in log["runs"][0]["results"])


def test_rules_are_found_by_their_index(log):
    (run,) = log["runs"]
    rules = [rule["id"] for rule in run["tool"]["driver"]["rules"]]
    assert all(rules[r["ruleIndex"]] == r["ruleId"] for r in run["results"])
