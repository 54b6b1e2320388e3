"""JUnit XML that strict readers take."""

from __future__ import annotations

from pathlib import Path

import pytest
from lxml import etree

from behavgen.regress.findings import run_findings
from behavgen.regress.junit import junit_xml
from tests.regress.verdicts import drifted_run

SCHEMA = etree.XMLSchema(etree.parse(Path(__file__).parents[1] / "data" / "junit.xsd"))


@pytest.fixture(scope="module")
def run(first, slower):
    return drifted_run(first, slower)


@pytest.fixture(scope="module")
def tree(run):
    return etree.fromstring(junit_xml(run_findings(run)).encode())


def test_the_file_obeys_the_strict_schema(tree):
    SCHEMA.assertValid(tree)


def test_an_empty_run_obeys_it_too():
    SCHEMA.assertValid(etree.fromstring(junit_xml(()).encode()))


def test_a_suite_counts_its_cases(tree):
    assert [suite.get("name") for suite in tree] == ["latch", "calm", "broken", "gone"]
    for suite in tree:
        for kind, element in (("failures", "failure"), ("errors", "error"), ("skipped", "skipped")):
            assert int(suite.get(kind)) == len(suite.findall(f"testcase/{element}"))
        assert int(suite.get("tests")) == len(suite.findall("testcase"))


def test_failures_say_what_and_where(tree):
    latch = tree[0]
    failed = {case.get("name"): case.find("failure") for case in latch.iter("testcase")}
    delay = failed["drift: delay"]
    assert "slow" in delay.get("message")
    assert "delay.csv:" in delay.text
    assert "behavgen.toml:11" in failed["limit: noise below 1 uV"].text
    assert tree[1].find("testcase/failure") is None


def test_cases_of_a_suite_have_names_of_their_own(tree):
    for suite in tree:
        names = [case.get("name") for case in suite.iter("testcase")]
        assert len(names) == len(set(names))


def test_the_time_is_the_one_given(run):
    text = junit_xml(run_findings(run), epoch_s=1_700_000_000)
    assert 'timestamp="2023-11-14T22:13:20"' in text  # date -u -d @1700000000
