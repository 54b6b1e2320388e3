"""The data sheet as a text: complete, closed to the world, the same every time, silent on files."""

import base64
import hashlib
import json
import re
from dataclasses import replace

import pytest

from behavgen.handoff.data_sheet import data_sheet
from behavgen.model import Provenance, Range
from behavgen.resources import template_folder
from tests.example_models import complete_model, full_model, renamed_pins_model
from tests.handoff.data_sheet_models import HAND_MADE
from tests.report import reading
from tests.report.sample_cells import failing_check, many_conditions_model, passing_check


@pytest.fixture(scope="module", params=HAND_MADE)
def sheet(request):
    model = HAND_MADE[request.param]()
    html = data_sheet(model, None)
    return model, html, reading.read_page(html)


def element_texts(page, tag):
    return [e.text for e in page.all(tag)]


def raw_text(html, tag):
    """Return what stands inside the last element of a kind, as a browser hashes it."""
    return re.findall(rf"<{tag}>(.*?)</{tag}>", html, re.DOTALL)[-1]


def policy(page):
    (meta,) = [m for m in page.all("meta") if m.attributes.get("http-equiv")]
    assert meta.attributes["http-equiv"] == "Content-Security-Policy"
    parts = (part.split() for part in meta.attributes["content"].split(";"))
    return {name: values for name, *values in parts}


def digest(text):
    return f"'sha256-{base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()}'"


def test_the_policy_allows_this_style_and_this_script_and_nothing_else(sheet):
    _, html, page = sheet
    found = policy(page)
    assert found["default-src"] == ["'none'"]
    assert found["style-src"] == [digest(raw_text(html, "style"))]
    if "calculator" in html:
        assert found["script-src"] == [digest(raw_text(html, "script"))]
    else:
        assert "script-src" not in found
        assert "<script" not in html
    assert set(found) <= {
        "default-src", "script-src", "style-src", "img-src", "base-uri", "form-action"
    }  # fmt: skip


def test_nothing_is_loaded_and_nothing_runs_from_an_attribute(sheet):
    _, html, page = sheet
    assert not re.search(r"https?:|//[a-z]", re.sub(r"<script>.*?</script>", "", html, flags=re.S))
    for element in page.all():
        assert not [name for name in element.attributes if name.startswith("on")]
        assert "style" not in element.attributes
        assert "src" not in element.attributes
    links = [a.attributes["href"] for a in page.all("a")]
    assert all(link.startswith("#") and page.one(link[1:]) for link in links)


def test_the_same_model_gives_the_same_bytes():
    model = complete_model()
    assert data_sheet(model, passing_check(model)) == data_sheet(model, passing_check(model))


def test_the_cautions_stand_at_the_top_and_at_the_end(sheet):
    _, _, page = sheet
    top = page.all("header")[0].text
    for text in (top, page.one("cautions").text):
        assert "range" in text
        assert "sign-off" in text
        assert "safety process" in text


def test_the_verdict_and_what_people_ask_for_first_stand_at_the_top():
    model = complete_model()
    top = reading.read_page(data_sheet(model, failing_check(model))).all("header")[0].text
    assert "Check failed" in top
    for words in ("Delay at", "Regeneration time constant", "Noise sigma", "Mismatch sigma"):
        assert words in top


def test_a_condition_with_one_place_is_shown_and_not_chosen():
    model = complete_model()
    fixed = replace(model.box, vdd_v=Range(low=1.2, high=1.2))
    page = reading.read_page(data_sheet(replace(model, box=fixed), None))
    assert "readonly" in page.one("vdd").attributes
    assert "readonly" not in page.one("vcm").attributes
    assert not [e for e in page.all("input") if e.attributes.get("id") == "vdd-slider"]


def test_ids_are_unique_and_references_lead_somewhere(sheet):
    _, _, page = sheet
    ids = [e.attributes["id"] for e in page.all() if "id" in e.attributes]
    assert len(ids) == len(set(ids))
    for element in page.all():
        for name in ("for", "aria-describedby", "aria-labelledby"):
            for target in (element.attributes.get(name) or "").split():
                assert target in ids, target


def test_every_control_has_a_label(sheet):
    _, _, page = sheet
    labelled = {label.attributes.get("for") for label in page.all("label")}
    wrapped = [e for label in page.all("label") for e in label.all("input")]
    for control in page.all("input") + page.all("select"):
        assert control.attributes.get("id") in labelled or control in wrapped


def test_a_table_alone_is_enough():
    """What was not characterised is said, and no tool asks about it."""
    for name, wanted in (("delay_only", True), ("noise_only", True), ("offset_only", False),
                         ("mismatch_only", False)):  # fmt: skip
        html = data_sheet(HAND_MADE[name](), None)
        assert ('id="calculator"' in html) == wanted
        assert "not characterised" in html
    noise = reading.read_page(data_sheet(HAND_MADE["noise_only"](), None))
    fields = {e.attributes.get("id") for e in noise.all("input")}
    assert {"overdrive", "span"} <= fields
    assert not {"resolve", "clock", "vdd", "temp_c", "vcm"} & fields


def test_every_curve_is_there():
    html = data_sheet(complete_model(), None)
    for title in ("S-curve, ", "Delay over overdrive", "Unresolved window over resolve time",
                  "Mean time between failures over the time given to resolve",
                  "Offsets of instances", "Shift of the trip point", "Weight of the input",
                  "Energy of a decision"):  # fmt: skip
        assert re.search(rf"<title[^>]*>[^<]*{title}", html), title


def test_pins_edge_and_reset_state_are_the_cells_own():
    model = renamed_pins_model(decides_on="falling", in_reset="low")
    page = reading.read_page(data_sheet(model, None))
    cell = page.one("cell")
    pins = element_texts(cell, "code")
    assert pins == ["vip", "vim", "ck", "q", "unresolved", "en"]
    assert "Each falling edge of ck decides" in cell.text
    assert "q rests low" in cell.text


def test_the_note_stands_at_the_top_and_in_the_margin_of_each_sheet():
    note = 'NOT CHECKED </style><b>"quoted"\\ text'
    html = data_sheet(complete_model(), None, caution_note=note)
    page = reading.read_page(html)
    (warning,) = page.of_class("warning")
    assert warning.text == note
    margin = re.search(r'@top-left \{ content: "(.*?)"; \}', html)[1]
    unescaped = re.sub(r"\\([0-9a-f]+) ", lambda m: chr(int(m[1], 16)), margin)
    assert unescaped == note


def test_a_check_is_told_with_what_it_excludes():
    model = many_conditions_model()
    check = replace(passing_check(model), excluded=37)
    told = reading.read_page(data_sheet(model, check)).one("check").text
    assert "Check passed" in told
    assert "37 decisions" in told
    assert "Whether the tables are right" in told
    failed = reading.read_page(data_sheet(model, failing_check(model))).one("check").text
    assert "Check failed" in failed
    assert "Not checked" in reading.read_page(data_sheet(model, None)).one("check").text


def test_no_file_kit_or_netlist_is_named():
    """Neither in words nor in the data of the calculator; nor is any table row."""
    model = full_model()
    place = "vault/secret_kit/delay_final.csv"
    origin = Provenance(stage="extracted", kit="kit_x7", netlist_hash="beef77")
    sources = tuple(replace(s, file=place, provenance=origin) for s in model.sources)
    parameters = tuple(replace(p, source=f"from {place}") for p in model.parameters)
    html = data_sheet(
        replace(model, sources=sources, parameters=parameters,
                notices=(f"Rows of {place} were left out.",)),
        None,
    )  # fmt: skip
    for word in ("vault", "secret_kit", "delay_final", ".csv", "kit_x7", "beef77"):
        assert word not in html
    embedded = json.loads(reading.read_page(html).one("model").text)
    assert set(embedded) == {"level", "quantiles", "offset", "noise", "delay", "evidence"}


def test_words_from_the_cell_cannot_become_markup():
    model = complete_model()
    cell = replace(model.cell, description='</p><script>alert("x")</script>')
    delay = replace(model.delay, measured="<b>clk</b> & more")
    page = reading.read_page(data_sheet(replace(model, cell=cell, delay=delay), None))
    assert len(page.all("script")) == 2
    assert page.all("b") == []


def test_the_style_has_no_colours_of_its_own():
    """Contrast is tested for the report's palette, in light, dark and print."""
    style = (template_folder() / "handoff" / "data_sheet.css").read_text(encoding="utf-8")
    assert not re.search(r"#[0-9a-f]{3,8}\b|rgb|hsl", style)
    assert re.search(r"prefers-reduced-motion", style)
