"""Files of all kinds, well-formed or not."""

from __future__ import annotations

import numpy as np
import openpyxl
import polars as pl
import pytest

DELAY = 'quantity = "delay"\nfile = "t.csv"\n'
TEXT = "overdrive_mV,delay_ps,temp_C,process,note\n1,50.25,27,tt,x\n-2,,125,ss,\n3,41,-40,tt,y\n"


def entry(file):
    return f'quantity = "delay"\nfile = "{file}"\n'


def arrays(tables):
    delay = tables.delay
    return (
        delay.overdrive_v,
        delay.delay_s,
        delay.conditions.temperature_k,
        delay.conditions.process,
    )


def test_parquet_and_excel_give_what_csv_gives(read, tmp_path):
    from_csv = arrays(read({"t.csv": TEXT}, DELAY))
    rows = [line.split(",") for line in TEXT.splitlines()]
    typed = pl.read_csv(tmp_path / "t.csv", schema_overrides={"process": pl.Categorical})
    typed.write_parquet(tmp_path / "t.parquet")
    book = openpyxl.Workbook()
    for row in [
        rows[0],
        *([float(c) if c[-1:].isdigit() else c or None for c in r] for r in rows[1:]),
    ]:
        book.active.append(row)
    book.save(tmp_path / "t.xlsx")
    for file in ("t.parquet", "t.xlsx"):
        for ours, expected in zip(arrays(read({}, entry(file))), from_csv, strict=True):
            np.testing.assert_array_equal(ours, expected)


def test_rows_of_excel_and_parquet_are_numbered_as_in_a_spreadsheet(faults, tmp_path):
    pl.DataFrame({"overdrive": [1.0, 2.0], "delay": ["50p", "x"]}).write_parquet(
        tmp_path / "t.parquet"
    )
    assert faults({}, entry("t.parquet"))[0].startswith("t.parquet:3: delay: 'x'")
    book = openpyxl.Workbook()
    for row in ([], ["overdrive", "delay"], [1, "50p"], [], [2, "x"]):
        book.active.append(row)
    book.save(tmp_path / "t.xlsx")
    assert faults({}, entry("t.xlsx"))[0].startswith("t.xlsx:5: delay: 'x'")


def test_whole_numbers_of_a_spreadsheet_name_instances_without_a_decimal_point(read, tmp_path):
    book = openpyxl.Workbook()
    for row in (["instance", "offset"], [1, 0.001], [2, 0.002]):
        book.active.append(row)
    book.save(tmp_path / "t.xlsx")
    tables = read({}, 'quantity = "offset"\nfile = "t.xlsx"')
    assert tables.offset.instance.tolist() == ["1", "2"]


def test_a_typed_column_that_holds_no_cells_is_a_fault(faults, tmp_path):
    frame = pl.DataFrame({"overdrive": [1.0], "delay": [[1.0, 2.0]]})
    frame.write_parquet(tmp_path / "t.parquet")
    (fault,) = faults({}, entry("t.parquet"))
    assert fault.startswith("t.parquet: delay: column of type List")


def test_globs_read_all_files_in_order(read):
    files = {
        "runs/b.csv": "overdrive,delay\n2m,2p\n",
        "runs/a.csv": "overdrive,delay_ps\n1m,1\n",
        "runs/deep/c.csv": "overdrive,delay\n3m,3p\n",
    }
    tables = read(files, entry("runs/**/*.csv"))
    assert tables.delay.overdrive_v.tolist() == [1e-3, 2e-3, 3e-3]
    assert [s.file for s in tables.sources] == ["runs/a.csv", "runs/b.csv", "runs/deep/c.csv"]


def test_a_file_whose_name_reads_like_a_pattern_is_that_file(read):
    tables = read({"run[1].csv": "overdrive,delay\n1m,1p\n"}, entry("run[1].csv"))
    assert tables.sources[0].file == "run[1].csv"


def test_a_filter_may_empty_some_files_of_a_glob(read):
    files = {
        "r1.csv": "overdrive,delay,circuit\n1m,1p,A\n",
        "r2.csv": "overdrive,delay,circuit\n2m,1p,B\n",
    }
    tables = read(files, entry("r*.csv") + 'where = { circuit = "B" }')
    assert [source.file for source in tables.sources] == ["r2.csv"]


def test_filters_match_texts_and_numbers(read):
    text = "overdrive,delay,circuit,lot\n1m,1p,A,1\n2m,1p, B ,2\n3m,1p,C,2.0\n4m,1p,B,3\n"
    tables = read({"t.csv": text}, f'{DELAY}where = {{ circuit = ["B", "C"], lot = 2 }}')
    assert tables.delay.overdrive_v.tolist() == [2e-3, 3e-3]


def test_a_filter_may_use_a_column_that_is_read_as_well(read):
    text = "overdrive,delay,vdd_mV\n1m,1p,1800\n2m,1p,1620\n"
    tables = read({"t.csv": text}, f"{DELAY}where = {{ vdd_mV = 1800 }}")
    assert tables.delay.conditions.vdd_v.tolist() == [1.8]


def test_the_hash_is_that_of_the_bytes(read):
    # As sha256sum of coreutils prints it for these bytes.
    tables = read({"t.csv": "reset_delay\n25p\n"}, 'quantity = "reset"\nfile = "t.csv"')
    assert (
        tables.sources[0].sha256
        == "f33aef8df5fd12f8ed0d07d2e419252f438f307c247d34061a2b412dc0160a44"
    )


@pytest.mark.parametrize(
    "text",
    [
        b"\xef\xbb\xbfoverdrive,delay\r\n1m,2p\r\n2m,3p\r\n",
        b"overdrive,delay\n1m,2p\n2m,3p",
        b"\n \noverdrive,delay\n\n1m,2p\n\n,\n  \n2m,3p\n\n",
        b" overdrive , delay \n 1m , 2p\n2m,3p \n",
        b'"overdrive","delay"\n"1m","2p"\n2m,"3p"\n',
        b"overdrive,delay\n1m,2p,\n2m,3p,,\n",
        b"delay,overdrive\n2p,1m\n3p,2m\n",
        b"overdrive,delay,\n1m,2p,\n2m,3p,\n",
    ],
)
def test_harmless_habits_of_csv_writers_are_fine(read, text):
    delay = read({"t.csv": text}, DELAY).delay
    assert delay.overdrive_v.tolist() == [1e-3, 2e-3]
    assert delay.delay_s.tolist() == [2e-12, 3e-12]


@pytest.mark.parametrize(
    ("text", "start", "words"),
    [
        (b"", "t.csv: ", "empty file"),
        (b"\xef\xbb\xbf \n\r\n", "t.csv: ", "empty file"),
        (b"overdrive,delay\n", "t.csv: ", "a header and no rows"),
        (b"overdrive,delay\n\n,\n", "t.csv: ", "a header and no rows"),
        (b"overdrive;delay\n1,5;2\n", "t.csv:1: ", "semicolons"),
        (b"\noverdrive\tdelay\n1,5\t2\n", "t.csv:2: ", "tabs"),
        (b"overdrive,delay,delay\n1m,2p,3p\n", "t.csv:1: delay: ", "2 columns have this header"),
        (b"overdrive,delay,process\n1m,2p,\xb5\n", "t.csv:2: ", "byte 0xb5 is not UTF-8"),
        (b"overdrive,delay \xb5s\n1m,2p\n", "t.csv:1: ", "byte 0xb5 in the header"),
        ("overdrive,delay\n1m,2p\n".encode("utf-16"), "t.csv: ", "not UTF-8"),
        (b"overdrive,delay\r1m,2p\r", "t.csv: ", "carriage return"),
        (b'overdrive,delay\n1m,2p\n"2m,3p\n4m,5p\n', "t.csv:3: ", "unclosed quote"),
    ],
)
def test_files_that_cannot_be_read_say_what_to_do(faults, text, start, words):
    found = faults({"t.csv": text}, DELAY)
    assert found[0].startswith(start)
    assert words in found[0]
    assert "; " in found[0]


def test_rows_of_a_wrong_length_are_named_with_both_numbers(faults):
    text = "overdrive,delay,vdd\n1m,2p\n2m,2p,1,4\n3m,2p,1\n4m\n,,\n\n5m,1p,1,,\n"
    allowed = "as many as the header on line 1 has"
    assert faults({"t.csv": text}, DELAY) == [
        f"t.csv:2: 2 fields instead of 3; {allowed}",
        f"t.csv:3: 4 fields instead of 3; {allowed}",
        f"t.csv:5: 1 field instead of 3; {allowed}",
    ]


def test_a_row_that_is_too_short_is_found_even_if_all_that_is_needed_is_there(faults):
    (fault,) = faults({"t.csv": "overdrive,delay,note\n1m,2p,x\n2m,2p\n"}, DELAY)
    assert fault.startswith("t.csv:3: 2 fields instead of 3")


@pytest.mark.parametrize("file", ["t.parquet", "t.xlsx"])
def test_files_that_are_not_what_their_name_says(faults, file):
    (fault,) = faults({file: b"neither one nor the other"}, entry(file))
    assert fault.startswith(f"{file}: cannot be read as")


@pytest.mark.parametrize(
    ("file", "words"),
    [
        ("dely.csv", "no such file, did you mean 'delay.csv'?"),
        ("nowhere/delay.csv", "no such file"),
        ("*.parquet", "no file matches"),
        ("folder", "is a folder"),
        ("delay.txt", "'.txt' files are not read; one of .csv, .parquet, .xlsx"),
    ],
)
def test_files_that_are_not_there(faults, file, words):
    files = {"delay.csv": "x\n", "delay.txt": "x\n", "folder/x.csv": "x\n"}
    (fault,) = faults(files, entry(file))
    assert fault.startswith(f"{file}: {words}")


def test_headers_may_be_called_anything(read):
    text = 'line,@,"a,b",overdrive,delay,0\n1,2,3,1m,2p,5\n'
    assert read({"t.csv": text}, DELAY).delay.delay_s.tolist() == [2e-12]


def test_the_same_number_is_the_same_condition_in_whatever_unit(read):
    files = {
        "t.csv": "overdrive,delay,vdd_mV,observed_for\n1m,2p,612.3,1n\n2m,,612.3,1n\n",
        "u.csv": "overdrive,delay,vdd\n3m,2p,0.6123\n",
    }
    tables = read(files, DELAY, entry("u.csv"))
    assert np.unique(tables.delay.conditions.vdd_v).tolist() == [0.6123]
