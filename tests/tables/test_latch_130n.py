"""The characterised latch, against a reading of its files with the csv module alone."""

from __future__ import annotations

import csv
import hashlib
from pathlib import Path

import numpy as np
import pytest

FOLDER = Path(__file__).parents[1] / "data" / "latch_130n"


def column(file, header):
    with (FOLDER / file).open(newline="") as lines:
        return [row[header] for row in csv.DictReader(lines)]


def numbers(file, header):
    return np.array([float(cell) for cell in column(file, header)])


def assert_conditions(conditions, file):
    np.testing.assert_array_equal(conditions.vdd_v, numbers(file, "vdd_V"))
    np.testing.assert_array_equal(conditions.temperature_k, numbers(file, "temp_C") + 273.15)
    np.testing.assert_array_equal(conditions.vcm_v, numbers(file, "vcm_V"))


def test_delays(latch_130n):
    delay = latch_130n.delay
    assert_conditions(delay.conditions, "delay.csv")
    assert delay.conditions.process.tolist() == column("delay.csv", "process")
    np.testing.assert_array_equal(delay.overdrive_v, numbers("delay.csv", "vod_V"))
    np.testing.assert_array_equal(delay.offset_v, numbers("delay.csv", "vos_V"))
    np.testing.assert_array_equal(delay.delay_s, numbers("delay.csv", "delay_s"))
    np.testing.assert_array_equal(delay.decision, numbers("delay.csv", "decision"))


def test_noise(latch_130n):
    noise = latch_130n.noise
    assert_conditions(noise.conditions, "noise.csv")
    np.testing.assert_array_equal(noise.vdiff_v, numbers("noise.csv", "vid_V"))
    np.testing.assert_array_equal(noise.trials, numbers("noise.csv", "trials"))
    np.testing.assert_array_equal(noise.ones, numbers("noise.csv", "ones"))


def test_offsets(latch_130n):
    offset = latch_130n.offset
    assert_conditions(offset.conditions, "offset.csv")
    assert offset.instance.tolist() == column("offset.csv", "instance")
    np.testing.assert_array_equal(offset.offset_v, numbers("offset.csv", "vos_V"))


def test_windows(latch_130n):
    window = latch_130n.window
    assert_conditions(window.conditions, "window.csv")
    np.testing.assert_array_equal(window.resolve_time_s, numbers("window.csv", "t_res_s"))
    np.testing.assert_array_equal(window.window_v, numbers("window.csv", "window_V"))


def test_processes_and_sources(latch_130n):
    assert latch_130n.processes == ("tt", "ss", "ff")
    for source in latch_130n.sources:
        assert source.rows == len(column(source.file, "vdd_V"))
        assert source.sha256 == hashlib.sha256((FOLDER / source.file).read_bytes()).hexdigest()


@pytest.mark.parametrize("quantity", ["memory", "aperture", "energy", "kickback"])
def test_what_is_not_modelled_yet_is_a_notice(latch_130n, quantity):
    assert f"{quantity} is not modelled yet: {quantity}.csv is ignored" in latch_130n.notices
