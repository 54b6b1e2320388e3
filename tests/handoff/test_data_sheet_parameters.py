"""Min / typ / max against closed forms and against points drawn anywhere in the range."""

import math
from dataclasses import replace

import numpy as np
import pytest

from behavgen.bands import Bands
from behavgen.handoff.data_sheet_parameters import places, typical_rows
from behavgen.reference import Reference
from behavgen.units import parse_si
from tests.example_models import BOX, complete_model, minimal_model
from tests.handoff.data_sheet_models import mismatch_only, noise_only, one_delay_two_supplies


def in_si(text, unit):
    """Read a printed number back with the program's own reader of user input."""
    dimension = unit[-1]
    return parse_si(text.replace("\N{MINUS SIGN}", "-") + unit.replace("µ", "u"), dimension)


def rows_of(model):
    return {f"{r.name} {r.detail}".strip(): r for r in typical_rows(model, Bands(model))}


def test_the_logarithmic_law_in_closed_form():
    """tau = exp(-25.328436) s; delay = exp(-24.412145) s + tau ln(0.5 V / overdrive)."""
    rows = rows_of(minimal_model())
    tau_s, at_half_volt_s = math.exp(-25.328436), math.exp(-24.412145)
    tau = rows["Regeneration time constant"]
    assert in_si(tau.typical.value, tau.unit) == pytest.approx(tau_s, rel=5e-4)
    for text, overdrive_v in (("10\N{NO-BREAK SPACE}µV", 1e-5), ("100\N{NO-BREAK SPACE}mV", 0.1)):
        row = rows[f"Delay at {text} overdrive"]
        expected = at_half_volt_s + tau_s * math.log(0.5 / overdrive_v)
        assert in_si(row.typical.value, row.unit) == pytest.approx(expected, rel=5e-4)
        assert row.low.value == row.high.value == "\N{EN DASH}"


def test_intervals_are_those_of_the_normal_distribution():
    """Sigma 400 uV with a variance of 1e-4 of its logarithm: exp(+-1.959964 * 0.01)."""
    row = rows_of(noise_only())["Noise sigma of one decision"]
    low, high = (in_si(end, row.unit) for end in row.typical.interval.split(" … "))
    assert low == pytest.approx(4e-4 * math.exp(-0.01959964), rel=5e-4)
    assert high == pytest.approx(4e-4 * math.exp(0.01959964), rel=5e-4)
    spread = rows_of(mismatch_only())["Mismatch sigma between instances"]
    low, high = (in_si(end, spread.unit) for end in spread.typical.interval.split(" … "))
    # 51 instances: 1 / sqrt(2 * 50) = 0.1 of relative standard error.
    assert low == pytest.approx(5e-3 * math.exp(-0.1959964), rel=5e-4)
    assert high == pytest.approx(5e-3 * math.exp(0.1959964), rel=5e-4)


def test_the_interval_of_tau_follows_from_the_scatter():
    """2 % of standard error with 10 degrees of freedom, whose 97.5 % quantile is 2.228139.

    Source of the quantile: tables of Student's distribution, e.g. M. Abramowitz, I. A. Stegun,
    Handbook of Mathematical Functions, 1964, table 26.10.
    """
    model = minimal_model()
    delay = replace(model.delay, scatter=((4e-4, 0.0), (0.0, 1e-4)), scatter_freedom=10)
    row = rows_of(replace(model, delay=delay))["Regeneration time constant"]
    low, high = (in_si(end, row.unit) for end in row.typical.interval.split(" … "))
    tau_s = math.exp(-25.328436)
    assert low == pytest.approx(tau_s * math.exp(-2.228139 * 0.02), rel=5e-4)
    assert high == pytest.approx(tau_s * math.exp(2.228139 * 0.02), rel=5e-4)


def test_no_operating_point_lies_outside_min_and_max():
    """500 random points against the extremes of the grid, to a per cent of their distance."""
    model = complete_model()
    rng = np.random.default_rng(4)
    at = {
        "vdd": rng.uniform(BOX.vdd_v.low, BOX.vdd_v.high, 500),
        "temp_c": rng.uniform(-40.0, 125.0, 500),
        "vcm": rng.uniform(BOX.vcm_v.low, BOX.vcm_v.high, 500),
        "process": rng.choice(["typ", "slow"], 500),
    }
    reference, rows = Reference(model), rows_of(model)
    found = {
        "Trip point nominal instance": reference.offset(**at),
        "Noise sigma of one decision": reference.noise_sigma(**at),
        "Delay at 1\N{NO-BREAK SPACE}mV overdrive": reference.delay(1e-3, **at),
        "Reset delay to the reset state": reference.reset_delay(**at),
    }
    for name, values in found.items():
        row = rows[name]
        low, high = (in_si(n.value, row.unit) for n in (row.low, row.high))
        slack = 0.01 * (high - low)
        assert low - slack <= values.min()
        assert values.max() <= high + slack
        middle = in_si(row.typical.value, row.unit)
        assert low <= middle <= high


def test_what_nothing_moves_has_no_extremes():
    rows = typical_rows(one_delay_two_supplies(), Bands(one_delay_two_supplies()))
    assert {row.low.value for row in rows} == {"\N{EN DASH}"}


def test_corners_are_among_the_places():
    found = places(complete_model())
    corners = {(c.process, c.vdd_v, c.temperature_k, c.vcm_v) for c in found[1:]}
    assert ("slow", BOX.vdd_v.high, BOX.temperature_k.low, BOX.vcm_v.high) in corners
    assert ("typ", BOX.vdd_v.low, BOX.temperature_k.high, BOX.vcm_v.low) in corners
