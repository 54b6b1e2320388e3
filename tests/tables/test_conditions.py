"""Conditions: columns, fixed values, corners by name, processes."""

from __future__ import annotations

import numpy as np
import pytest

RESET = 'quantity = "reset"\nfile = "t.csv"\n'
CORNERS = (
    "[corners.hot]\nprocess = 'ss'\ntemp = 125\nvdd = 1.62\n"
    "[corners.cold]\nprocess = 'ff'\ntemp = -40\nvdd = 1.98\n"
    "[corners.warm]\ntemp = 85\n"
)


def test_a_condition_that_is_not_given_holds_everywhere(read):
    conditions = read({"t.csv": "reset_delay\n1p\n2p\n"}, RESET).reset.conditions
    for values in (conditions.vdd_v, conditions.temperature_k, conditions.vcm_v):
        assert np.isnan(values).tolist() == [True, True]
    assert conditions.process.tolist() == ["", ""]


@pytest.mark.parametrize(
    ("header", "cell", "kelvin"),
    [
        ("temp", "27", 300.15),
        ("temp_C", "-40", 233.15),
        ("temp [degC]", "125", 398.15),
        ("temp_K", "300", 300.0),
        ("temp (K)", "77", 77.0),
        ("temp", "300K", 300.0),
    ],
)
def test_temperatures_are_celsius_unless_the_unit_says_kelvin(read, header, cell, kelvin):
    tables = read({"t.csv": f"reset_delay,{header}\n1p,{cell}\n"}, RESET)
    assert tables.reset.conditions.temperature_k == pytest.approx([kelvin], abs=1e-9)


def test_units_may_say_what_the_header_does_not(read):
    entry = f'{RESET}columns.temp = "T"\nunits = {{ temp = "K", reset_delay = "ps" }}'
    reset = read({"t.csv": "reset_delay,T\n25,300\n"}, entry).reset
    assert reset.conditions.temperature_k.tolist() == [300.0]
    assert reset.reset_delay_s.tolist() == [25e-12]


def test_the_unit_of_a_header_rules_over_a_shared_one(read):
    more = '[defaults]\nunits = { reset_delay = "ps" }\n'
    assert read({"t.csv": "reset_delay_ns\n1\n"}, RESET, more=more).reset.reset_delay_s == [1e-9]


def test_a_value_fixed_for_the_file_may_have_a_unit(read):
    entry = f"{RESET}at = {{ vdd = '1800m', temp = '300 K', vcm = 0.9, process = 'tt' }}"
    tables = read({"t.csv": "reset_delay\n1p\n"}, entry)
    conditions = tables.reset.conditions
    assert (conditions.vdd_v, conditions.temperature_k, conditions.vcm_v) == (1.8, 300.0, 0.9)
    assert tables.processes == ("tt",)


def test_a_shared_fixed_value_gives_way_to_a_column(read):
    more = "[defaults]\nat = { vdd = 1.8 }\n"
    assert read(
        {"t.csv": "reset_delay,vdd\n1p,1.6\n"}, RESET, more=more
    ).reset.conditions.vdd_v == [1.6]
    assert read({"t.csv": "reset_delay\n1p\n"}, RESET, more=more).reset.conditions.vdd_v == [1.8]


def test_a_corner_column_stands_for_its_conditions(read):
    text = "reset_delay,corner,vcm\n1p,hot,0.9\n2p,cold,1.1\n"
    tables = read({"t.csv": text}, RESET, more=CORNERS)
    conditions = tables.reset.conditions
    assert conditions.process.tolist() == ["ss", "ff"]
    assert conditions.temperature_k == pytest.approx([398.15, 233.15])
    assert conditions.vdd_v.tolist() == [1.62, 1.98]
    assert conditions.vcm_v.tolist() == [0.9, 1.1]
    assert tables.processes == ("ss", "ff")


def test_a_corner_fixed_for_the_file_does_too(read):
    entry = f"{RESET}at = {{ corner = 'hot', vcm = 0.9 }}"
    conditions = read({"t.csv": "reset_delay\n1p\n2p\n"}, entry, more=CORNERS).reset.conditions
    assert conditions.vdd_v.tolist() == [1.62, 1.62]
    assert conditions.process.tolist() == ["ss", "ss"]
    assert conditions.vcm_v.tolist() == [0.9, 0.9]


def test_an_unknown_corner_is_a_fault_that_names_the_known_ones(faults):
    text = "reset_delay,corner\n1p,hot\n2p,hott\n"
    assert faults({"t.csv": text}, RESET, more=CORNERS) == [
        "t.csv:3: corner: no corner 'hott', did you mean 'hot'?; corners: hot, cold, warm"
    ]
    (fault,) = faults({"t.csv": "reset_delay,corner\n1p,hot\n"}, RESET)
    assert "describe it under [corners.NAME]" in fault


def test_a_corner_and_a_column_must_agree(read, faults):
    text = "reset_delay,corner,vdd\n1p,hot,{}\n"
    assert read({"t.csv": text.format("1620m")}, RESET, more=CORNERS).reset.conditions.vdd_v == 1.62
    (fault,) = faults({"t.csv": text.format("1.8")}, RESET, more=CORNERS)
    assert fault.startswith("t.csv:2: vdd: the corner says 1.62, the table 1.8")


def test_a_corner_that_leaves_open_what_others_fix_is_a_fault(faults):
    found = faults({"t.csv": "reset_delay,corner\n1p,hot\n2p,warm\n"}, RESET, more=CORNERS)
    assert [fault.partition(";")[0] for fault in found] == [
        "t.csv:3: corner: the corner of this row does not fix process, others do",
        "t.csv:3: corner: the corner of this row does not fix vdd, others do",
    ]


class TestProcesses:
    TEXT = "reset_delay,process\n1p,tt\n2p,ss\n3p,tt\n4p,ff\n"

    def test_come_in_order_of_first_appearance(self, read):
        assert read({"t.csv": self.TEXT}, RESET).processes == ("tt", "ss", "ff")

    def test_come_in_the_order_of_declared_codes(self, read):
        more = "[cells.a.processes]\nff = 2\nss = 9\ntt = 5\n"
        assert read({"t.csv": self.TEXT}, RESET, more=more).processes == ("ff", "tt", "ss")

    def test_are_none_where_nobody_names_any(self, read):
        assert read({"t.csv": "reset_delay\n1p\n"}, RESET).processes == ()

    def test_are_the_declared_ones_where_no_table_names_any(self, read):
        more = "[cells.a.processes]\nss = 1\ntt = 0\n"
        assert read({"t.csv": "reset_delay\n1p\n"}, RESET, more=more).processes == ("tt", "ss")

    def test_that_no_table_names_are_left_out_and_said_so(self, read):
        more = "[cells.a.processes]\ntt = 0\nss = 1\nff = 2\nsf = 3\n"
        tables = read({"t.csv": self.TEXT}, RESET, more=more)
        assert tables.processes == ("tt", "ss", "ff")
        assert tables.notices == ("process sf is declared, but no table names it",)

    def test_must_be_declared_if_any_are(self, faults):
        more = "[cells.a.processes]\ntt = 0\nss = 1\n"
        assert faults({"t.csv": self.TEXT}, RESET, more=more) == [
            "t.csv:5: process: no process 'ff'; processes: tt, ss"
        ]

    def test_must_be_declared_where_a_corner_names_them_too(self, faults):
        more = "[cells.a.processes]\ntt = 0\n" + CORNERS
        (fault,) = faults({"t.csv": "reset_delay,corner\n1p,hot\n"}, RESET, more=more)
        assert fault.startswith("t.csv:2: corner: no process 'ss'")
