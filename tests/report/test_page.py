"""The page: complete, correct, self-contained and safe."""

import base64
import hashlib
import re
from dataclasses import replace
from functools import cache

import pytest

from behavgen.check.verdict import BenchResult, Stratum
from behavgen.model import ConditionFit, Estimate, Parameter, Process, Source
from behavgen.report.page import report_page
from tests.example_models import complete_model, full_model, minimal_model, renamed_pins_model
from tests.report.reading import read_page, table_rows
from tests.report.sample_cells import (
    WORST_AT,
    failing_check,
    many_conditions_model,
    passing_check,
)

NBSP = "\N{NO-BREAK SPACE}"
SECTIONS = ["verdict", "cell", "delay", "window", "noise", "offset", "memory", "energy", "fits",
            "parameters", "validity", "sources", "check", "scope", "cautions"]  # fmt: skip


def without_everything():
    bare = minimal_model()
    return replace(bare, delay=None, generator="", cell=replace(bare.cell, description=""))


MODELS = {
    "full": full_model,
    "complete": complete_model,
    "minimal": minimal_model,
    "renamed": renamed_pins_model,
    "holding": lambda: renamed_pins_model(in_reset="hold", when_unresolved="coin"),
    "many": many_conditions_model,
    "nothing": without_everything,
}
PAGES = [(name, check) for name in MODELS for check in (None, passing_check, failing_check)]


@cache
def page_text(name, check):
    model = MODELS[name]()
    return report_page(model, check(model) if check else None)


@pytest.fixture(params=PAGES, ids=lambda p: f"{p[0]}-{p[1].__name__ if p[1] else 'unchecked'}")
def html(request):
    return page_text(*request.param)


def test_every_page_is_well_formed_and_complete(html):
    page = read_page(html)
    assert [s.attributes["id"] for s in page.all("section")] == SECTIONS
    assert all(s.all("h2") for s in page.all("section"))
    ids = [e.attributes["id"] for e in page.all() if "id" in e.attributes]
    assert len(ids) == len(set(ids))
    assert {a.attributes["href"][1:] for a in page.all("a")} <= set(ids)
    for bad in ("None", "nan", "inf ", "{{", "{%"):
        assert bad not in page.text.replace("in form", "")


def test_every_page_reaches_for_nothing_outside(html):
    for reach in ("http:", "https:", "//", "url(", "@import", "<script", "<iframe", "<img"):
        assert reach not in html.lower()
    page = read_page(html)
    for element in page.all():
        assert element.tag != "script"
        assert "style" not in element.attributes  # the policy would refuse it
        assert not [name for name in element.attributes if name.startswith("on")]
        for name in ("src", "href", "xlink:href", "action"):
            target = element.attributes.get(name)
            assert target is None or target.startswith("#") or target == "data:,"


def test_the_policy_allows_this_style_and_nothing_else(html):
    page = read_page(html)
    (policy,) = [m.attributes["content"] for m in page.all("meta")
                 if m.attributes.get("http-equiv") == "Content-Security-Policy"]  # fmt: skip
    rules = dict(rule.strip().split(" ", 1) for rule in policy.split(";"))
    style = re.search(r"<style>(.*?)</style>", html, re.DOTALL).group(1)
    digest = base64.b64encode(hashlib.sha256(style.encode()).digest()).decode()
    assert rules["default-src"] == "'none'"
    assert rules["style-src"] == f"'sha256-{digest}'"
    assert "script-src" not in rules
    assert html.index("Content-Security-Policy") < html.index("<style")


def test_every_table_can_be_read_aloud(html):
    page = read_page(html)
    for table in page.all("table"):
        assert table.all("caption")
        for part, scope in (("thead", "col"), ("tbody", "row")):
            heads = table.all(part)[0].all("th")
            assert heads and all(th.attributes.get("scope") == scope for th in heads)
        widths = {len([c for c in tr.children if not isinstance(c, str)]) for tr in table.all("tr")}
        assert len(widths) == 1


def test_every_drawing_has_words_or_is_decoration(html):
    page = read_page(html)
    ids = {e.attributes.get("id"): e for e in page.all()}
    for svg in page.all("svg"):
        if svg.attributes.get("role") == "img":
            named = svg.attributes["aria-labelledby"].split()
            assert all(ids[name].text for name in named)
        elif "class" in svg.attributes:
            assert svg.attributes.get("aria-hidden") == "true"


def test_closed_form_numbers_of_the_minimal_model():
    """By hand: tau 10.0000 ps, t(0.5 V) 25.0000 ps, t = 25 ps + 10 ps ln(0.5 V / v)."""
    page = read_page(report_page(minimal_model(), None))
    (small,) = page.one("verdict").of_class("keys")
    shown = {d.all("dt")[0].text: d.all("dd")[0].text for d in small.all("div")}
    assert shown == {
        "regeneration time constant": f"10{NBSP}ps",
        f"delay at 10{NBSP}µV": f"133{NBSP}ps",  # 25 + 10 * 10.8198
        f"delay at 100{NBSP}µV": f"110{NBSP}ps",  # 25 + 10 * 8.5172
        f"delay at 1{NBSP}mV": f"87.1{NBSP}ps",  # 25 + 10 * 6.2146
        f"delay at 10{NBSP}mV": f"64.1{NBSP}ps",  # 25 + 10 * 3.9120
        f"delay at 100{NBSP}mV": f"41.1{NBSP}ps",  # 25 + 10 * 1.6094
    }


def test_headline_parameters_are_the_models_own():
    page = read_page(report_page(full_model(), None))
    text = page.one("verdict").text
    for words in ("tau_s", f"20.00{NBSP}ps", f"95{NBSP}%: 19.80 … 20.30{NBSP}ps"):
        assert words in text
    (row,) = table_rows(page.one("parameters").all("table")[0])
    assert row["parameter"] == "tau_s"
    assert row["source"] == "delay.csv"


def test_the_fit_table_marks_the_worst_condition_and_only_it():
    page = read_page(report_page(many_conditions_model(), None))
    (table,) = page.one("fits").all("table")
    assert len(table.all("tbody")[0].all("tr")) == 29
    (marked,) = table.of_class("notable")
    assert marked.of_class("flag")[0].text == "worst"
    cells = [c.text for c in marked.children if not isinstance(c, str)]
    assert cells[1:6] == [f"1.32{NBSP}V", f"125{NBSP}°C", f"0.5{NBSP}V", f"0.20{NBSP}%",
                          f"6.2{NBSP}%"]  # fmt: skip
    assert (WORST_AT.vdd_v, WORST_AT.vcm_v) == (1.32, 0.5)


def test_the_verdict_weighs_conditions_by_rows():
    model = many_conditions_model()
    first = replace(model.fits[0], rows=300, rms_relative=0.03)
    page = read_page(report_page(replace(model, fits=(first, *model.fits[1:])), None))
    # sqrt((300 * 0.03^2 + 28 * 35 * 0.002^2) / (300 + 28 * 35)) = 1.46 %
    assert f"within 1.5{NBSP}% rms, 6.2{NBSP}% at worst" in page.one("verdict").text


def test_validity_shows_where_each_process_was_measured():
    page = read_page(report_page(full_model(), None))
    rows = table_rows(page.one("validity").all("table")[0])
    slow = [r for r in rows if r["quantity"] == "delay" and "slow" in r["process"]]
    assert slow[0]["process"] == "slow scaled from typ"
    assert slow[0]["supply"] == f"1.2{NBSP}V"
    assert slow[0]["common mode"] == f"0.6 … 0.7{NBSP}V"
    assert rows[0]["temperature"] == f"\N{MINUS SIGN}40 … 125{NBSP}°C"
    noise = next(r for r in rows if r["quantity"] == "noise")
    assert noise["overdrive"] == "\N{EN DASH}"
    # The bar of 0.6..0.7 V inside 0.5..0.8 V is the middle third.
    (row,) = [tr for tr in page.one("validity").all("tr") if "slow" in tr.text
              and tr.text.startswith("delay")]  # fmt: skip
    bars = [p.attributes["d"] for p in row.of_class("extent")]
    assert bars[2] == "M33.3 3h33.3"


def test_absent_effects_are_named_not_drawn():
    page = read_page(report_page(minimal_model(), None))
    for section in ("noise", "offset"):
        assert not page.one(section).all("svg")
        assert "characterised" in page.one(section).text
    modelled, absent = page.one("scope").of_class("scope")[0].all("ul")
    assert {e.text.split(":")[0] for e in modelled.all("strong")} == {
        "delay", "unresolved decisions"}  # fmt: skip
    for name in ("offset", "mismatch", "noise", "reset delay", "memory of the previous decision",
                 "aperture", "energy", "kickback"):  # fmt: skip
        assert name in absent.text


def test_what_was_characterised_besides_is_drawn_and_in_scope():
    page = read_page(report_page(complete_model(), None))
    assert len(page.one("memory").of_class("chart")) == 2
    assert len(page.one("energy").of_class("chart")) == 1
    modelled, _ = page.one("scope").of_class("scope")[0].all("ul")
    for words in ("memory of the previous decision : the trip point moves in its favour: "
                  "2 exponentials and a floor", "aperture", "energy", "kickback"):  # fmt: skip
        assert words in modelled.text
    rows = table_rows(page.one("validity").all("table")[0])
    assert {"memory", "aperture", "energy", "kickback"} <= {row["quantity"] for row in rows}
    assert f"clock period of 2{NBSP}ns" in page.one("energy").text


def test_kickback_is_a_table_of_its_own():
    model = complete_model()
    charge = Parameter(name="kickback_common_c", unit="C", estimate=Estimate(value=2.1e-15))
    fit = ConditionFit(quantity="kickback", condition=model.points[-1].condition, rows=2,
                       parameters=(charge,))  # fmt: skip
    page = read_page(report_page(replace(model, fits=(*model.fits, fit)), None))
    (table,) = page.one("energy").all("table")
    (row,) = table_rows(table)
    assert row == {"rows": "2", "kickback_common_c": f"2.1{NBSP}fC"}
    assert "Kickback" not in page.one("fits").text


def test_a_model_of_nothing_still_has_a_page():
    page = read_page(report_page(without_everything(), None))
    assert not page.one("delay").all("svg")
    assert "every decision resolves" in page.one("delay").text
    assert not page.one("window").all("svg")


def test_sources_and_hashes_are_complete():
    model = replace(full_model(), sources=(
        Source(quantity="delay", file="delay.csv", sha256="5a" * 32, rows=1015, failed_rows=3),
    ))  # fmt: skip
    (row,) = table_rows(read_page(report_page(model, None)).one("sources").all("table")[0])
    assert row["SHA-256"] == "5a" * 32
    assert (row["rows"], row["failed runs"]) == ("1\N{NARROW NO-BREAK SPACE}015", "3")


@pytest.mark.parametrize(
    "topic",
    ["clamped", "transistor-level", "extraction", "reliability", "safety process",
     "No integrity level", "codes that apply", "sigmas", "regeneration", "sampling error",
     "process kit", "parasitics", "ageing", "supply noise", "jitter", "spatial correlation",
     "convention", "synchroniser", "two-state", "not say that the tables are right",
     "no basis for security", "licence"],
)  # fmt: skip
def test_every_caution_is_there(topic):
    assert topic in read_page(report_page(full_model(), None)).one("cautions").text


def test_the_cautions_say_how_far_counting_went():
    """The rarest share of the example is 0.01 and 0.97: 2.326 sigmas, from tables."""
    text = read_page(report_page(full_model(), None)).one("cautions").text
    assert "counted to 2.3 sigmas" in text
    assert "to 8.3 sigmas" in text
    assert "(9 decades)" in text  # 1 uV down to 1 fV


def test_invented_data_say_so_and_real_data_do_not():
    assert "invented demonstration data" in report_page(full_model(), None)
    real = full_model()
    real = replace(real, cell=replace(real.cell, description="a latch"))
    assert "invented" not in report_page(real, None)


ATTACK = '"><script>alert(1)</script><img src=x onerror=alert(2)>&amp;'


def hostile_model():
    model = many_conditions_model()
    tau = replace(model.parameters[0], description=ATTACK, source=ATTACK, name=ATTACK)
    rename = {"typ": ATTACK, "slow": "slow"}

    def renamed(surface):
        return replace(surface, variants=tuple(
            replace(v, process=rename[v.process], scaled_from=ATTACK) for v in surface.variants
        ))  # fmt: skip

    delay = model.delay
    return replace(
        model,
        cell=replace(model.cell, description=ATTACK),
        processes=(Process(name=ATTACK, code=0), Process(name="slow", code=3)),
        offset=replace(model.offset, surface=renamed(model.offset.surface), source=ATTACK),
        mismatch=None,
        noise=replace(model.noise, surface=renamed(model.noise.surface)),
        reset=None,
        delay=replace(delay, tau=renamed(delay.tau), law=ATTACK, measured=ATTACK,
                      nodes=tuple(map(renamed, delay.nodes))),
        parameters=(tau,),
        points=tuple(
            replace(p, condition=replace(p.condition, process=rename.get(p.condition.process, "")))
            for p in model.points
        ),
        fits=tuple(replace(f, condition=replace(f.condition, process=ATTACK), parameters=(tau,))
                   for f in model.fits),
        notices=(ATTACK,),
        sources=(Source(quantity=ATTACK, file=ATTACK, sha256=ATTACK, rows=1),),
        generator=ATTACK,
    )  # fmt: skip


def test_no_text_of_a_model_or_check_becomes_markup():
    model = hostile_model()
    check = replace(
        failing_check(model), simulator=ATTACK, emitted_sha256=ATTACK,
        strata=(Stratum(group=ATTACK, name=ATTACK, decisions=1, required=2),),
        benches=(BenchResult(name=ATTACK, passed=False, message=ATTACK),),
    )  # fmt: skip
    html = report_page(model, check)
    page = read_page(html)
    assert not page.all("script") and not page.all("img")
    assert "<script" not in html and "<img" not in html
    assert not [e for e in page.all() for name in e.attributes if name.startswith("on")]
    assert page.text.count("alert(1)") > 20  # shown as text, everywhere


def test_a_cell_of_29_conditions_stays_small():
    model = many_conditions_model()
    assert len(report_page(model, passing_check(model)).encode()) < 150 * 1024


def test_the_same_model_gives_the_same_bytes():
    assert report_page(full_model(), None) == report_page(full_model(), None)
