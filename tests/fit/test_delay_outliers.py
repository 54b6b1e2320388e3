"""Single gross rows in delay tables."""

from pathlib import Path

import numpy as np
import pytest

from behavgen.fit.delay import fit_delay
from behavgen.fit.delay_rows import resolved_rows
from behavgen.fit.outlying_rows import without_outlying
from behavgen.project import load_project
from behavgen.tables.read import read_tables
from tests.fit.weak_latches import LATCHES, OVERDRIVE_V, delay_table, read_rows

LATCH = LATCHES["three_common_modes"]
LATCH_130N = Path(__file__).parents[1] / "data" / "latch_130n"
COUNT = len(OVERDRIVE_V)
CONDITION = 13  # 27 C, 1 V, common mode 0.6 V


def judged(rows):
    table = delay_table(rows, LATCH.observed_for_s)
    kept, notices = without_outlying(resolved_rows(table, None, ("nominal",)))
    return np.flatnonzero(kept.weight == 0.0).tolist(), " ".join(notices)


def spoiled(place, factor):
    rows = read_rows("three_common_modes").copy()
    rows[CONDITION * COUNT + place, 4] *= factor
    return rows


@pytest.mark.parametrize("factor", [0.5, 2.0])
@pytest.mark.parametrize("place", range(COUNT))
def test_a_row_off_by_two_is_the_one_left_out(place, factor):
    gone, notices = judged(spoiled(place, factor))
    assert gone == [CONDITION * COUNT + place]
    assert f"{OVERDRIVE_V[place] * 1e3:.4g} mV at 1 V, 27 C, vcm 0.6 V" in notices
    stated = float(notices.split("vcm 0.6 V (")[1].split(" ")[0])
    # At the ends the next rows are extrapolated: within a sixth of the factor.
    assert stated == pytest.approx(factor, rel=1 / 6)


@pytest.mark.parametrize("place", [0, 7, COUNT - 1])
def test_the_others_are_fitted_as_if_the_row_were_not_there(place):
    rows = spoiled(place, 2.0)
    with_row = fit_delay(delay_table(rows, LATCH.observed_for_s), None, ("nominal",))
    rest = np.delete(rows, CONDITION * COUNT + place, axis=0)
    without = fit_delay(delay_table(rest, LATCH.observed_for_s), None, ("nominal",))
    assert with_row.law.chosen.name == without.law.chosen.name
    np.testing.assert_allclose(with_row.law.parameters, without.law.parameters, rtol=1e-6)


def test_two_bad_rows_of_a_condition_are_both_found():
    rows = spoiled(4, 2.0)
    rows[CONDITION * COUNT + 12, 4] *= 0.5
    assert sorted(judged(rows)[0]) == [CONDITION * COUNT + 4, CONDITION * COUNT + 12]


def test_a_condition_of_many_bad_rows_is_left_alone():
    rows = read_rows("three_common_modes").copy()
    rows[CONDITION * COUNT : (CONDITION + 1) * COUNT : 2, 4] *= 2.0
    assert judged(rows)[0] == []


@pytest.mark.parametrize("name", LATCHES)
@pytest.mark.parametrize("every", [1, 2])
def test_clean_tables_lose_no_row(name, every):
    rows = read_rows(name)
    rows = rows[np.tile(np.arange(COUNT) % every == 0, len(rows) // COUNT)]
    assert judged(rows) == ([], "")


def test_the_real_table_loses_no_row_and_is_passed_on_as_it_is():
    tables = read_tables(load_project(LATCH_130N), "latch_130n")
    rows = resolved_rows(tables.delay, tables.window, ("tt", "ss", "ff"))
    assert without_outlying(rows)[0] is rows


@pytest.mark.parametrize("spread", [0.003, 0.03, 0.1])
def test_noisy_tables_lose_hardly_any_row(spread):
    # Six deviations of a normal distribution: 2e-9 of all rows; the scale is a median
    # over 540 rows and good to 5 %.
    rng = np.random.default_rng(5)
    rows = read_rows("three_common_modes").copy()
    rows[:, 4] *= np.exp(spread * rng.standard_normal(len(rows)))
    assert judged(rows)[0] == []
