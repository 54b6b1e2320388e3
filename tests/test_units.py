"""Text <-> SI against exact decimal arithmetic and hand-written cases."""

from __future__ import annotations

import math
from decimal import Decimal

import pytest
from hypothesis import given
from hypothesis import strategies as st

from behavgen.units import (
    SI_PREFIXES,
    UnitError,
    default_unit,
    find_unit,
    format_celsius,
    format_si,
    header_stem,
    parse_si,
    unit_of_header,
)

MANTISSAS = st.decimals(min_value=Decimal("-9999"), max_value=Decimal("9999"), places=4)


@given(mantissa=MANTISSAS, prefix=st.sampled_from(sorted(SI_PREFIXES)))
def test_a_prefixed_cell_is_the_float_nearest_to_its_decimal_value(mantissa, prefix):
    exact = mantissa.scaleb(SI_PREFIXES[prefix])
    assert parse_si(f"{mantissa:f}{prefix}", "s") == float(exact)
    assert parse_si(f"{mantissa:f} {prefix}s", "s") == float(exact)


@given(mantissa=st.integers(-9999, 9999), exponent=st.integers(-15, 3))
def test_an_exponent_and_a_prefix_add_up(mantissa, exponent):
    exact = Decimal(mantissa).scaleb(exponent - 12)
    assert parse_si(f"{mantissa}e{exponent}p", "s") == float(exact)


@given(value=st.floats(1e-23, 1e13), sign=st.sampled_from([1.0, -1.0]))
def test_text_for_people_is_ascii_and_keeps_three_digits(value, sign):
    text = format_si(sign * value, "V")
    assert text.isascii()
    assert parse_si(text, "V") == pytest.approx(sign * value, rel=0.5e-2)
    assert 1 <= abs(float(text.split()[0])) < 1000


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (1.51e-9, "s", "1.51 ns"),
        (1e-6, "V", "1 uV"),
        (0.3, "V", "300 mV"),
        (41e-12, "s", "41 ps"),
        (9.996e-10, "s", "1 ns"),  # rounding carries into the next prefix
        (0.0, "V", "0 V"),
        (-3.6e-15, "C", "-3.6 fC"),
        (1.2e4, "ohm", "12 kohm"),
        (math.nan, "s", "nan s"),
    ],
)
def test_format_si(value, unit, text):
    assert format_si(value, unit) == text


def test_mega_is_a_capital_and_milli_is_not():
    assert parse_si("1M", "V") == 1e6
    assert parse_si("1m", "V") == 1e-3


@pytest.mark.parametrize("micro", ["u", "\N{MICRO SIGN}", "\N{GREEK SMALL LETTER MU}"])
def test_all_three_micros_are_read(micro):
    assert parse_si(f"12{micro}V", "V") == 12e-6


@pytest.mark.parametrize(
    ("text", "kelvin"),
    [("27", 300.15), ("-40 C", 233.15), ("300K", 300.0), ("398.15 K", 398.15), ("0degC", 273.15)],
)
def test_temperatures_are_celsius_unless_they_say_kelvin(text, kelvin):
    assert parse_si(text, "K") == pytest.approx(kelvin, abs=1e-9)


def test_the_letter_c_is_a_temperature_or_a_charge_by_what_is_expected():
    assert parse_si("3", "C", unit_of_header("q_fC", "C")) == 3e-15
    assert parse_si("3", "C", unit_of_header("q_C", "C")) == 3.0
    assert parse_si("0", "K", unit_of_header("temp_C", "K")) == 273.15
    assert parse_si("300", "K", unit_of_header("temp_K", "K")) == 300.0


@pytest.mark.parametrize(
    "text",
    ["", "abc", "1,5", "12x", "1 2", "--1", "nan", "inf", "1e999", "0x10", "1_000", "12pp", "12 V"],
)
def test_what_is_no_number_is_refused(text):
    with pytest.raises(UnitError):
        parse_si(text, "s")


def test_a_decimal_comma_is_named_as_such():
    with pytest.raises(UnitError, match="decimal comma"):
        parse_si("1,5", "V")


def test_a_prefix_in_a_cell_and_one_in_the_header_are_a_contradiction():
    with pytest.raises(UnitError, match="prefix of its own"):
        parse_si("12p", "s", find_unit("ps", "s"))
    assert parse_si("12ps", "s", find_unit("ns", "s")) == 12e-12  # a whole unit leaves no doubt


@pytest.mark.parametrize("header", ["delay_ps", "delay [ps]", "delay (ps)", "delay(ps)", "t_d_ps"])
def test_headers_carry_their_unit(header):
    assert parse_si("41", "s", unit_of_header(header, "s")) == 41e-12


@pytest.mark.parametrize("header", ["delay", "V(out)", "weight_after", "level_k", "_ps", "t_rel"])
def test_headers_without_a_unit_carry_none(header):
    assert unit_of_header(header, "s" if header != "V(out)" else "V") is None


@pytest.mark.parametrize(
    ("header", "dimension"),
    [("delay [xs]", "s"), ("delay (mV)", "s"), ("delay_V", "s"), ("delay_PS", "s"), ("v [C]", "V")],
)
def test_a_unit_that_cannot_be_meant_is_refused(header, dimension):
    with pytest.raises(UnitError):
        unit_of_header(header, dimension)


def test_the_stem_of_a_header_is_what_remains_without_the_unit():
    stems = {"delay_ps": "delay", "delay [ps]": "delay", "t_res_s": "t_res", "V(out)": "V(out)"}
    assert {header: header_stem(header) for header in stems} == stems


@given(mantissa=MANTISSAS)
def test_a_number_in_a_small_unit_is_the_float_nearest_to_its_decimal_value(mantissa):
    assert parse_si(f"{mantissa:f}", "J", find_unit("fJ", "J")) == float(mantissa.scaleb(-15))
    assert parse_si(f"{mantissa:f}", "V", default_unit("V")) == float(mantissa)


def test_celsius_for_people():
    assert [format_celsius(k) for k in (233.15, 300.15, 273.15)] == [
        "-40 degC",
        "27 degC",
        "0 degC",
    ]
