"""Limits are met, not met, or not decided: by the interval, not by the value."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from behavgen.limits import Limit
from behavgen.reference import Reference
from behavgen.regress.limit_verdicts import limit_verdicts
from tests.example_models import complete_model, minimal_model


def verdict(model, **limit):
    (found,) = limit_verdicts(model, [Limit(**limit)])
    return found


def test_the_interval_decides(first):
    at = {"of": "noise", "process": "typ", "vdd_v": 1.0}
    sigma = verdict(first, **at, below=1.0).estimate
    assert sigma.low < sigma.value < sigma.high
    assert verdict(first, **at, below=sigma.high * 1.001).state == "met"
    assert verdict(first, **at, below=sigma.high * 0.999).state == "not decided by the data"
    assert verdict(first, **at, below=sigma.low * 1.001).state == "not decided by the data"
    assert verdict(first, **at, below=sigma.low * 0.999).state == "not met"
    assert verdict(first, **at, above=sigma.low * 0.999).state == "met"
    assert verdict(first, **at, above=sigma.high * 1.001).state == "not met"


def test_an_open_condition_means_everywhere(first):
    # The delay grows as the supply falls: the lowest supply decides.
    found = verdict(first, of="delay", overdrive_v=1e-3, process="typ", below=1.0)
    assert found.condition.vdd_v == 0.9
    expected = Reference(first).delay(1e-3, vdd=0.9, process="typ")
    assert found.estimate.value == pytest.approx(float(expected))
    # Without a process the slower one decides, as far as it was measured.
    every = verdict(first, of="delay", overdrive_v=1e-3, below=1.0)
    slow = float(Reference(first).delay(1e-3, vdd=1.0, process="slow"))
    assert every.estimate.value == pytest.approx(max(slow, float(expected)))


def test_offset_adds_sigmas_of_mismatch(first):
    plain = verdict(first, of="offset", below=1.0).estimate
    wide = verdict(first, of="offset", sigmas=3.0, below=1.0).estimate
    spread = next(p for p in first.parameters if p.name == "mismatch_sigma_v").estimate
    assert wide.value == pytest.approx(plain.value + 3.0 * spread.value, rel=0.2)
    assert wide.high - wide.value > 3.0 * (spread.high - spread.value) * 0.99


def test_time_between_failures_follows_the_exponential_law():
    # Minimal model: W = 2 V_K exp(-(t - t_K)/tau) at all conditions, a uniform input without
    # noise: MTBF = span / (W f_clk), H. Veendrick, IEEE JSSC 1980.
    tau, at_node = np.exp(-25.328436), np.exp(-24.412145)
    resolve, span, clock = 500e-12, 1.0, 1e9
    window = 2.0 * 0.5 * np.exp(-(resolve - at_node) / tau)
    found = verdict(
        minimal_model(), of="time_between_failures", span_v=span, clock_hz=clock, above=1.0
    )
    assert found.estimate.value == pytest.approx(span / (window * clock), rel=1e-6)


@pytest.mark.parametrize(
    "limit",
    [
        {"of": "tau", "below": 1e-9},
        {"of": "window", "resolve_time_s": 4e-10, "below": 1.0},
        {"of": "error", "overdrive_v": 5e-3, "below": 1.0},
        {"of": "error", "input_v": 5e-3, "clock_hz": 1e9, "below": 1.1},
        {"of": "reset_delay", "below": 1e-9},
        {"of": "memory", "reset_time_s": 1e-10, "below": 1.0},
        {"of": "energy", "overdrive_v": 1e-3, "below": 1e-9},
        {"of": "mismatch", "below": 1.0},
    ],
)
def test_every_number_can_be_limited(limit):
    found = verdict(complete_model(), **limit)
    assert found.state == "met"
    assert found.estimate.value > 0.0


def test_outside_the_characterised_range_nothing_is_decided(first):
    found = verdict(first, of="noise", vdd_v=1.3, below=1.0)
    assert found.state == "not decided by the data"
    assert "outside" in found.reason


def test_what_is_not_characterised_is_said(first):
    without = replace(first, mismatch=None)
    found = verdict(without, of="offset", sigmas=3.0, below=1.0)
    assert (found.state, found.reason) == ("not characterised", "no mismatch")
    assert verdict(first, of="delay", overdrive_v=1e-3, process="fast", below=1.0).reason == (
        "no process fast"
    )
