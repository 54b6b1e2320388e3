"""Delay rows that did not resolve, and conditions of which little resolved."""

import numpy as np
import pytest

from behavgen.errors import FitError
from behavgen.fit.delay import fit_delay
from behavgen.fit.delay_report import delay_fits, delay_notices
from behavgen.formulas.node_law import node_law_delay
from behavgen.tables.characterisation import Characterisation
from tests.fit.weak_latches import LATCHES, delay_table, read_rows

OVERDRIVE_V = np.geomspace(1e-6, 0.3, 20)
COLD, HOT = -40.0, 125.0


def slowness(temp_c, vdd_v):
    """Return how much slower than at 27 C and 1 V: an invented power law near a threshold."""
    return ((vdd_v - 0.55 + 0.7e-3 * (temp_c - 27.0)) / 0.45) ** -1.5


def true_delay(temp_c, vdd_v, overdrive_v):
    return slowness(temp_c, vdd_v) * (60e-12 + 12e-12 * np.log1p(0.05 / overdrive_v))


def made_up_rows(observed_for_s=np.inf):
    """Return a table of known delays, cut off where they were not observed long enough."""
    rows = np.array(
        [
            (temp_c, vdd_v, np.nan, v, true_delay(temp_c, vdd_v, v))
            for temp_c in (COLD, 27.0, HOT)
            for vdd_v in (0.8, 0.9, 1.0, 1.1)
            for v in OVERDRIVE_V
        ]
    )
    rows[rows[:, 4] > observed_for_s, 4] = np.nan
    return rows


def fitted(rows, observed_for_s):
    table = delay_table(rows, observed_for_s)
    found = fit_delay(table, None, ("nominal",))
    notices = delay_notices(found, Characterisation(cell="c", processes=(), delay=table))
    return found, " ".join((*found.notices, *notices))


def modelled(found, rows):
    values = np.column_stack([rows[:, 0] + 273.15, rows[:, 1], rows[:, 2]])
    tau, nodes = np.split(np.exp(found.family.fit.predict(values)), [1], axis=1)
    return node_law_delay(rows[:, 3], found.law.log_node, tau[:, 0], nodes)


def at(rows, temp_c, vdd_v):
    return (rows[:, 0] == temp_c) & (rows[:, 1] == vdd_v)


@pytest.mark.parametrize("observed_for_s", [0.6e-9, 0.45e-9, 0.3e-9])
def test_what_did_not_resolve_takes_longer_than_it_was_observed(observed_for_s):
    rows = made_up_rows(observed_for_s)
    open_rows = np.isnan(rows[:, 4])
    assert open_rows.any()
    found, notices = fitted(rows, observed_for_s)
    assert (modelled(found, rows)[open_rows] > observed_for_s).all()
    assert f"{open_rows.sum()} delay rows did not resolve" in notices
    assert "the model takes longer than that" in notices


@pytest.mark.parametrize("observed_for_s", [0.6e-9, 0.45e-9, 0.3e-9])
def test_delays_that_did_not_resolve_are_foreseen(observed_for_s):
    # The truth behind the cut: the corner's shape is that of the others.
    rows, truth = made_up_rows(observed_for_s), made_up_rows()
    error = modelled(fitted(rows, observed_for_s)[0], rows) / truth[:, 4] - 1.0
    assert np.abs(error).max() < 0.05


def test_a_condition_at_which_nothing_resolved_is_named_and_bounded():
    rows = made_up_rows()
    silent = at(rows, COLD, 0.8)
    observed_s = 0.98 * rows[silent, 4].min()
    rows[silent, 4] = np.nan
    found, notices = fitted(rows, observed_s)
    assert "No delay resolved at 0.8 V, -40 C; the model's range includes it" in notices
    assert (modelled(found, rows)[silent] > observed_s).all()
    rest = modelled(found, rows)[~silent] / rows[~silent, 4] - 1.0
    assert np.abs(rest).max() < 0.03


def test_a_silent_supply_is_out_of_range_and_said_to_be():
    rows = made_up_rows()
    rows[rows[:, 1] == 0.8, 4] = np.nan
    found, notices = fitted(rows, 1e-12)
    assert found.family.boxes["nominal"].vdd_v.low == 0.9
    assert "No delay resolved at 0.8 V, -40 C and 2 more; it lies outside" in notices


def test_rows_that_do_not_say_how_long_they_were_observed_are_not_used():
    rows = made_up_rows(0.6e-9)
    count = int(np.isnan(rows[:, 4]).sum())
    notices = fitted(rows, np.nan)[1]
    assert f"{count} of them do not say for how long and are not used" in notices


def test_bounds_that_contradict_resolved_rows_are_admitted():
    # A row that resolves between two that are said not to have, at a tenth of their time.
    rows = made_up_rows()
    middle = at(rows, 27.0, 1.0)
    rows[np.flatnonzero(middle)[::2], 4] = np.nan
    found, notices = fitted(rows, 1e-9)
    assert "the model takes less time than that" in notices
    elsewhere = ~middle & np.isfinite(rows[:, 4])
    error = modelled(found, rows)[elsewhere] / rows[elsewhere, 4] - 1.0
    assert np.abs(error).max() < 0.1


@pytest.mark.parametrize("kept", [1, 2, 3, 5])
@pytest.mark.parametrize("end", ["small", "large"])
def test_a_few_rows_scale_the_shape_of_the_others(kept, end):
    rows, truth = made_up_rows(), made_up_rows()
    here = np.flatnonzero(at(rows, HOT, 1.0))
    gone = here[kept:] if end == "small" else here[:-kept]
    rows = np.delete(rows, gone, axis=0)
    found, notices = fitted(rows, np.nan)
    error = modelled(found, truth) / truth[:, 4] - 1.0
    assert np.abs(error).max() < 0.03
    assert "At 1 of 12 conditions the rows that resolved do not tell the whole delay law" in notices
    assert f"fewest at 1 V, 125 C ({kept})" in notices


def test_ragged_overdrive_ranges_agree_with_full_ones():
    rng = np.random.default_rng(4)
    latch, rows = LATCHES["three_common_modes"], read_rows("three_common_modes")
    count = len(OVERDRIVE_V)
    sites = len(rows) // count
    low, high = rng.integers(0, 7, sites), count - rng.integers(0, 4, sites)
    place = np.tile(np.arange(count), sites)
    keep = (place >= np.repeat(low, count)) & (place < np.repeat(high, count))
    found = fit_delay(delay_table(rows[keep], latch.observed_for_s), None, ("nominal",))
    error = modelled(found, rows) / rows[:, 4] - 1.0
    assert np.abs(error[keep]).max() < 0.03
    assert np.sqrt(np.mean(error**2)) < 0.02
    assert np.abs(error).max() < 0.2


def test_one_resolved_row_everywhere_is_refused():
    rows = made_up_rows()
    rows[np.tile(np.arange(20), 12) != 19, 4] = np.nan
    with pytest.raises(FitError):
        fitted(rows, 1e-9)


def test_bounds_count_as_no_rows_in_the_report():
    rows = made_up_rows(0.6e-9)
    found, _ = fitted(rows, 0.6e-9)
    reported = sum(f.rows for f in delay_fits(found))
    assert reported == np.isfinite(rows[:, 4]).sum()
