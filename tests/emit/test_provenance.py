"""What the head of an emitted file says."""

from __future__ import annotations

import re

from behavgen.emit.provenance import header_lines, header_sections
from tests.example_models import full_model, minimal_model


def sections(model):
    return {section.title: section.lines for section in header_sections(model)}


def test_it_says_where_the_model_is_valid():
    valid = sections(full_model())["Valid for"]
    for fact in ("supply 1.08 V to 1.32 V", "temperature -40 degC to 125 degC",
                 "common mode 500 mV to 800 mV", "off below a supply of 540 mV",
                 "process typ (code 0)"):  # fmt: skip
        assert fact in valid
    assert "supply not characterised: has no influence" in sections(minimal_model())["Valid for"]


def test_a_process_measured_in_a_smaller_range_says_so():
    (line,) = [one for one in sections(full_model())["Valid for"] if "slow" in one]
    assert "scaled from typ" in line
    assert "common mode 600 mV to 700 mV" in line


def test_tables_are_named_with_the_beginning_of_their_hash():
    assert sections(full_model())["Made from"][0] == "delay: delay.csv, 3 rows, sha256 000000000000"
    assert "Made from" not in sections(minimal_model())


def test_every_absent_effect_is_named():
    (absent,) = sections(minimal_model())["Does not model"]
    for effect in ("offset", "mismatch", "noise", "reset delay", "memory", "aperture", "energy",
                   "kickback"):  # fmt: skip
        assert effect in absent
    (absent,) = sections(full_model())["Does not model"]
    assert "offset" not in absent


def test_it_says_how_well_the_model_fits_and_what_the_fit_noticed():
    found = sections(full_model())
    assert found["Fits the tables"] == (
        "delay: 3 rows, 1 condition; rms up to 0.4 %, worst up to 0.9 %",
    )
    assert found["Note"] == full_model().notices
    assert "clk 50 % to outp-outn at half supply" in " ".join(found["Models"])


def test_cautions_and_the_owner_are_always_there():
    for model in (full_model(), minimal_model()):
        text = " ".join(header_lines(header_sections(model)))
        for word in ("sign-off", "safety", "integrity level", "licence", "not for security",
                     "belongs to you", "behavgen 0.1.0"):  # fmt: skip
            assert word in text


def test_the_same_model_gives_the_same_lines_without_a_date():
    lines = header_lines(header_sections(full_model()), 80)
    assert lines == header_lines(header_sections(full_model()), 80)
    assert max(map(len, lines)) <= 80
    assert not re.search(r"\b20\d\d\b|\d\d:\d\d", "\n".join(lines))
