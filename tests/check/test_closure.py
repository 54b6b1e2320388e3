"""Closure in simulation: what is right gives its tables back, what is wrong does not."""

import csv
from dataclasses import replace

import numpy as np
import pytest

from behavgen.check.closure.judgement import judged
from behavgen.check.closure.places import TableRow, place_of, table_rows
from behavgen.check.closure.recharacterise import recharacterise
from behavgen.check.closure.searches import narrowed
from behavgen.check.simulation import IcarusSimulation
from behavgen.model import Condition
from behavgen.simulators.icarus import find_icarus
from tests.check.by_hand import hand_model, hand_text
from tests.check.checking import checked, emitted_text
from tests.check.closed import closed_model
from tests.example_models import full_model

QUANTITIES = {
    "delay", "energy", "window", "noise", "reset", "memory", "memory_at_least", "aperture",
}  # fmt: skip


def results_of(model, folder, text=""):
    simulation = IcarusSimulation(icarus=find_icarus(), work=folder, logs=folder)
    found = recharacterise(simulation, model, text or emitted_text(model), seed=1)
    results, _ = judged(model, found)
    return {result.quantity: result for result in results}


@pytest.mark.slow
@pytest.mark.parametrize(
    "cell", [{}, {"in_reset": "hold"}, {"in_reset": "low", "decides_on": "falling"}], ids=str
)
def test_the_tables_come_back(cell, tmp_path):
    model = closed_model(**cell)
    results = results_of(model, tmp_path)
    holding = {"reset"} if cell.get("in_reset") == "hold" else set()
    assert {q for q, r in results.items() if not r.passed} == holding
    assert set(results) == QUANTITIES
    for quantity in ("delay", "energy"):
        assert results[quantity].rms_relative < 1e-4
    assert results["window"].rms_relative < 2e-3
    assert results["memory"].rms_relative < 1e-3


WRONG = {
    "delay": lambda row: row | {"y": tuple(1.05 * y for y in row["y"])},
    "energy": lambda row: row | {"y": tuple(1.1 * y for y in row["y"])},
    "window": lambda row: row | {"y": tuple(1.2 * y for y in row["y"])},
    "noise": lambda row: row | {"x": tuple(x + 2e-4 for x in row["x"])},
    "reset": lambda row: row | {"y": tuple(1.1 * y for y in row["y"])},
    "memory": lambda row: row | {"y": tuple(1.1 * y for y in row["y"])},
    "memory_at_least": lambda row: row | {"y": tuple(1.3 * y for y in row["y"])},
    "aperture": lambda row: row | {"x": tuple(1.2 * x for x in row["x"])},
}


@pytest.mark.slow
def test_tables_that_say_otherwise_do_not_come_back(tmp_path):
    model = closed_model()
    points = []
    for one in model.points:
        changed = WRONG[one.quantity]({"x": one.x, "y": one.y})
        points.append(replace(one, **changed))
    results = results_of(replace(model, points=tuple(points)), tmp_path, emitted_text(model))
    assert {q for q, r in results.items() if r.passed} == set()
    for result in results.values():
        assert "process " in result.worst[0].condition


@pytest.mark.slow
def test_a_check_answers_with_every_row(tmp_path):
    model = closed_model()
    report = checked(model, tmp_path, questions=("tables",))
    assert report.passed
    assert {result.quantity for result in report.closure} == QUANTITIES
    rows = list(csv.DictReader((tmp_path / "check" / "closure.csv").open()))
    assert len(rows) == sum(result.rows for result in report.closure)
    assert len(rows) == sum(len(p.x) for p in model.points) - 2 * 3  # one aperture a condition
    assert all(row["measured"] for row in rows)


def test_a_hand_written_module_is_characterised_by_its_own_constants(tmp_path):
    """Delay 25 ps + 10 ps ln(0.5 V / v), energy 40 fJ + 100 uW times the delay: by hand."""
    model = hand_model()
    here = Condition()
    overdrive = np.array([1e-5, 1e-3, 0.1])
    delay = 25e-12 + 10e-12 * np.log(0.5 / overdrive)
    points = [
        ("delay", overdrive, delay), ("energy", overdrive, 40e-15 + 1e-4 * delay),
        ("reset", [0.0], [30e-12]),
    ]  # fmt: skip
    template = full_model().points[0]
    model = replace(
        model,
        points=tuple(
            replace(template, quantity=q, condition=here, x=tuple(x), y=tuple(y))
            for q, x, y in points
        ),
    )
    results = results_of(model, tmp_path, hand_text())
    assert set(results) == {"delay", "energy", "reset"}
    for result in results.values():
        assert result.passed
        assert result.rms_relative < 1e-4


def test_a_search_finds_where_an_outcome_turns():
    edge = np.array([0.1234567, -0.9, 0.5])
    found = narrowed(-np.ones(3), np.ones(3), lambda v: v > edge[:, None], rounds=5, points=20)
    np.testing.assert_allclose(found, edge, atol=2.0 / 19**5)


def test_places_fill_in_what_a_table_does_not_say():
    model = full_model()
    place = place_of(model, Condition())
    assert place.process == "typ"
    assert (place.vdd_v, place.vcm_v) == pytest.approx((1.2, 0.65))
    assert place.temperature_c == pytest.approx(42.5)
    assert isinstance(table_rows(model, "noise")[0], TableRow)
    assert [row.number for row in table_rows(model, "noise")] == [1, 2, 3, 4]
