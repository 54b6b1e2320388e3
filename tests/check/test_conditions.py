"""Conditions fill the range evenly and reach its edges and beyond."""

import numpy as np
import pytest

from behavgen.check.conditions import spread, spread_conditions
from tests.example_models import full_model, minimal_model, renamed_pins_model


@pytest.mark.parametrize("dimensions", [1, 2])
def test_points_fill_the_cube_more_evenly_than_chance(dimensions):
    """Cells of equal size get equal counts within 2, where chance would scatter by 10."""
    points = spread(1600, dimensions, start=77)
    assert np.all((points >= 0.0) & (points < 1.0))
    bins, span = [16 // dimensions**2] * dimensions, [(0.0, 1.0)] * dimensions
    cells, _ = np.histogramdd(points, bins=bins, range=span)
    assert np.abs(cells - cells.mean()).max() <= 3


def test_the_one_dimensional_step_is_the_golden_ratio():
    """Closed form: frac(1/2 + (n + 1)/phi)."""
    golden = (1.0 + 5.0**0.5) / 2.0
    expected = (0.5 + np.arange(1, 6) / golden) % 1.0
    np.testing.assert_allclose(spread(5, 1)[:, 0], expected, rtol=0, atol=1e-12)


def test_a_later_start_continues_the_sequence():
    np.testing.assert_array_equal(spread(10, 2)[4:], spread(6, 2, start=4))


def test_corners_edges_inside_and_beyond_are_all_met():
    vdd, vcm = spread_conditions(full_model(), 400, start=5)
    corners = set(zip(vdd[:4].tolist(), vcm[:4].tolist(), strict=True))
    assert corners == {(1.08, 0.5), (1.08, 0.8), (1.32, 0.5), (1.32, 0.8)}
    for value, low, high in ((vdd, 1.08, 1.32), (vcm, 0.5, 0.8)):
        assert (value == low).sum() > 5
        assert (value == high).sum() > 5
        assert (value < low).sum() > 5
        assert (value > high).sum() > 5
        assert ((value > low) & (value < high)).sum() > 250


def test_the_supply_never_switches_the_cell_off():
    model = full_model()
    tight = type(model.cell)(name="tight", supply_off_v=1.1)
    vdd, _ = spread_conditions(type(model)(**_fields(model) | {"cell": tight}), 200, start=0)
    assert vdd.min() == 1.1


def _fields(model):
    return {name: getattr(model, name) for name in model.__dataclass_fields__}


def test_without_a_supply_pin_the_supply_is_the_middle_of_its_range():
    vdd, _ = spread_conditions(renamed_pins_model(), 50, start=0)
    assert set(vdd) == {0.5 * (1.08 + 1.32)}


def test_conditions_that_were_not_characterised_still_vary():
    vdd, vcm = spread_conditions(minimal_model(), 50, start=0)
    assert np.ptp(vdd) > 0.1
    assert np.ptp(vcm) > 0.1
