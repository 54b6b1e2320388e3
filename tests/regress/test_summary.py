"""The Markdown summary: readable as text, and harmless whatever stands in the tables."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from behavgen.regress.findings import run_findings
from behavgen.regress.summary import markdown_summary
from behavgen.regress.verdict import RunVerdict
from tests.regress.verdicts import drifted_run

CAUTION = "No sign-off is replaced."


@pytest.fixture(scope="module")
def run(first, slower):
    return drifted_run(first, slower)


@pytest.fixture(scope="module")
def text(run):
    return markdown_summary(run, run_findings(run), caution=CAUTION)


def test_the_verdict_stands_first_and_the_caution_last(text):
    assert text.startswith("## Comparator models: NOT passed\n\n3 cells, 2 not passed.")
    assert text.endswith(f"*{CAUTION}*\n")


def test_cells_that_failed_stand_before_those_that_passed_and_calm_ones_are_left_out(text):
    titles = re.findall(r"^### (.*)$", text, flags=re.MULTILINE)
    assert titles == ["latch: NOT passed", "broken: NOT passed"]


def test_the_drift_is_told_with_rows_and_what_it_does(text):
    assert "**failed**, delay: drift without a limit" in text
    assert re.search(r"^  - delay\.csv:\d+ \+\d", text, flags=re.MULTILINE)
    assert "| delay at 1 mV overdrive, slow, 1 V |" in text


def test_a_cell_that_is_gone_is_named(text):
    assert "**gone** is in the baseline" in text


def test_what_markdown_gives_a_meaning_is_escaped(text):
    assert r"\<more\>" in text
    assert r"\`x\` \*y\*" in text
    rows = [line for line in text.splitlines() if line.startswith("| ")]
    assert {len(re.findall(r"(?<!\\)\|", row)) for row in rows} == {4}


def test_an_empty_run_passed():
    nothing = RunVerdict(project_file="behavgen.toml", cells=())
    text = markdown_summary(nothing, (), caution=CAUTION)
    assert text.startswith("## Comparator models: passed")


def test_a_long_list_is_cut_and_says_so(run):
    many = replace(run, cells=tuple(replace(run.cells[0], name=f"c{k}") for k in range(230)))
    text = markdown_summary(many, run_findings(many), caution=CAUTION)
    assert text.count("### ") == 200
    assert "And 30 more cells" in text
