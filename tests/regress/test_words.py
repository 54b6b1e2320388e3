"""How results are written."""

from __future__ import annotations

import math

import pytest

from behavgen.condition_words import condition_words
from behavgen.model import Condition, Estimate
from behavgen.regress.words import (
    estimate_words,
    number_words,
    share_words,
)


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (1.58e-10, "s", "158 ps"),
        (-2e-5, "V", "-20 uV"),
        (-1.5, "log10", "0.0316"),
        (-653.481, "log10", "3.3e-654"),
        (-math.inf, "log10", "0"),
        (math.inf, "log10 s", "for ever"),
        (9.5, "log10 s", "100.2 years"),
        (40.0, "log10 s", "1e40 s"),
    ],
)
def test_numbers(value, unit, text):
    assert number_words(value, unit) == text


def test_estimates_with_and_without_an_interval():
    assert estimate_words(Estimate(value=1e-3, low=9e-4, high=1.2e-3), "V") == (
        "1 mV (900 uV..1.2 mV)"
    )
    assert estimate_words(Estimate(value=1e-3), "V") == "1 mV"


def test_conditions_say_no_more_than_is_known():
    assert condition_words(Condition()) == ""
    there = Condition(process="ss", vdd_v=1.62, temperature_k=398.15, vcm_v=0.9)
    assert condition_words(there) == "ss, 1.62 V, 125 degC, vcm 900 mV"


def test_shares_have_two_digits():
    assert (share_words(0.0301), share_words(-0.1234)) == ("+3 %", "-12 %")
