"""The characterised latch, against a reading of its files with the csv module alone."""

from __future__ import annotations

import csv
import hashlib
from pathlib import Path

import numpy as np

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


def test_memory(latch_130n):
    memory = latch_130n.memory
    assert_conditions(memory.conditions, "memory.csv")
    np.testing.assert_array_equal(memory.reset_time_s, numbers("memory.csv", "t_reset_s"))
    np.testing.assert_array_equal(memory.memory_shift_v, numbers("memory.csv", "shift_V"))
    np.testing.assert_array_equal(memory.censored, numbers("memory.csv", "censored") == 1.0)


def test_aperture(latch_130n):
    aperture = latch_130n.aperture
    assert_conditions(aperture.conditions, "aperture.csv")
    times = numbers("aperture.csv", "t_step_rel_clk_s")
    np.testing.assert_array_equal(aperture.step_time_s, times)
    np.testing.assert_array_equal(aperture.step_weight, numbers("aperture.csv", "weight_after"))
    np.testing.assert_array_equal(aperture.step_v, numbers("aperture.csv", "step_V"))


def test_energy(latch_130n):
    energy = latch_130n.energy
    assert_conditions(energy.conditions, "energy.csv")
    np.testing.assert_array_equal(energy.vdiff_v, numbers("energy.csv", "vid_V"))
    np.testing.assert_array_equal(energy.energy_j, numbers("energy.csv", "energy_vdd_J"))
    assert np.isnan(energy.overdrive_v).all() and np.isnan(energy.cycle_time_s).all()


def test_kickback(latch_130n):
    kickback = latch_130n.kickback
    assert_conditions(kickback.conditions, "kickback.csv")
    common, differential = kickback.charge_common_c, kickback.charge_differential_c
    np.testing.assert_array_equal(common, numbers("kickback.csv", "q_cm_net_C"))
    np.testing.assert_array_equal(differential, numbers("kickback.csv", "q_diff_net_C"))
    np.testing.assert_array_equal(kickback.source_resistance_ohm, numbers("kickback.csv", "rs_ohm"))
