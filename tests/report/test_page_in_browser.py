"""The page in a real browser: nothing is requested, refused, hidden or cut off."""

import json

import pytest
from selenium import webdriver
from selenium.webdriver.chrome.options import Options
from selenium.webdriver.chrome.service import Service

from behavgen.report.page import report_page
from tests.example_models import full_model, minimal_model, renamed_pins_model
from tests.report.sample_cells import failing_check, many_conditions_model, passing_check

pytestmark = pytest.mark.slow

FLAGS = ("--headless", "--no-sandbox", "--disable-gpu", "--disable-background-networking",
         "--disable-component-update", "--disable-sync", "--no-first-run")  # fmt: skip
CASES = {
    "many": (many_conditions_model, passing_check),
    "full": (full_model, failing_check),
    "minimal": (minimal_model, None),
    "renamed": (renamed_pins_model, None),
}


@pytest.fixture(scope="module")
def pages(tmp_path_factory):
    folder = tmp_path_factory.mktemp("pages")
    for name, (model_of, check_of) in CASES.items():
        model = model_of()
        html = report_page(model, check_of(model) if check_of else None)
        (folder / f"{name}.html").write_text(html, encoding="utf-8")
    return folder


@pytest.fixture(scope="module")
def browser(tmp_path_factory):
    options = Options()
    options.binary_location = "/usr/bin/chromium"
    for flag in (*FLAGS, f"--user-data-dir={tmp_path_factory.mktemp('profile')}"):
        options.add_argument(flag)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    driver = webdriver.Chrome(options=options, service=Service("/usr/bin/chromedriver"))
    yield driver
    driver.quit()


@pytest.fixture(params=[(name, width, theme) for name in CASES
                        for width, theme in ((390, "light"), (1280, "light"), (390, "dark"))],
                ids=lambda p: "-".join(map(str, p)))  # fmt: skip
def shown(request, pages, browser):
    name, width, theme = request.param
    browser.get("about:blank")
    browser.execute_cdp_cmd("Emulation.setDeviceMetricsOverride", {
        "width": width, "height": 900, "deviceScaleFactor": 1, "mobile": width < 600})  # fmt: skip
    browser.execute_cdp_cmd("Emulation.setEmulatedMedia", {
        "features": [{"name": "prefers-color-scheme", "value": theme}]})  # fmt: skip
    for log in ("browser", "performance"):
        browser.get_log(log)
    address = (pages / f"{name}.html").as_uri()
    browser.get(address)
    return browser, address, width, theme


def requested(driver):
    events = [json.loads(entry["message"])["message"] for entry in driver.get_log("performance")]
    sent = [e for e in events if e["method"] == "Network.requestWillBeSent"]
    return [e["params"]["request"]["url"] for e in sent]


def test_the_page_stands_alone_and_fits(shown):
    driver, address, width, theme = shown
    assert driver.get_log("browser") == []
    assert {url for url in requested(driver) if not url.startswith("data:")} == {address}
    sizes = driver.execute_script(
        "return [document.documentElement.scrollWidth, document.documentElement.clientWidth]"
    )
    assert sizes[0] == sizes[1] <= width
    hidden = driver.execute_script(
        "return [...document.querySelectorAll('svg[role=img]')].filter(s => {"
        "const b = s.getBoundingClientRect(); return !(b.width > 60 && b.height > 60 && "
        "b.left >= 0 && b.right <= window.innerWidth)}).map(s => s.textContent.slice(0, 60))"
    )
    assert hidden == []
    ground = driver.execute_script("return getComputedStyle(document.body).backgroundColor")
    assert ground == {"light": "rgb(251, 250, 246)", "dark": "rgb(21, 25, 28)"}[theme]


def test_words_in_drawings_are_legible_and_inside(shown):
    """Common practice: nothing below 8 px; and no label may leave its drawing."""
    driver, *_ = shown
    small = driver.execute_script(
        "return [...document.querySelectorAll('svg[role=img] text')].filter(t => {"
        "const s = t.ownerSVGElement.getBoundingClientRect(), b = t.getBoundingClientRect();"
        "return b.height < 8 || b.left < s.left - 8 || b.right > s.right + 8}"
        ").map(t => t.textContent)"
    )
    assert small == []


def test_tables_wider_than_the_screen_scroll_by_themselves(shown):
    driver, *_ = shown
    stuck = driver.execute_script(
        "return [...document.querySelectorAll('.scroll')].filter(s => "
        "getComputedStyle(s).overflowX !== 'auto' || s.tabIndex !== 0).length"
    )
    assert stuck == 0
