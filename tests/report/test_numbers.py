"""Numbers in print: known spellings, and that no digit is invented or lost."""

import doctest

import pytest
from hypothesis import given
from hypothesis import strategies as st

from behavgen.model import Estimate, Range
from behavgen.report import numbers
from behavgen.report.numbers import (
    count_text,
    estimate_text,
    interval_text,
    percent_text,
    probability_text,
    range_text,
    si_text,
    temperature_text,
    volts_range_text,
)

NBSP = "\N{NO-BREAK SPACE}"
POWER = {"": 0, "m": -3, "µ": -6, "n": -9, "p": -12, "f": -15, "k": 3}


def read_back(text: str, unit: str) -> float:
    """Read a printed number independently of how it was printed."""
    number, _, symbol = text.partition(NBSP)
    prefix = symbol.removesuffix(unit)
    return float(number.replace("\N{MINUS SIGN}", "-")) * 10.0 ** POWER[prefix]


def test_the_examples_in_the_docstrings_hold():
    assert doctest.testmod(numbers).failed == 0


@given(st.floats(1e-14, 1e3), st.floats(1e-3, 0.5))
def test_an_estimate_is_printed_to_within_its_interval(value, relative):
    estimate = Estimate(value=value, low=value * (1 - relative), high=value * (1 + relative))
    shown = read_back(estimate_text(estimate, "s"), "s")
    # Two digits of the half width: rounding hides at most a twentieth of it.
    assert abs(shown - value) <= 0.0501 * relative * value


@given(st.floats(-1e3, 1e3).filter(lambda v: abs(v) > 1e-13))
def test_an_engineering_number_keeps_three_digits(value):
    assert read_back(si_text(value, "V"), "V") == pytest.approx(value, rel=5.1e-3)


def test_value_and_interval_share_prefix_and_decimals():
    offset = Estimate(value=6.5e-6, low=-12e-6, high=25e-6)
    assert (estimate_text(offset, "V"), interval_text(offset, "V")) == (
        f"6{NBSP}µV",  # a half width of 18.5 uV leaves nothing to say behind the point
        f"\N{MINUS SIGN}12 … 25{NBSP}µV",
    )


def test_an_estimate_without_interval_says_so():
    assert interval_text(Estimate(value=25e-12), "s") == "no interval"
    assert estimate_text(Estimate(value=25e-12), "s") == f"25{NBSP}ps"


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        (percent_text(0.1), f"10{NBSP}%"),
        (percent_text(0.001), f"0.10{NBSP}%"),
        (percent_text(0.0), f"0{NBSP}%"),
        (percent_text(float("nan")), "not finite"),
        (probability_text(1e-9), f"<{NBSP}0.001"),
        (probability_text(0.153), "0.15"),
        (count_text(1234567), "1\N{NARROW NO-BREAK SPACE}234\N{NARROW NO-BREAK SPACE}567"),
        (temperature_text(233.15), f"\N{MINUS SIGN}40{NBSP}°C"),
        (range_text(Range(low=233.15, high=398.15), "K"), f"\N{MINUS SIGN}40 … 125{NBSP}°C"),
        (range_text(None, "V"), "not characterised"),
        (volts_range_text(Range(low=0.8, high=1.2)), f"0.8 … 1.2{NBSP}V"),
        (volts_range_text(Range(low=1.2, high=1.2)), f"1.2{NBSP}V"),
        (si_text(1e-30, "s"), f"0{NBSP}s"),
    ],
)
def test_known_spellings(text, expected):
    assert text == expected
