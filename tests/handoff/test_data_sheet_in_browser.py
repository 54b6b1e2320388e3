"""The data sheet in a real browser: quiet, closed to the world, worked by keys, printable."""

from __future__ import annotations

import base64
import json

import pytest
from selenium.webdriver.common.keys import Keys

from behavgen.bands import Bands
from tests.handoff.data_sheet_models import DEMO_CELLS, HAND_MADE
from tests.handoff.data_sheet_pages import show

pytestmark = pytest.mark.slow

NAMES = (*HAND_MADE, "many", "latch_130n", *DEMO_CELLS)


def requested(driver):
    events = [json.loads(entry["message"])["message"] for entry in driver.get_log("performance")]
    sent = [e for e in events if e["method"] == "Network.requestWillBeSent"]
    return {e["params"]["request"]["url"] for e in sent}


@pytest.mark.parametrize("name", NAMES)
@pytest.mark.parametrize(("width", "theme"), [(360, "light"), (1280, "light"), (360, "dark")])
def test_the_page_is_quiet_and_fits(name, width, theme, browser, pages):
    address = show(browser, pages, name, width=width, theme=theme)
    assert browser.get_log("browser") == []
    assert {url for url in requested(browser) if not url.startswith("data:")} == {address}
    assert browser.execute_script("return window.violations") == []
    scroll, client = browser.execute_script(
        "return [document.documentElement.scrollWidth, document.documentElement.clientWidth]"
    )
    assert scroll == client <= width
    outside = browser.execute_script(
        "return [...document.querySelectorAll('svg[role=img], fieldset, .control, .answer')]"
        ".filter((e) => e.offsetParent !== null || e.tagName === 'svg')"
        ".map((e) => e.getBoundingClientRect()).filter((b) => b.width > 0 && "
        "(b.left < 0 || b.right > window.innerWidth)).length"
    )
    assert outside == 0


def test_the_policy_stops_what_is_not_on_the_page(browser, pages):
    """The watch for violations sees one when there is one."""
    show(browser, pages, "complete")
    browser.execute_script(
        "const s = document.createElement('script'); s.textContent = 'window.got = 1';"
        "document.body.append(s); document.body.setAttribute('style', 'color: red');"
    )
    assert browser.execute_script("return window.got") is None
    browser.execute_async_script("setTimeout(arguments[0], 50)")
    assert browser.execute_script("return window.violations.length") >= 2


def field(driver, name):
    return driver.find_element("id", name)


def result(driver, name):
    return driver.find_element("id", f"result-{name}").get_attribute("data-value")


def test_every_control_is_reached_and_worked_by_keys(browser, pages):
    show(browser, pages, "complete")
    names = []
    for _ in range(200):
        browser.switch_to.active_element.send_keys(Keys.TAB)
        active = browser.switch_to.active_element
        names.append(active.get_attribute("id") or active.get_attribute("name"))
        if names[-1] == "noise":
            break
    assert browser.execute_script("return document.querySelector('.skip').hash") == "#cell"
    for name in ("vdd", "temp_c", "vcm", "overdrive", "resolve", "clock"):
        assert {name, f"{name}-slider"} <= set(names)
    assert {"process", "kind", "noise"} <= set(names)
    before = result(browser, "delay"), field(browser, "vdd").get_attribute("value")
    field(browser, "vdd-slider").send_keys(Keys.ARROW_RIGHT)
    after = result(browser, "delay"), field(browser, "vdd").get_attribute("value")
    assert float(after[1]) > float(before[1])
    assert float(after[0]) < float(before[0])  # a higher supply decides faster in this model
    field(browser, "overdrive-slider").send_keys(Keys.END)
    assert float(field(browser, "overdrive").get_attribute("value")) == 300.0
    browser.find_element("css selector", "[value=overdrive]").send_keys(Keys.ARROW_DOWN)
    assert field(browser, "span").is_displayed()
    assert not field(browser, "overdrive").is_displayed()
    noise = browser.find_element("name", "noise")
    assert field(browser, "result-noise_error").is_displayed()
    noise.send_keys(Keys.SPACE)
    assert not field(browser, "result-noise_error").is_displayed()


@pytest.mark.parametrize(("typed", "taken", "said"), [
    ("9", 1.32, "Above the range"), ("-1", 1.08, "Below the range"), ("", 1.2, "Not a number"),
])  # fmt: skip
def test_what_is_out_of_range_is_clamped_and_said(typed, taken, said, browser, pages, models):
    show(browser, pages, "complete")
    vdd = field(browser, "vdd")
    vdd.send_keys(Keys.CONTROL + "a", Keys.BACKSPACE)
    vdd.send_keys(typed)
    words = field(browser, "vdd-said").text
    assert said in words
    assert f"{taken}" in words
    assert vdd.get_attribute("aria-invalid") == "true"
    law = Bands(models["complete"]).delay(2e-3, vdd=taken, temp_c=42.5, vcm=0.65, process="typ")
    assert float(result(browser, "delay")) == pytest.approx(float(law.value), rel=1e-6)
    vdd.send_keys(Keys.TAB)
    assert float(vdd.get_attribute("value")) == taken


def test_what_was_not_measured_at_a_point_is_said(browser, pages):
    show(browser, pages, "complete")
    field(browser, "process").send_keys("slow")
    notes = field(browser, "notes").text
    assert "Delay is characterised at temperature 27.0" in notes


def test_an_answer_is_read_out_after_the_last_change(browser, pages):
    show(browser, pages, "complete")
    answer = field(browser, "answer")
    assert answer.get_attribute("aria-live") == "polite"
    browser.execute_async_script("setTimeout(arguments[0], 700)")
    assert "wrong or unresolved" in answer.text
    assert "mean time between failures" in answer.text


@pytest.mark.parametrize("name", ["latch_130n", "complete"])
def test_it_prints_on_a4_with_heads_and_no_cut_figure(name, browser, pages):
    show(browser, pages, name)
    printed = browser.execute_cdp_cmd("Page.printToPDF", {"preferCSSPageSize": True})
    pdf = base64.b64decode(printed["data"])
    assert pdf.startswith(b"%PDF")
    # A4 is 210 mm x 297 mm (ISO 216): 595 x 842 points of 1/72 inch.
    assert b"/MediaBox [0 0 59" in pdf
    assert 4 <= pdf.count(b"/Type /Page\n") <= 16


def test_motion_is_reduced_on_request(browser, pages):
    show(browser, pages, "complete")
    media = {"features": [{"name": "prefers-reduced-motion", "value": "reduce"}]}
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", media)
    behaviour = "return getComputedStyle(document.documentElement).scrollBehavior"
    assert browser.execute_script(behaviour) == "auto"
