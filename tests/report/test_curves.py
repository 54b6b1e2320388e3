"""Table points beside the model: errors that were put in come out."""

import math
from dataclasses import replace

import numpy as np
import pytest

from behavgen.model import Condition, CurvePoints
from behavgen.reference import Reference
from behavgen.report.curves import curves, rms, worst
from tests.example_models import minimal_model
from tests.report.sample_cells import WORST_AT, WORST_ERROR, many_conditions_model

TAU_S, NODE_S, NODE_V = math.exp(-25.328436), math.exp(-24.412145), 0.5
"""The minimal model's law: t = t_node + tau ln(v_node / v)."""


def closed_form_delay(v):
    return NODE_S + TAU_S * np.log(NODE_V / np.asarray(v))


def minimal_with(quantity, x, y, trials=()):
    points = CurvePoints(quantity=quantity, condition=Condition(), x=x, y=y, trials=trials)
    model = replace(minimal_model(), points=(points,))
    (curve,) = curves(model, Reference(model), quantity)
    return curve


def test_known_errors_of_a_delay_are_found():
    x = (1e-5, 1e-3, 1e-1)
    table = closed_form_delay(x) / np.array([1.01, 0.98, 1.05])
    curve = minimal_with("delay", x, tuple(table))
    np.testing.assert_allclose(curve.error, [0.01, -0.02, 0.05], atol=1e-9)
    assert worst([curve]) == pytest.approx(0.05)
    assert rms([curve]) == pytest.approx(math.sqrt((0.01**2 + 0.02**2 + 0.05**2) / 3))


def test_a_window_errs_by_the_time_at_which_it_is_reached():
    v = np.array([1e-4, 1e-6])
    times = closed_form_delay(v)
    curve = minimal_with("window", tuple(times * 1.02), tuple(2.0 * v))
    np.testing.assert_allclose(curve.error, 1.0 / 1.02 - 1.0, rtol=1e-6)
    np.testing.assert_allclose(curve.model_y, 2.0 * v * np.exp(-0.02 * times / TAU_S), rtol=1e-6)


def test_the_line_is_the_model_between_the_table_ends():
    curve = minimal_with("delay", (1e-5, 1e-1), (1e-10, 5e-11))
    assert (curve.line_x[0], curve.line_x[-1]) == pytest.approx((1e-5, 1e-1))
    np.testing.assert_allclose(curve.line_y, closed_form_delay(curve.line_x), rtol=1e-9)


def test_a_single_point_and_a_zero_do_not_break():
    assert np.isnan(minimal_with("delay", (1e-3,), (0.0,)).error).all()
    assert math.isnan(worst([]))


def test_the_worst_of_many_conditions_is_the_one_that_was_made_so():
    model = many_conditions_model()
    found = curves(model, Reference(model), "delay")
    assert len(found) == 29
    errors = {c.condition: worst([c]) for c in found}
    assert max(errors, key=errors.__getitem__) == WORST_AT
    assert errors[WORST_AT] == pytest.approx(WORST_ERROR, rel=1e-6)
