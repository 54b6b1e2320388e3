"""A browser, and data sheets to show in it."""

from __future__ import annotations

import pytest
from selenium import webdriver
from selenium.webdriver.chrome.options import Options
from selenium.webdriver.chrome.service import Service

from behavgen.handoff.data_sheet import data_sheet
from tests.handoff.data_sheet_models import HAND_MADE, fitted_models
from tests.report.sample_cells import failing_check, many_conditions_model, passing_check

FLAGS = ("--headless", "--no-sandbox", "--disable-gpu", "--disable-background-networking",
         "--disable-component-update", "--disable-sync", "--no-first-run")  # fmt: skip
WATCH = "window.violations = []; document.addEventListener('securitypolicyviolation', " \
        "(event) => window.violations.push(event.violatedDirective));"  # fmt: skip


@pytest.fixture(scope="session")
def models(tmp_path_factory):
    made = {name: make() for name, make in HAND_MADE.items()}
    fitted = fitted_models(tmp_path_factory.mktemp("demo"))
    return {**made, "many": many_conditions_model(), **fitted}


@pytest.fixture(scope="session")
def pages(tmp_path_factory, models):
    folder = tmp_path_factory.mktemp("pages")
    for name, model in models.items():
        check = {"many": passing_check, "complete": failing_check}.get(name)
        note = "THE CHECK FAILED: an invented note." if name == "complete" else ""
        html = data_sheet(model, check(model) if check else None, caution_note=note)
        (folder / f"{name}.html").write_text(html, encoding="utf-8")
    return folder


@pytest.fixture(scope="session")
def browser(tmp_path_factory):
    options = Options()
    options.binary_location = "/usr/bin/chromium"
    for flag in (*FLAGS, f"--user-data-dir={tmp_path_factory.mktemp('profile')}"):
        options.add_argument(flag)
    options.set_capability("goog:loggingPrefs", {"browser": "ALL", "performance": "ALL"})
    driver = webdriver.Chrome(options=options, service=Service("/usr/bin/chromedriver"))
    driver.execute_cdp_cmd("Page.addScriptToEvaluateOnNewDocument", {"source": WATCH})
    yield driver
    driver.quit()
