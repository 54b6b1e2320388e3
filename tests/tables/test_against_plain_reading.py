"""The fast reader against a slow and obvious one, on tables of arbitrary cells."""

from __future__ import annotations

import tempfile
from pathlib import Path

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from behavgen.errors import TableError
from behavgen.project import load_project
from behavgen.tables.faults import LISTED
from behavgen.tables.read import read_tables
from behavgen.units import UnitError, find_unit, parse_si

LEVELS = st.sampled_from(["1", "-2.5", "3e-1", " 4 ", "5u", "6 mV", "failed", "x", "", "1e999"])
DELAYS = st.sampled_from(
    ["41", "1.5e2", "77ps", "", "Failed", "-3", "0", "nan", "8p", '"9"', "1,5"]
)
SUPPLIES = st.sampled_from(["1.8", "1800m", "1.62", "0", "", "one"])
ROWS = st.lists(st.tuples(LEVELS, DELAYS, SUPPLIES), min_size=1, max_size=12)


def plainly(rows):
    """Return the rows that are good, and the lines on which something is wrong."""
    good, wrong = [], set()
    for line, cells in enumerate(rows, start=2):
        texts = [cell.strip().strip('"') for cell in cells]
        if not any(texts) or any(text.lower() == "failed" for text in texts):
            continue
        try:
            level, supply = parse_si(texts[0], "V", find_unit("mV", "V")), parse_si(texts[2], "V")
            delay = parse_si(texts[1], "s", find_unit("ps", "s")) if texts[1] else None
        except UnitError:
            wrong.add(line)
            continue
        row = (level, delay, supply)
        if supply <= 0 or (delay is not None and delay <= 0) or row in good:
            wrong.add(line)
        else:
            good.append(row)
    return good, wrong


@settings(max_examples=300, deadline=None)
@given(rows=ROWS)
def test_good_rows_and_lines_of_faults_are_those_of_a_plain_reading(rows):
    quoted = [[f'"{cell}"' if "," in cell else cell for cell in row] for row in rows]
    text = "\n".join(["overdrive_mV,delay_ps,vdd", *(",".join(row) for row in quoted), ""])
    good, wrong = plainly(rows)
    with tempfile.TemporaryDirectory() as folder:
        Path(folder, "t.csv").write_text(text)
        Path(folder, "behavgen.toml").write_text(
            '[[cells.a.tables]]\nquantity = "delay"\nfile = "t.csv"\n'
        )
        try:
            delay = read_tables(load_project(Path(folder)), "a").delay
        except TableError as error:
            found = {fault.row for fault in error.faults if fault.row}
            if len(wrong) <= LISTED:
                assert found == wrong
            assert wrong or not good  # nothing is refused but faults, and tables without a row
            assert found <= wrong
            return
    assert not wrong
    assert delay.overdrive_v.tolist() == [row[0] for row in good]
    resolved = [row[1] if row[1] is not None else np.nan for row in good]
    np.testing.assert_array_equal(delay.delay_s, resolved)
    assert delay.conditions.vdd_v.tolist() == [row[2] for row in good]
