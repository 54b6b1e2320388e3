"""Numbers and text as hardware description languages write them."""

from __future__ import annotations

import re
import struct
import subprocess

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from behavgen.emit.literals import (
    bits_literal,
    comment_text,
    range_text,
    real_literal,
    string_literal,
)
from behavgen.model import Range

# IEEE 1800-2017, A.8.7: real_number
REAL_NUMBER = re.compile(r"-?\d+(\.\d+)?([eE][+-]?\d+)?")


def word(value):
    return struct.unpack(">Q", struct.pack(">d", value))[0]


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_a_real_literal_reads_back_to_the_same_bits(value):
    text = real_literal(value)
    assert REAL_NUMBER.fullmatch(text)
    assert "." in text or "e" in text
    assert word(float(text)) == word(value)


def test_icarus_reads_literals_to_the_same_bits(tmp_path):
    rng = np.random.default_rng(5)
    values = rng.normal(size=300) * 10.0 ** rng.integers(-30, 20, 300)
    lines = [f'    $display("%h", $realtobits({real_literal(v)}));' for v in values]
    source = "\n".join(["module top;", "  initial begin", *lines, "  end", "endmodule", ""])
    (tmp_path / "top.sv").write_text(source)
    subprocess.run(["iverilog", "-g2012", "-o", "top", "top.sv"], cwd=tmp_path, check=True)
    done = subprocess.run(["vvp", "-n", "top"], cwd=tmp_path, check=True, capture_output=True)
    assert [int(line, 16) for line in done.stdout.split()] == [word(v) for v in values]


@pytest.mark.parametrize("value", [float("nan"), float("inf"), float("-inf")])
def test_what_no_language_can_write_is_refused(value):
    with pytest.raises(ValueError, match="no literal"):
        real_literal(value)


def test_bits_are_grouped_hexadecimal_digits():
    assert bits_literal(0x9E3779B97F4A7C15) == "64'h9e37_79b9_7f4a_7c15"
    assert bits_literal(255, 32) == "32'h0000_00ff"


@pytest.mark.parametrize(
    ("text", "plain"),
    [
        ("5 \N{MICRO SIGN}V at 25 \N{DEGREE SIGN}C", "5 uV at 25 degC"),
        ("two\nlines\tand  gaps", "two lines and gaps"),
        ("ends in a backslash\\", "ends in a backslash"),
        ("Verst\N{LATIN SMALL LETTER A WITH DIAERESIS}rker", "Verstarker"),
    ],
)
def test_comments_are_plain_and_stay_on_their_line(text, plain):
    assert comment_text(text) == plain


def test_strings_are_quoted():
    assert string_literal('say "50 %" \\ twice') == r'"say \"50 %\" \\ twice"'


def test_ranges_are_written_for_people():
    assert range_text(Range(low=1.08, high=1.32), "V") == "1.08 V to 1.32 V"
    assert range_text(Range(low=233.15, high=398.15), "K") == "-40 degC to 125 degC"
    assert range_text(Range(low=0.5, high=0.5), "V") == "500 mV"
