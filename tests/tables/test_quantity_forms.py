"""Every form of every quantity, from text to arrays in SI."""

from __future__ import annotations

import numpy as np
import pytest


def table(quantity, more=""):
    return f'quantity = "{quantity}"\nfile = "t.csv"\n{more}'


def test_offset_instances_with_measurement_brackets(read):
    text = "instance,offset [mV],offset_low [mV],offset_high [mV]\nm1,1,0.5,2\nm2,-3,,\n"
    offset = read({"t.csv": text}, table("offset")).offset
    assert offset.instance.tolist() == ["m1", "m2"]
    assert offset.offset_v.tolist() == [1e-3, -3e-3]
    np.testing.assert_array_equal(offset.offset_low_v, [0.5e-3, np.nan])
    np.testing.assert_array_equal(offset.offset_high_v, [2e-3, np.nan])


def test_offset_statistics(read):
    tables = read({"t.csv": "mean,sigma_mV,instances\n0,4,200\n"}, table("offset"))
    assert tables.offset is None
    statistics = tables.offset_statistics
    assert (statistics.mean_v, statistics.sigma_v, statistics.instances) == (0, 4e-3, 200)


def test_both_forms_of_offset_side_by_side(read):
    files = {"t.csv": "instance,offset\n1,0.001\n", "s.csv": "mean,sigma,instances\n0,1m,20\n"}
    tables = read(files, table("offset"), 'quantity = "offset"\nfile = "s.csv"')
    assert tables.offset.offset_v.tolist() == [1e-3]
    assert tables.offset_statistics.sigma_v.tolist() == [1e-3]
    assert [source.file for source in tables.sources] == ["t.csv", "s.csv"]


def test_noise_as_counts(read):
    noise = read({"t.csv": "vdiff_uV,trials,ones\n-100,200,3\n0,200,101\n"}, table("noise")).noise
    assert noise.vdiff_v.tolist() == [-100e-6, 0.0]
    assert noise.trials.tolist() == [200, 200] and noise.trials.dtype == np.int64
    assert noise.ones.tolist() == [3, 101]
    assert noise.instance.tolist() == ["", ""]
    assert noise.sigma_v.size == 0


def test_single_bits_arrive_counted_in_the_order_of_first_appearance(read):
    rows = ["0.001,1"] * 3 + ["-0.001,0"] * 4 + ["0.001,0"] * 2 + ["-0.001,1"]
    noise = read({"t.csv": "\n".join(["vdiff,bit", *rows, ""])}, table("noise")).noise
    assert noise.vdiff_v.tolist() == [0.001, -0.001]
    assert noise.trials.tolist() == [5, 5]
    assert noise.ones.tolist() == [3, 1]
    assert noise.sources[0].rows == 10


def test_bits_are_counted_for_each_condition_and_instance(read):
    text = "vdiff,bit,vdd,instance\n0,1,1.8,a\n0,1,1.8,b\n0,0,1.8,a\n0,1,1.6,a\n"
    noise = read({"t.csv": text}, table("noise")).noise
    assert noise.instance.tolist() == ["a", "b", "a"]
    assert noise.conditions.vdd_v.tolist() == [1.8, 1.8, 1.6]
    assert (noise.trials.tolist(), noise.ones.tolist()) == ([2, 1, 1], [1, 1, 1])


def test_noise_as_sigma(read):
    text = "sigma,sigma_error,vdd\n350u,12u,1.8\n400u,,1.6\n"
    noise = read({"t.csv": text}, table("noise")).noise
    assert noise.vdiff_v.size == 0
    assert noise.sigma_v.tolist() == [350e-6, 400e-6]
    np.testing.assert_array_equal(noise.sigma_error_v, [12e-6, np.nan])
    assert noise.sigma_conditions.vdd_v.tolist() == [1.8, 1.6]


def test_delay_by_overdrive(read):
    text = "overdrive,delay_ps,decision,offset\n-1m,41,0,2u\n1m,40.5,1,2u\n"
    delay = read({"t.csv": text}, table("delay", 'measured = "50 %"')).delay
    assert delay.overdrive_v.tolist() == [-1e-3, 1e-3]
    assert delay.delay_s.tolist() == [41e-12, 40.5e-12]
    assert delay.decision.tolist() == [0, 1]
    assert delay.offset_v.tolist() == [2e-6, 2e-6]
    assert delay.measured == "50 %"
    assert np.isnan(delay.observed_for_s).all()


def test_delay_by_input_becomes_delay_by_overdrive(read):
    text = "vdiff_mV,offset_mV,delay_ps\n3,1,50\n-1,1,50\n"
    delay = read({"t.csv": text}, table("delay")).delay
    assert delay.overdrive_v == pytest.approx([2e-3, -2e-3], rel=1e-12)
    assert delay.offset_v.tolist() == [1e-3, 1e-3]
    assert delay.decision.tolist() == [-1, -1]


def test_delay_by_input_without_offset_takes_it_as_zero_but_does_not_claim_it(read):
    delay = read({"t.csv": "vdiff,delay\n1m,50p\n"}, table("delay")).delay
    assert delay.overdrive_v.tolist() == [1e-3]
    assert np.isnan(delay.offset_v).all()


def test_an_empty_delay_is_censored_at_what_was_observed(read):
    text = "overdrive,delay,observed_for,decision\n1u,,5n,\n2u,1n,5n,1\n3u,,,\n"
    delay = read({"t.csv": text}, table("delay")).delay
    np.testing.assert_array_equal(delay.delay_s, [np.nan, 1e-9, np.nan])
    np.testing.assert_array_equal(delay.observed_for_s, [5e-9, 5e-9, np.nan])
    assert delay.decision.tolist() == [-1, 1, -1]


def test_a_delay_at_no_overdrive_is_left_out_and_said_so(read):
    text = "vdiff,offset,delay\n1m,1m,500p\n0.3,0.1,50p\n1m,1m,\n"
    tables = read({"t.csv": text}, table("delay"))
    assert tables.delay.overdrive_v == pytest.approx([0.2, 0.0])
    assert tables.delay.sources[0].rows == 2
    assert any("zero overdrive" in notice for notice in tables.notices)


def test_window_searched(read):
    text = "resolve_time_ps,window,searched_span\n100,1m,0.2\n50,,0.2\n"
    window = read({"t.csv": text}, table("window")).window
    assert window.resolve_time_s.tolist() == [100e-12, 50e-12]
    np.testing.assert_array_equal(window.window_v, [1e-3, np.nan])
    assert window.searched_span_v.tolist() == [0.2, 0.2]
    assert window.window_relative_error.tolist() == [0.0, 0.0]


def test_window_counted_is_a_share_of_the_span_with_its_binomial_error(read):
    text = "resolve_time,trials,unresolved,span\n100p,400,100,10m\n50p,400,400,10m\n1n,400,0,10m\n"
    window = read({"t.csv": text}, table("window")).window
    np.testing.assert_allclose(window.window_v, [2.5e-3, np.nan, 0.0])
    # sqrt(p (1-p) / n) / p with p = 1/4, n = 400
    assert window.window_relative_error[0] == pytest.approx(np.sqrt(0.25 * 0.75 / 400) / 0.25)
    assert window.window_relative_error[2] == np.inf
    assert window.searched_span_v.tolist() == [10e-3] * 3


def test_searched_and_counted_windows_side_by_side(read):
    files = {
        "t.csv": "resolve_time,trials,unresolved,span\n1n,100,50,1m\n",
        "s.csv": "resolve_time,window\n2n,1u\n",
    }
    tables = read(files, table("window"), 'quantity = "window"\nfile = "s.csv"')
    assert tables.window.resolve_time_s.tolist() == [2e-9, 1e-9]
    assert tables.window.window_v.tolist() == [1e-6, 0.5e-3]
    assert [source.file for source in tables.window.sources] == ["s.csv", "t.csv"]


def test_reset(read):
    reset = read({"t.csv": "reset_delay,vdd\n25p,1.8\n"}, table("reset")).reset
    assert reset.reset_delay_s.tolist() == [25e-12]
    assert reset.conditions.vdd_v.tolist() == [1.8]


def test_a_column_may_be_fixed_for_the_whole_file(read):
    text = "vdiff,ones\n-1m,3\n1m,197\n"
    noise = read({"t.csv": text}, table("noise", "at = { trials = 200, vdd = '1800m' }")).noise
    assert noise.trials.tolist() == [200, 200]
    assert noise.conditions.vdd_v.tolist() == [1.8, 1.8]


def test_memory_with_and_without_bounds(read):
    text = "reset_time_ps,memory_shift_mV,censored\n60,100,1\n150,30,0\n"
    memory = read({"t.csv": text}, table("memory")).memory
    assert memory.reset_time_s.tolist() == [60e-12, 150e-12]
    assert memory.memory_shift_v.tolist() == [0.1, 0.03]
    assert memory.censored.tolist() == [True, False]
    plain = "reset_time,memory_shift\n60p,-1u\n"
    assert read({"t.csv": plain}, table("memory")).memory.censored.tolist() == [False]


def test_aperture(read):
    text = "step_time_ps,step_weight,vcm\n-80,1.001,0.9\n40,0.5,0.9\n170,-0.0008,0.9\n"
    aperture = read({"t.csv": text}, table("aperture", "at = { step = '20m' }")).aperture
    assert aperture.step_time_s.tolist() == [-80e-12, 40e-12, 170e-12]
    assert aperture.step_weight.tolist() == [1.001, 0.5, -0.0008]
    assert aperture.step_v.tolist() == [0.02] * 3
    assert aperture.conditions.vcm_v.tolist() == [0.9] * 3


def test_energy_by_overdrive_or_by_input(read):
    files = {
        "t.csv": "overdrive_mV,energy_fJ\n1,120\n",
        "u.csv": "vdiff,energy,cycle_time\n-2m,95f,2n\n",
    }
    energy = read(files, table("energy"), 'quantity = "energy"\nfile = "u.csv"').energy
    np.testing.assert_array_equal(energy.overdrive_v, [1e-3, np.nan])
    np.testing.assert_array_equal(energy.vdiff_v, [np.nan, -2e-3])
    assert energy.energy_j == pytest.approx([120e-15, 95e-15])
    np.testing.assert_array_equal(energy.cycle_time_s, [np.nan, 2e-9])


def test_kickback_in_coulombs(read):
    text = "charge_common_fC,charge_differential_C,vdiff,source_resistance\n-3.6,-2e-16,0.1,1k\n"
    kickback = read({"t.csv": text}, table("kickback")).kickback
    assert kickback.charge_common_c == pytest.approx([-3.6e-15])
    assert kickback.charge_differential_c.tolist() == [-2e-16]
    assert kickback.vdiff_v.tolist() == [0.1]
    assert kickback.source_resistance_ohm.tolist() == [1000.0]


@pytest.mark.parametrize(
    ("quantity", "text", "what"),
    [
        ("memory", "reset_time,memory_shift\n0,1m\n", "above 0"),
        ("memory", "reset_time,memory_shift,censored\n1n,1m,2\n", "0 or 1"),
        ("aperture", "step_time,step_weight\n1p,1.3\n", "at most 1.2"),
        ("aperture", "step_time,step_weight\n1p,-0.3\n", "at least -0.2"),
        ("energy", "overdrive,energy\n1m,0\n", "above 0"),
        (
            "kickback",
            "charge_common,charge_differential,source_resistance\n1f,0,-1\n",
            "at least 0",
        ),
    ],
)
def test_what_cannot_be_is_refused(faults, quantity, text, what):
    (fault,) = faults({"t.csv": text}, table(quantity))
    assert what in fault


def test_absent_tables_are_absent(read):
    tables = read({"t.csv": "reset_delay\n25p\n"}, table("reset"))
    assert tables.offset is tables.noise is tables.delay is tables.window is None
