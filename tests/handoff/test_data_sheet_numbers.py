"""The data sheet's calculator in a real browser: its numbers equal the reference's.

The reference is `behavgen.prediction` and `behavgen.bands`, which share no line with the script.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.special import log_ndtr

from behavgen.applied_inputs import Levels, Uniform
from behavgen.bands import Band, Bands
from behavgen.handoff.data_sheet_tool import calculator
from behavgen.prediction import predict
from tests.handoff.data_sheet_models import DEMO_CELLS
from tests.handoff.data_sheet_pages import APPLY, show

pytestmark = pytest.mark.slow

WITH_TOOL = ("complete", "delay_only", "noise_only", "many", "latch_130n", *DEMO_CELLS)
SETTINGS = 200
TOLERANCE = 1e-6
"""Relative; of a number too small or large for a double, of its logarithm, a thousandth of it."""
CERTAIN = -1e-9
"""ln P from which rounding alone decides how certain is certain: no interval is compared."""


def random_settings(tool, seed):
    rng = np.random.default_rng(seed)

    def number(control):
        share = rng.random()
        if control.logarithmic:
            value = control.low * (control.high / control.low) ** share
        else:
            value = control.low + share * (control.high - control.low)
        return min(max(float(f"{value:.7g}"), control.low), control.high)

    return [
        {
            "fields": {control.name: number(control) for control in tool.controls},
            "process": str(rng.choice(tool.processes)),
            "kind": str(rng.choice(["overdrive", "span"])),
            "noise": bool(rng.random() < 0.75),
        }
        for _ in range(SETTINGS)
    ]


def expected(model, tool, settings):
    """Return what the reference says at settings of one kind, by the name of the page's row."""
    si = {c.name: c.scale * np.array([s["fields"][c.name] for s in settings])
          for c in tool.controls}  # fmt: skip
    at = {name: si[name] for name in ("vdd", "temp_c", "vcm") if name in si}
    at["process"] = np.array([s["process"] for s in settings])
    model = model if settings[0]["noise"] else replace(model, noise=None)
    if settings[0]["kind"] == "span":
        inputs = Uniform(span_v=si["span"])
    else:
        inputs = Levels.of(si["overdrive"], from_trip_point=True)
    waits = {"resolve_time_s": si["resolve"], "clock_hz": si["clock"]} if model.delay else {}
    found, bands = predict(model, inputs, **waits, **at), Bands(model)
    return {
        "noise_error": found.log10_noise_error,
        "unresolved": found.log10_unresolved,
        "error": found.log10_error,
        "mtbf": found.log10_time_between_failures_s,
        "delay": found.delay_s,
        "window": log10_window(model, bands.log_window(si["resolve"], **at)) if waits else None,
        "sigma": if_known(bands.noise_sigma(**at), model.noise.surface.covariance)
        if model.noise else None,
        "offset": if_known(bands.offset(**at), model.offset.surface.covariance)
        if model.offset else None,
    }  # fmt: skip


def if_known(band, covariance):
    unknown = np.full_like(band.value, np.nan)
    return band if covariance else Band(value=band.value, low=unknown, high=unknown)


def log10_window(model, band):
    log10 = Band(**{k: getattr(band, k) / math.log(10.0) for k in ("value", "low", "high")})
    return if_known(log10, model.delay.scatter or model.delay.lack_of_fit)


def groups(settings):
    """Return the indices of the settings that share kind of input and noise."""
    kinds = [(s["kind"], s["noise"]) for s in settings]
    return [[i for i, kind in enumerate(kinds) if kind == one] for one in dict.fromkeys(kinds)]


LOGARITHMS = ("noise_error", "unresolved", "error", "mtbf", "window")


def deviation(name, shown, wanted):
    """Return relative errors of numbers that stand for themselves or are logarithms."""
    with np.errstate(invalid="ignore", over="ignore", divide="ignore"):
        error = np.abs(shown / wanted - 1.0)
        if name in LOGARITHMS:
            itself = np.abs(np.expm1((shown - wanted) * math.log(10.0)))
            error = np.where(np.abs(wanted) < 300.0, itself, 1e3 * error)
    return np.where(shown == wanted, 0.0, error)


def compared(name, band, part):
    """Return where a number has a meaning: known, and not an interval about certainty."""
    known = ~np.isnan(getattr(band, part))
    if part == "value":
        return known
    certain = name in ("noise_error", "unresolved", "error") and band.value > CERTAIN
    return known & np.isfinite(band.value) & ~np.asarray(certain)


def deviations(driver, model):
    """Return the errors of all numbers of the page shown, at random settings, by row and part."""
    tool = calculator(model)
    settings = random_settings(tool, seed=20)
    shown = driver.execute_script(APPLY, settings)
    errors = {}
    for members in groups(settings):
        wanted = expected(model, tool, [settings[i] for i in members])
        for row, band in wanted.items():
            found = [shown[i][row] for i in members]
            if band is None:
                assert found == [None] * len(members), row
                continue
            for place, part in enumerate(("value", "low", "high")):
                numbers = np.array([float(f[place].replace("Infinity", "inf")) for f in found])
                where = compared(row, band, part)
                errors.setdefault((row, part), []).extend(
                    deviation(row, numbers, getattr(band, part))[where]
                )
    return errors


@pytest.mark.parametrize("name", WITH_TOOL)
def test_the_numbers_equal_the_reference(name, browser, pages, models):
    show(browser, pages, name)
    errors = deviations(browser, models[name])
    assert sum(map(len, errors.values())) >= SETTINGS
    assert {at: max(e) for at, e in errors.items() if e and not max(e) < TOLERANCE} == {}


def test_another_model_is_told_from_this_one(browser, pages, models):
    """A sigma and a tau that differ by a part in 1e5 do not pass for the reference's."""
    show(browser, pages, "complete")
    model = models["complete"]
    other = replace(
        model,
        noise=replace(model.noise, surface=scaled(model.noise.surface)),
        delay=replace(model.delay, tau=scaled(model.delay.tau)),
    )
    errors = deviations(browser, other)
    for row in ("noise_error", "unresolved", "error", "mtbf", "delay", "window", "sigma"):
        assert max(errors[row, "value"]) > TOLERANCE, row
    assert max(errors["offset", "value"]) < TOLERANCE


def scaled(surface):
    """Return a surface of logarithms whose values are larger by a part in 1e5."""
    variants = tuple(
        replace(v, coefficients=(v.coefficients[0] + 1e-5, *v.coefficients[1:]))
        for v in surface.variants
    )
    return replace(surface, variants=variants)


def test_both_tails_of_the_normal_distribution(browser, pages):
    """From certainty to 1e-300 and on to 1e-10000, against scipy; and the quantile back."""
    show(browser, pages, "noise_only")
    z = np.concatenate([np.linspace(-40.0, 9.0, 981), [-200.0, -150.0, -3.0, 0.0, 3.0, 30.0]])
    script = "return arguments[0].map(logNormalBelow)"
    below = np.array(browser.execute_script(script, z.tolist()))
    assert below == pytest.approx(log_ndtr(z), rel=1e-12, abs=0.0)
    assert below.min() < -1e4
    back = browser.execute_script("return arguments[0].map(normalQuantile)", below.tolist())
    # Near certainty ln P has few digits left to tell z from.
    assert np.array(back)[z < 5.0] == pytest.approx(z[z < 5.0], rel=1e-9, abs=1e-9)


@pytest.mark.parametrize(("call", "text"), [
    ("powerText(Math.log10(0.0316))", "0.0316"),
    ("powerText(-653.4809)", "3.30 \N{MULTIPLICATION SIGN} 10⁻⁶⁵⁴"),
    ("powerText(-4.0001)", "1.00 \N{MULTIPLICATION SIGN} 10⁻⁴"),
    ("powerText(-Infinity)", "0"),
    ("waitText(-7)", "100.0 ns"),
    ("waitText(4)", "2.78 hours"),
    ("waitText(8)", "3.17 years"),
    ("waitText(30)", "> 10²² years"),
    ("waitText(Infinity)", "no failure"),
    ("siText(1.51e-9, 's')", "1.510 ns"),
    ("siText(-2e-5, 'V')", "\N{MINUS SIGN}20.00 µV"),
    ("siText(0, 'V')", "0 V"),
])  # fmt: skip
def test_numbers_read_as_people_write_them(call, text, browser, pages):
    """A year has 365.25 days of 86400 s; the universe is 13.8e9 years old."""
    show(browser, pages, "noise_only")
    shown = browser.execute_script(f"return {call}")
    assert shown.replace("\N{NO-BREAK SPACE}", " ") == text


def test_a_narrow_window_without_noise_is_window_over_span(browser, pages, models):
    """W / S (Veendrick 1980), sixty decades below a span."""
    show(browser, pages, "delay_only")
    setting = {"process": "nominal", "kind": "span", "noise": False,
               "fields": {"span": 1000, "resolve": 1500, "clock": 1}}  # fmt: skip
    (rows,) = browser.execute_script(APPLY, [setting])
    tau_s, at_half_volt_s = math.exp(-25.328436), math.exp(-24.412145)
    log_window = math.log(2.0 * 0.5) - (1500e-12 - at_half_volt_s) / tau_s
    assert log_window < -60.0 * math.log(10.0)
    assert float(rows["unresolved"][0]) == pytest.approx(log_window / math.log(10.0), abs=1e-7)
