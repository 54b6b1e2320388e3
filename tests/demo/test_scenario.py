"""The committed tables come from the simulation, and say something plausible."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

import behavgen.demo
from behavgen.demo import scenario

TABLES = Path(behavgen.demo.__file__).parent / "tables"


def _committed(name: str) -> list[tuple[str, ...]]:
    with (TABLES / name).open(newline="") as file:
        return [tuple(row) for row in csv.reader(file)]


def _column(name: str, header: str) -> np.ndarray:
    head, *rows = _committed(name)
    place = head.index(header)
    return np.array([float(row[place] or "nan") for row in rows])


def _assert_committed(table: scenario.Table, name: str, *, keys: int, rtol: float) -> None:
    """`table` equals the committed rows with the same first `keys` columns, in their order.

    Texts are equal, or are numbers that agree within `rtol`: the last printed digit
    may turn on another machine.
    """
    head, *rows = _committed(name)
    assert tuple(head) == table.header
    wanted = {row[:keys] for row in table.rows}
    selected = [row for row in rows if row[:keys] in wanted]
    assert len(selected) == len(table.rows)
    for found_row, row in zip(table.rows, selected, strict=True):
        for found, text in zip(found_row, row, strict=True):
            assert found == text or float(found) == pytest.approx(float(text), rel=rtol, abs=2e-10)


def test_delays_are_those_the_script_simulates():
    points = [scenario.DELAY_POINTS[place] for place in (13, 28, -1)]
    table = scenario.sense_latch_delay(points)
    _assert_committed(table, "sense_latch/delay.csv", keys=4, rtol=1e-6)


def test_s_curve_is_the_one_the_script_simulates():
    table = scenario.sense_latch_noise({"hot_low": scenario.CORNERS["hot_low"]})
    _assert_committed(table, "sense_latch/noise.csv", keys=1, rtol=0)


def test_instances_are_those_the_script_simulates():
    table = scenario.sense_latch_offset(instances=4, at_both=0)
    _, *rows = _committed("sense_latch/offset.csv")
    for found, committed in zip(table.rows, rows[:4], strict=True):
        assert found[:3] == committed[:3]
        assert float(found[3]) == pytest.approx(float(committed[3]), abs=2e-4)


@pytest.mark.slow
def test_all_tables_come_out_as_committed():
    files = {path.relative_to(TABLES).as_posix() for path in TABLES.rglob("*.csv")}
    tables = scenario.all_tables()
    assert set(tables) == files
    for name, table in tables.items():
        # Four printed digits at the coarsest.
        _assert_committed(table, name, keys=0, rtol=2e-3)


def test_numbers_are_those_of_a_latch_of_this_kind():
    delay_s = _column("sense_latch/delay.csv", "delay_ps") * 1e-12
    assert 25e-12 < np.nanmin(delay_s) < np.nanmax(delay_s) <= 320e-12
    offset_v = _column("sense_latch/offset.csv", "offset (mV)") * 1e-3
    assert 4e-3 < offset_v.std() < 8e-3
    assert (_column("slicer/noise.csv", "sigma_uV") < 800).all()


def test_tables_stay_small():
    assert sum(path.stat().st_size for path in TABLES.rglob("*")) < 200_000
