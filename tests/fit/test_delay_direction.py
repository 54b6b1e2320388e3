"""Delays that do not fall are refused, their nearest neighbours are not; sides are compared."""

from dataclasses import replace

import numpy as np
import pytest

from behavgen.errors import FitError
from behavgen.fit.delay import fit_delay
from behavgen.fit.delay_report import delay_notices
from behavgen.tables.characterisation import Characterisation, TableSource
from tests.fit.weak_latches import delay_table

OVERDRIVE_V = np.geomspace(1e-5, 0.3, 12)
DELAY_S = 30e-12 + 12e-12 * np.log1p(0.1 / OVERDRIVE_V)


def table(delay_s, overdrive_v=OVERDRIVE_V):
    rows = np.column_stack(
        [np.broadcast_to([27.0, 1.0, 0.5], (len(delay_s), 3)), overdrive_v, delay_s]
    )
    source = TableSource(quantity="delay", file="delay.csv", sha256="0" * 64, rows=len(rows))
    return replace(delay_table(rows, 1e-9), sources=(source,))


@pytest.mark.parametrize(
    "delay_s",
    [DELAY_S[::-1], np.full(12, 1e-10), np.roll(DELAY_S, 5)],
    ids=["rising", "flat", "columns shifted"],
)
def test_delays_that_do_not_fall_are_refused(delay_s):
    with pytest.raises(FitError) as caught:
        fit_delay(table(delay_s), None, ("nominal",))
    (fault,) = caught.value.faults
    assert fault.file == "delay.csv"
    assert "27 C" in fault.what
    assert "offset" in fault.allowed


@pytest.mark.parametrize(
    "delay_s",
    [
        DELAY_S,
        np.where(OVERDRIVE_V > 0.05, DELAY_S[-4], DELAY_S),
        DELAY_S * (1.0 + 0.05 * (-1.0) ** np.arange(12)),
        np.concatenate([DELAY_S[:2][::-1], DELAY_S[2:]]),
    ],
    ids=["falling", "level at the end", "five percent of scatter", "two rows exchanged"],
)
def test_the_nearest_delays_that_fall_on_the_whole_are_not(delay_s):
    found = fit_delay(table(delay_s), None, ("nominal",))
    assert (np.diff(found.law.parameters[:, 1:], axis=-1) < 0.0).all()


def sides(gap):
    """Return the notices of a table whose ones take longer by a share than its zeros."""
    overdrive_v = np.concatenate([OVERDRIVE_V, -OVERDRIVE_V])
    both = table(np.concatenate([(1.0 + gap) * DELAY_S, DELAY_S]), overdrive_v)
    found = fit_delay(both, None, ("nominal",))
    return [n for n in delay_notices(found, Characterisation(cell="c", processes=(), delay=both))
            if "longer than" in n]  # fmt: skip


def test_ones_slower_than_zeros_are_named():
    (notice,) = sides(0.04)
    assert "ones take 4.0% longer than zeros" in notice
    (notice,) = sides(-0.04)
    assert "zeros take 4.2% longer than ones" in notice


def test_a_small_difference_between_them_is_not():
    assert not sides(0.01)
