"""Exact logarithm and exponential against 40-digit decimal arithmetic."""

from decimal import Decimal, getcontext

import numpy as np
import pytest

from behavgen.formulas.exact_math import exact_exp, exact_ln

getcontext().prec = 40
LAST_PLACE = 2.0**-52


@pytest.mark.parametrize("x", [-40.0, -7.6, -1.0, -1e-9, 0.0, 0.3, 0.3466, 1.0, 12.5, 300.0])
def test_exponential_is_right_to_two_last_places(x):
    truth = float(Decimal(x).exp())
    assert exact_exp(np.array([x]))[0] == pytest.approx(truth, rel=2 * LAST_PLACE)


@pytest.mark.parametrize("x", [1e-300, 1.1e-16, 0.1, 0.49999, 0.70710678, 0.75, 1.0, 3.0, 1e200])
def test_logarithm_is_right_to_three_last_places(x):
    truth = float(Decimal(x).ln())
    assert exact_ln(np.array([x]))[0] == pytest.approx(truth, rel=3 * LAST_PLACE, abs=1e-17)


def test_exponential_of_nothing_is_exactly_one():
    assert exact_exp(np.array([0.0]))[0] == 1.0
