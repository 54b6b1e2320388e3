"""Every fault of a table is found, with file, row and column, and nothing else is."""

from __future__ import annotations

import pytest

DELAY = 'quantity = "delay"\nfile = "t.csv"\n'
NOISE = 'quantity = "noise"\nfile = "t.csv"\n'
OFFSET = 'quantity = "offset"\nfile = "t.csv"\n'
WINDOW = 'quantity = "window"\nfile = "t.csv"\n'
RESET = 'quantity = "reset"\nfile = "t.csv"\n'

GOOD = "1m,50p"

CELLS = [
    # header, row, column blamed, words
    (
        "overdrive,delay",
        "1m,abc",
        "delay",
        "'abc' is not a number; a number in s above 0, or empty",
    ),
    ("overdrive,delay", "x,1p", "overdrive", "'x' is not a number; a number in V"),
    ("overdrive,delay", '"1,5",1p', "overdrive", "decimal comma"),
    ("overdrive,delay", "1m,-3p", "delay", "'-3p'; a number in s above 0"),
    ("overdrive,delay", "1m,0", "delay", "'0'; a number in s above 0"),
    ("overdrive,delay", "1m,nan", "delay", "list it in `failed`"),
    ("overdrive,delay", "1m,inf", "delay", "'inf' is not a number"),
    ("overdrive,delay", "1m,1e999", "delay", "too large"),
    ("overdrive,delay", ",1p", "overdrive", "empty cell"),
    ("overdrive,delay_ps", "1m,12p", "delay_ps", "prefix of its own"),
    ("overdrive,delay,decision", "1m,1p,2", "decision", "0 or 1, or empty"),
    ("overdrive,delay,decision", "1m,1p,0.5", "decision", "0 or 1, or empty"),
    ("overdrive,delay,observed_for", "1m,2n,1n", "delay", "2 ns is above the 1 ns"),
    ("overdrive,delay,temp_C", "1m,1p,-300", "temp_C", "absolute zero"),
    ("overdrive,delay,temp_K", "1m,1p,0", "temp_K", "absolute zero"),
    ("overdrive,delay,vdd", "1m,1p,0", "vdd", "a number in V above 0"),
    ("overdrive,delay,vdd", "1m,1p,-1.8", "vdd", "a number in V above 0"),
    ("overdrive,delay,vcm", "1m,1p,", "vcm", "empty cell"),
    ("overdrive,delay,process", "1m,1p,", "process", "empty cell; a name"),
]


@pytest.mark.parametrize(("header", "row", "column", "words"), CELLS)
def test_a_faulty_cell_is_named_with_row_and_header(faults, header, row, column, words):
    extra = {"decision": ",1", "observed_for": ",9n", "temp_C": ",27", "temp_K": ",300"}
    good = GOOD if "delay_ps" not in header else "1m,50"
    good += extra.get(header.split(",")[-1], "" if header.count(",") == 1 else ",1")
    (fault,) = faults({"t.csv": f"{header}\n{good}\n{row}\n"}, DELAY)
    assert fault.startswith(f"t.csv:3: {column}: ")
    assert words in fault


@pytest.mark.parametrize(
    ("entry", "header", "row", "column", "words"),
    [
        (NOISE, "vdiff,trials,ones", "0,200,201", "ones", "201 is above the 200 in trials"),
        (NOISE, "vdiff,trials,ones", "0,0,0", "trials", "a whole number at least 1"),
        (NOISE, "vdiff,trials,ones", "0,-5,0", "trials", "a whole number at least 1"),
        (NOISE, "vdiff,trials,ones", "0,9.5,1", "trials", "'9.5'"),
        (NOISE, "vdiff,trials,ones", "0,10,-1", "ones", "a whole number at least 0"),
        (NOISE, "vdiff,bit", "0,2", "bit", "0 or 1"),
        (NOISE, "sigma", "-1u", "sigma", "a number in V above 0"),
        (NOISE, "sigma", "0", "sigma", "a number in V above 0"),
        (OFFSET, "mean,sigma,instances", "0,1m,1", "instances", "at least 2"),
        (OFFSET, "instance,offset", ",1m", "instance", "empty cell"),
        (OFFSET, "instance,offset,offset_low", "1,1m,2m", "offset_low", "2 mV is above the 1 mV"),
        (OFFSET, "instance,offset,offset_high", "1,1m,0", "offset", "1 mV is above the 0 V"),
        (WINDOW, "resolve_time,window", "-1p,1m", "resolve_time", "above 0"),
        (WINDOW, "resolve_time,window", "1p,0", "window", "above 0, or empty"),
        (WINDOW, "resolve_time,window,searched_span", "1p,2,1", "window", "2 V is above the 1 V"),
        (WINDOW, "resolve_time,trials,unresolved,span", "1n,5,6,1", "unresolved", "6 is above"),
        (RESET, "reset_delay", "-5p", "reset_delay", "above 0"),
    ],
)
def test_faulty_cells_of_the_other_quantities(faults, entry, header, row, column, words):
    (fault,) = faults({"t.csv": f"{header}\n{row}\n"}, entry)
    assert fault.startswith(f"t.csv:2: {column}: ")
    assert words in fault


def test_a_rule_also_holds_against_a_value_fixed_for_the_file(faults):
    entry = f"{NOISE}at = {{ trials = 100 }}"
    assert faults({"t.csv": "vdiff,ones\n0,101\n"}, entry) == [
        "t.csv:2: ones: 101 is above the 100 in trials; at most trials of the same row"
    ]


def test_all_faults_of_all_tables_come_together(faults):
    files = {"a.csv": "overdrive,delay\nx,1p\n1m,-1\n", "b.csv": "vdiff,trials,ones\n0,1,2\n"}
    found = faults(
        files,
        'quantity = "delay"\nfile = "a.csv"',
        'quantity = "noise"\nfile = "b.csv"',
        'quantity = "window"\nfile = "c.csv"',
    )
    assert [fault.split(": ")[0] for fault in found] == ["a.csv:2", "a.csv:3", "b.csv:2", "c.csv"]


def test_of_many_faults_alike_five_are_listed_and_the_rest_is_a_number(faults):
    rows = "".join(f"{n}m,x\n" for n in range(1, 31))
    found = faults({"t.csv": f"overdrive,delay\n{rows}"}, DELAY)
    assert [fault.split(": ")[0] for fault in found] == [f"t.csv:{n}" for n in range(2, 7)] + [
        "t.csv"
    ]
    assert found[-1] == "t.csv: delay: 25 more rows like these"


def test_line_numbers_hold_far_into_a_large_file(faults):
    rows = [f"{n}u,50p" for n in range(1, 300_001)]
    rows[234_566] = "1m,oops"
    (fault,) = faults({"t.csv": "\n".join(["overdrive,delay", *rows])}, DELAY)
    assert fault.startswith("t.csv:234568: delay: 'oops'")


def test_a_missing_column_lists_the_headers_and_the_nearest_one(faults):
    entry = f'{DELAY}columns = {{ overdrive = "vod" }}'
    assert faults({"t.csv": "vod_V,delay\n1,1\n"}, entry) == [
        "t.csv: vod: no column 'vod' for overdrive, did you mean 'vod_V'?; "
        "headers found: vod_V, delay"
    ]


def test_where_a_needed_column_is_not_named_the_likely_header_is(faults):
    (fault,) = faults({"t.csv": "vod_V,delay\n1,1\n"}, DELAY)
    assert "no column for overdrive, is it 'vod_V'?" in fault
    assert 'columns = { overdrive = "vod_V" }' in fault


def test_a_column_of_the_defaults_may_be_missing(read):
    tables = read(
        {"t.csv": "overdrive,delay\n1m,1p\n"},
        DELAY,
        more='[defaults]\ncolumns = { vdd = "vdd_V", overdrive = "vod" }\n',
    )
    assert tables.delay.overdrive_v.tolist() == [1e-3]


def test_two_headers_for_one_column_are_a_fault(faults):
    (fault,) = faults({"t.csv": "overdrive,delay_ps,delay\n1m,1,1p\n"}, DELAY)
    assert "'delay_ps' and 'delay' both read as delay" in fault


@pytest.mark.parametrize("header", ["overdrive [xs]", "overdrive_s", "overdrive (mA)"])
def test_an_unknown_unit_is_a_fault_unless_the_unit_is_given(faults, read, header):
    (fault,) = faults(
        {"t.csv": f"{header},delay\n1,1p\n"}, f'{DELAY}columns.overdrive = "{header}"'
    )
    assert fault.startswith(f"t.csv: {header}: unit '")
    entry = f'{DELAY}columns.overdrive = "{header}"\nunits.overdrive = "mV"'
    assert read({"t.csv": f"{header},delay\n1,1p\n"}, entry).delay.overdrive_v.tolist() == [1e-3]


def test_a_filter_that_matches_nothing_lists_the_values_present(faults):
    text = "overdrive,delay,circuit\n1m,1p,B1\n2m,2p,A1\n3m,3p,A1\n"
    assert faults({"t.csv": text}, f'{DELAY}where = {{ circuit = "A2" }}') == [
        "t.csv: circuit: no row is left where this is 'A2'; values present: A1, B1"
    ]


def test_a_filter_on_a_missing_column_is_a_fault(faults):
    text = "overdrive,delay,circuit\n1m,1p,B1\n"
    (fault,) = faults({"t.csv": text}, f'{DELAY}where = {{ circit = "B1" }}')
    assert "no column 'circit' to filter by, did you mean 'circuit'?" in fault


def test_a_condition_in_the_file_and_in_at_is_a_contradiction(faults):
    (fault,) = faults({"t.csv": "overdrive,delay,vdd\n1m,1p,1\n"}, f"{DELAY}at = {{ vdd = 1.8 }}")
    assert "`at` fixes vdd, but the file has it" in fault


def test_a_header_that_looks_like_a_condition_is_pointed_at(read):
    tables = read({"t.csv": "overdrive,delay,VDD,note\n1m,1p,1,x\n"}, DELAY)
    assert tables.notices == ("t.csv column 'VDD' is not used; is it vdd?",)


def test_values_of_an_unusual_size_are_notices_and_no_faults(read):
    text = "overdrive,delay,temp,vdd\n1m,2,2000,120\n2m,3p,27,1\n"
    notices = read({"t.csv": text}, DELAY).notices
    assert [notice.split("'")[1] for notice in notices] == ["delay", "temp", "vdd"]
    assert "1 of 2 rows, 2 s; is the unit right?" in notices[0]


class TestRowsAlike:
    def test_are_faults_wherever_they_stand(self, faults):
        text = "overdrive,delay,vdd\n1m,2p,1\n2m,2p,1\n0.001,2e-12,1.0\n1m,2p,2\n1000u,2p,1\n"
        found = faults({"t.csv": text}, DELAY)
        assert [fault.partition("; ")[0] for fault in found] == [
            "t.csv:4: repeats row 2 of t.csv",
            "t.csv:6: repeats row 2 of t.csv",
        ]

    def test_are_found_across_files_of_a_glob(self, faults):
        files = {"r1.csv": "overdrive,delay\n1m,2p\n", "r2.csv": "overdrive,delay\n2m,2p\n1m,2p\n"}
        (fault,) = faults(files, 'quantity = "delay"\nfile = "r*.csv"')
        assert fault.startswith("r2.csv:3: repeats row 2 of r1.csv")

    def test_are_found_when_a_file_is_listed_twice(self, faults):
        found = faults({"t.csv": "overdrive,delay\n1m,2p\n"}, DELAY, DELAY)
        assert len(found) == 1

    def test_differ_when_what_holds_for_their_files_differs(self, read):
        files = {"r1.csv": "overdrive,delay\n1m,2p\n", "r2.csv": "overdrive,delay\n1m,2p\n"}
        tables = read(
            files,
            'quantity = "delay"\nfile = "r1.csv"\nat = { vdd = 1.8 }',
            'quantity = "delay"\nfile = "r2.csv"\nat = { vdd = 1.6 }',
        )
        assert tables.delay.conditions.vdd_v.tolist() == [1.8, 1.6]

    def test_are_faults_also_where_cells_are_empty(self, faults):
        text = "overdrive,delay,observed_for\n1m,,1n\n1m,,1n\n"
        assert len(faults({"t.csv": text}, DELAY)) == 1

    def test_are_not_looked_for_among_rows_that_have_a_fault(self, faults):
        found = faults({"t.csv": "overdrive,delay\n1m,x\n1m,\n1m,y\n"}, DELAY)
        assert [fault.split(": ")[0] for fault in found] == ["t.csv:2", "t.csv:4"]

    def test_are_repetitions_where_single_bits_are_listed(self, read):
        assert read({"t.csv": "vdiff,bit\n0,1\n0,1\n"}, NOISE).noise.trials.tolist() == [2]


class TestFailedRuns:
    def test_are_dropped_and_counted(self, read):
        text = "overdrive,delay\n1m,failed\n2m,2p\n3m,FAILED\n"
        tables = read({"t.csv": text}, DELAY)
        assert tables.delay.delay_s.tolist() == [2e-12]
        assert (tables.sources[0].rows, tables.sources[0].failed_rows) == (1, 2)

    def test_are_marked_as_the_project_says(self, read, faults):
        text = "overdrive,delay\n1m,n/a\n2m,2p\n3m,nan\n4m,1e30\n5m,1.0e30\n"
        entry = f'{DELAY}failed = ["n/a", "nan", "1e30"]'
        assert read({"t.csv": text}, entry).sources[0].failed_rows == 4
        assert len(faults({"t.csv": text}, f'{DELAY}failed = ["1e30"]')) == 2

    def test_count_only_in_columns_that_are_used(self, read):
        text = "overdrive,delay,note\n1m,1p,failed\n"
        assert read({"t.csv": text}, DELAY).sources[0].failed_rows == 0

    def test_may_not_be_all_there_is(self, faults):
        (fault,) = faults({"t.csv": "overdrive,delay\n1m,failed\n"}, DELAY)
        assert fault.startswith("t.csv: every row is a failed run")
