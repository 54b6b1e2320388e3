"""The demo is a valid project: the reader understands every row of every table."""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

from behavgen.demo import copy_demo
from behavgen.project import load_project
from behavgen.tables.characterisation import Characterisation
from behavgen.tables.read import read_tables


@pytest.fixture(scope="module")
def folder(tmp_path_factory) -> Path:
    return copy_demo(tmp_path_factory.mktemp("demo")).parent


@pytest.fixture(scope="module")
def sense_latch(folder) -> Characterisation:
    return read_tables(load_project(folder / "behavgen.toml"), "sense_latch")


@pytest.fixture(scope="module")
def slicer(folder) -> Characterisation:
    return read_tables(load_project(folder / "behavgen.toml"), "slicer")


def test_every_row_of_every_table_is_used(folder, sense_latch, slicer):
    used = {source.file: source.rows for source in (*sense_latch.sources, *slicer.sources)}
    lines = {
        path.relative_to(folder).as_posix(): len(path.read_text().splitlines()) - 1
        for path in folder.rglob("*.csv")
    }
    assert used == lines


def test_units_of_the_headers_are_understood(folder, sense_latch, slicer):
    with (folder / "tables/sense_latch/delay.csv").open(newline="") as file:
        first = next(csv.DictReader(file))
    assert sense_latch.delay.delay_s[0] == pytest.approx(float(first["delay_ps"]) * 1e-12)
    assert sense_latch.delay.observed_for_s[0] == pytest.approx(320e-12)
    assert sense_latch.noise.vdiff_v[0] == pytest.approx(-1.2e-3)
    assert np.abs(sense_latch.offset.offset_v).max() < 0.03
    assert np.nanmax(sense_latch.window.window_v) < 0.6
    assert sense_latch.window.resolve_time_s.max() == pytest.approx(310e-12)
    assert sense_latch.reset.reset_delay_s.max() < 30e-12
    assert slicer.delay.overdrive_v.min() == pytest.approx(1e-6)
    assert slicer.delay.delay_s.max() < 400e-12
    assert slicer.noise.sigma_v[0] == pytest.approx(607.5e-6)


def test_named_corners_give_their_conditions(sense_latch):
    noise = sense_latch.noise.conditions
    assert set(noise.process.tolist()) == {"typ", "slow", "fast"}
    hot_low = (noise.vdd_v == 0.9) & (noise.temperature_k == 398.15)
    assert np.count_nonzero(hot_low) == 9
    assert (noise.vcm_v == 0.6).all()


def test_unresolved_rows_arrive_as_such(sense_latch):
    unresolved = np.isnan(sense_latch.delay.delay_s)
    assert 0 < np.count_nonzero(unresolved) < 12
    assert (sense_latch.delay.decision[unresolved] == -1).all()
    assert (np.abs(sense_latch.delay.overdrive_v[unresolved]) < 1e-5).all()
