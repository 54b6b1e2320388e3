"""What a drift does is told in the numbers that users decide by, old and new."""

from __future__ import annotations

import pytest

from behavgen.limits import Limit
from behavgen.model import Condition
from behavgen.reference import Reference
from behavgen.regress.compare import compare
from behavgen.regress.consequences import consequences
from tests.regress.invented_cells import Truth, drawn_model

SLOW = Condition(process="slow", vdd_v=1.0)


def by_what(found):
    return {one.what: one for one in found}


def test_delays_and_waits_of_a_slower_latch(first, slower):
    found = by_what(consequences(first, slower, [SLOW]))
    delay = found["delay at 1 mV overdrive"]
    for model, told in ((first, delay.old), (slower, delay.new)):
        expected = Reference(model).delay(1e-3, vdd=1.0, process="slow")
        assert told.value == pytest.approx(float(expected))
        assert told.low < told.value < told.high
    wait = next(one for what, one in found.items() if what.startswith("time between failures"))
    assert wait.unit == "log10 s"
    assert wait.new.value < wait.old.value


def test_time_between_failures_falls_by_the_factor_of_the_window(first, slower):
    # At a fixed time W = W0 exp(-t/tau), and failures go with W: one law, two numbers.
    found = consequences(first, slower, [SLOW])
    window = next(one for one in found if one.what.startswith("unresolved window"))
    wait = next(one for one in found if one.what.startswith("time between failures"))
    fall = 10.0 ** (wait.old.value - wait.new.value)
    assert fall == pytest.approx(window.new.value / window.old.value, rel=1e-3)


def test_more_noise_means_more_errors(first):
    noisy = drawn_model(Truth(sigma_v=6e-4 * 1.2), seed=2)
    found = by_what(consequences(first, noisy, [Condition(process="typ", vdd_v=1.0)]))
    error = found["error by noise at 1 mV overdrive"]
    assert error.unit == "log10"
    assert error.new.value > error.old.value


def test_what_is_as_before_is_not_told(first):
    assert consequences(first, first, [SLOW]) == ()


def test_the_settings_of_limits_are_told_too(first, slower):
    limit = Limit(of="delay", overdrive_v=2e-3, process="slow", below=1.0)
    found = by_what(compare(first, slower, settings=[limit]).consequences)
    told = found["delay at 2 mV overdrive in slow"]
    assert told.new.value / told.old.value == pytest.approx(1.03, abs=0.01)
