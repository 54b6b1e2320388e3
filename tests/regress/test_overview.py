"""The page of all cells and the page of trends: whole, without scripts, everything linked."""

from __future__ import annotations

from datetime import UTC, datetime

import pytest
from lxml import html

from behavgen.regress.findings import run_findings
from behavgen.regress.overview import overview_html
from behavgen.regress.past import Trend, TrendPoint
from behavgen.regress.trends import past_values, trends_html
from tests.regress.verdicts import NASTY, drifted_run

CAUTIONS = ("They replace no sign-off.",)


@pytest.fixture(scope="module")
def run(first, slower):
    return drifted_run(first, slower)


@pytest.fixture(scope="module")
def page(run):
    links = {"latch": [("report", "../latch/report.html")]}
    text = overview_html(
        run, run_findings(run), title="a chip & more", links=links, cautions=CAUTIONS
    )
    return html.fromstring(text)


def words(element):
    return " ".join(element.text_content().split())


def test_every_cell_has_its_row_with_verdict_and_links(page):
    rows = page.xpath("//table[caption='All cells']/tbody/tr")
    told = [(words(row[0]), words(row[1])) for row in rows]
    assert told == [
        ("latch", "not passed"),
        ("calm", "passed"),
        ("broken", "not passed"),
    ]
    assert rows[0].xpath(".//a/@href") == ["#cell-latch", "../latch/report.html"]


def test_every_link_inside_the_page_leads_somewhere(page):
    anchors = set(page.xpath("//@id"))
    inside = [link[1:] for link in page.xpath("//a/@href") if link.startswith("#")]
    assert inside
    assert set(inside) <= anchors


def test_the_drift_its_rows_and_its_consequences_are_told(page):
    text = words(page)
    assert "drift without a limit" in text
    assert "delay.csv:" in text
    assert "What the drift does" in text
    assert "gone is in the baseline" in text


def test_the_page_loads_nothing_and_runs_nothing(page):
    assert not page.xpath("//script | //img | //iframe | //@src | //@onclick")
    (policy,) = page.xpath("//meta[@http-equiv='Content-Security-Policy']/@content")
    assert policy.startswith("default-src 'none'")


def test_texts_are_shown_as_they_are(page):
    assert "<more>" in NASTY
    assert "<more>" in words(page)
    assert not page.xpath("//more")


def test_the_caution_is_there(page):
    assert CAUTIONS[0] in words(page)


def test_trends_are_drawn_with_their_intervals(first):
    def point(run, scale, low):
        return TrendPoint(
            run=run, began=datetime(2026, 1, run, tzinfo=UTC), value=scale * 1e-12,
            low=low and scale * 0.9e-12, high=low and scale * 1.1e-12, verdict="",
        )  # fmt: skip

    points = tuple(point(k, 10.0 + k, low=k != 2) for k in (1, 2, 3))
    known = Trend(cell="latch", parameter="tau_s", unit="s", points=points)
    once = Trend(cell="latch", parameter="delay_s", unit="s", points=points[:1])
    text = trends_html({"latch": (known, once), "none": ()}, title="chip", cautions=CAUTIONS)
    page = html.fromstring(text)
    assert len(page.xpath("//figure")) == 2
    assert page.xpath("//a[@href='overview.html']")
    assert CAUTIONS[0] in words(page)
    assert "nan" not in text.lower().replace("nanum", "")


def test_numbers_of_the_history_have_names_of_their_own(first):
    names = [value.parameter for value in past_values("latch", first, None)]
    assert len(names) == len(set(names))
    assert {"tau_s", "noise_sigma_v", "offset_v"} <= set(names)
