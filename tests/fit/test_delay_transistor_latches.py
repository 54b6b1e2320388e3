"""Circuits that no setting of the fit was made for, judged at operating points it never saw."""

import csv
from dataclasses import replace

import numpy as np
import pytest

from behavgen.fit.delay import fit_delay
from behavgen.fit.delay_report import delay_fits
from behavgen.fit.node_order import first_crossing
from behavgen.formulas.node_law import node_law_delay
from tests.fit.transistor_latches import FOLDER, LATCHES
from tests.fit.weak_latches import delay_table

THREE_LEVELS = {"shorted_p": (0.015, 0.04), "loaded_n": (0.008, 0.02), "two_stages": (0.015, 0.055),
                "two_supplies": (0.015, 0.04), "two_levels": (0.018, 0.06)}  # fmt: skip
"""Required at healthy points: 1.5 % rms, 4 % at worst; what is reached, where it is more or less.

Of `two_levels` all points count, those beside its weakest corner too. Of `two_stages` the one
point beyond 4 % lies beside a common mode at which its first stage starves: a kink that three
levels do not show.
"""


def read_rows(name):
    with (FOLDER / f"{name}.csv").open() as file:
        return np.array(
            [[float(value or "nan") for value in row.values()] for row in csv.DictReader(file)]
        )


def fitted(name, keep=lambda rows: rows[:, 0] < np.inf):
    rows = read_rows(name)
    table = delay_table(rows[keep(rows)], LATCHES[name].observed_for_s)
    return fit_delay(table, None, ("nominal",))


def between_errors(found, name):
    rows = read_rows(f"{name}_between")
    rows = rows[np.isfinite(rows[:, 4])]
    values = np.column_stack([rows[:, 0] + 273.15, rows[:, 1], rows[:, 2]])
    tau, nodes = np.split(np.exp(found.family.fit.predict(values)), [1], axis=1)
    return node_law_delay(rows[:, 3], found.law.log_node, tau[:, 0], nodes) / rows[:, 4] - 1.0


def rms(error):
    return float(np.sqrt(np.mean(error**2)))


@pytest.fixture(scope="module", params=LATCHES)
def case(request):
    return request.param, fitted(request.param)


def test_tabulated_delays_are_followed(case):
    # Required: 1 % rms and 3 % at worst at every condition.
    for found in delay_fits(case[1]):
        assert found.rms_relative < 0.01, found.condition
        assert found.worst_relative < 0.03, found.condition


def test_node_delays_fall_everywhere_in_the_box(case):
    assert first_crossing(case[1].family) is None


@pytest.mark.parametrize("name", THREE_LEVELS)
def test_delays_hold_between_the_tabulated_conditions(name):
    error = between_errors(fitted(name), name)
    assert rms(error) < THREE_LEVELS[name][0]
    assert np.abs(error).max() < THREE_LEVELS[name][1]


@pytest.mark.parametrize(
    ("name", "most_rms", "worst"), [("weak_n", 0.025, 0.05), ("shorted_n", 0.035, 0.09)]
)
def test_common_modes_near_threshold_and_two_temperatures_cost_accuracy(name, most_rms, worst):
    # Delays grow sevenfold over the box and a two-level axis shows only part of how.
    error = between_errors(fitted(name), name)
    assert rms(error) < most_rms
    assert np.abs(error).max() < worst


@pytest.mark.parametrize("name", ["shorted_p", "weak_n", "loaded_n", "two_supplies", "two_stages"])
def test_two_temperatures_tell_nearly_as_much_as_three(name):
    def cold_or_hot(rows):
        return rows[:, 0] != 27.0

    assert rms(between_errors(fitted(name, cold_or_hot), name)) < 0.02


@pytest.mark.parametrize("missing", [3, 13, 22])
def test_a_missing_condition_is_filled_in(missing):
    latch = LATCHES["loaded_n"]
    gone = latch.conditions[missing]
    error = between_errors(
        fitted("loaded_n", lambda rows: (rows[:, :3] != gone).any(axis=1)), "loaded_n"
    )
    assert rms(error) < 0.015


def test_the_stored_tables_are_what_their_generator_writes():
    latch = LATCHES["two_stages"]
    rows = read_rows("two_stages")[::29]
    again = replace(latch).delays(rows[:, :3], rows[:, 3])
    np.testing.assert_allclose(again, rows[:, 4], rtol=1e-4)
