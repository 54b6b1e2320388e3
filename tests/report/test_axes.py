"""Axes: places are the maps they claim to be, and ticks are where people look for them."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from behavgen.report.axes import PlotAxis, axis_title, spanning, symmetric, ticks


def linear(low, high, unit="s"):
    return PlotAxis(label="Delay", unit=unit, low=low, high=high)


def logarithmic(low, high):
    return PlotAxis(label="Overdrive", unit="V", low=low, high=high, logarithmic=True)


@given(st.floats(-50.0, 50.0), st.floats(1e-13, 1e3))
def test_linear_ticks_are_even_inside_and_few(start, width):
    axis = linear(start * width, start * width + width)
    values = np.array([tick.value for tick in ticks(axis)])
    assert 2 <= len(values) <= axis.most_ticks + 1
    assert np.all(values >= axis.low - 1e-6 * width)
    assert np.all(values <= axis.high + 1e-6 * width)
    assert np.ptp(np.diff(values)) <= 1e-6 * width


@given(st.floats(-15, 0), st.floats(0.5, 15))
def test_log_ticks_are_labelled_inside_and_few(exponent, decades):
    axis = logarithmic(10.0**exponent, 10.0 ** (exponent + decades))
    found = ticks(axis)
    assert all(axis.low * 0.999 <= t.value <= axis.high * 1.001 for t in found)
    assert 1 <= sum(bool(t.label) for t in found) <= axis.most_ticks + 2
    digits = {f"{t.value:e}"[0] for t in found}
    assert digits <= set("123456789")


def test_places_are_the_logarithm_between_the_ends():
    axis = logarithmic(1e-6, 1.0)
    np.testing.assert_allclose(axis.place([1e-6, 1e-3, 1.0]), [0.0, 0.5, 1.0], atol=1e-12)


def test_places_are_straight_between_the_ends():
    np.testing.assert_allclose(linear(2.0, 4.0).place([2.0, 3.0, 4.5]), [0.0, 0.5, 1.25])


def test_labels_share_the_prefix_of_the_axis():
    axis = linear(0.0, 320e-12)
    assert axis_title(axis) == "Delay (ps)"
    assert [t.label for t in ticks(axis)] == ["0", "100", "200", "300"]
    assert axis_title(logarithmic(1e-6, 1.0)) == "Overdrive"
    assert [t.label for t in ticks(logarithmic(1e-6, 1e-4)) if t.label] == [
        "1\N{NO-BREAK SPACE}µV", "10\N{NO-BREAK SPACE}µV", "100\N{NO-BREAK SPACE}µV",
    ]  # fmt: skip


def test_per_cent_takes_no_prefix():
    assert axis_title(linear(-2000.0, 2000.0, unit="%")) == "Delay (%)"


@pytest.mark.parametrize(
    ("values", "log"),
    [([], False), ([], True), ([3.0], False), ([0.0], False), ([1e-6], True),
     ([math.nan, math.inf, 1.0], False), ([-1.0, 0.0, 2.0], True)],
)  # fmt: skip
def test_an_axis_around_whatever_values_has_a_width(values, log):
    low, high = spanning(values, logarithmic=log)
    assert math.isfinite(low) and math.isfinite(high) and low < high
    assert low > 0.0 or not log
    kept = [v for v in values if math.isfinite(v) and (v > 0.0 or not log)]
    assert all(low <= v <= high for v in kept)


def test_residual_axes_are_symmetric_and_leave_room():
    low, high = symmetric([-5.8, -4.9])
    assert low == -high
    assert high > 1.1 * 5.8
