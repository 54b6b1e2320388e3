"""The rows that drive a drift are those of the planted change, with file and line."""

from __future__ import annotations

from dataclasses import replace

import pytest

from behavgen.regress.driving_rows import driving_rows
from tests.example_models import complete_model
from tests.regress.invented_cells import OVERDRIVES_V, SUPPLIES_V, Truth, drawn_model


def test_rows_of_the_slow_process_drive_its_drift(first, slower):
    rows = driving_rows(first, slower, ["delay"])
    # The process stands in the table behind the three supplies of the other one.
    behind = 1 + len(SUPPLIES_V) * len(OVERDRIVES_V)
    assert len(rows) == 5
    assert {row.file for row in rows} == {"delay.csv"}
    assert all(behind < row.line <= behind + len(OVERDRIVES_V) for row in rows)
    assert all(row.residual == pytest.approx(0.03, abs=0.02) for row in rows)


def test_rows_of_a_noisier_latch_are_far_out_in_deviations(first):
    noisy = drawn_model(Truth(sigma_v=6e-4 * 1.3), seed=2)
    rows = driving_rows(first, noisy, ["noise"])
    assert {row.quantity for row in rows} == {"noise"}
    # At 1.1 sigma a share of 0.136 becomes 0.199: 5.8 deviations of 1000 trials.
    assert all(row.in_deviations and abs(row.residual) > 4.0 for row in rows)


def test_an_outlying_instance_is_found(first):
    points = [p for p in first.points if p.quantity == "offset"]
    moved = replace(points[0], y=(0.05, *points[0].y[1:]))
    new = replace(first, points=(*(p for p in first.points if p.quantity != "offset"), moved))
    (row,) = driving_rows(first, new, ["mismatch"])
    assert row.place == "offset.csv:2"
    assert row.residual == pytest.approx(0.05 / 5e-3, rel=0.4)


@pytest.mark.parametrize(
    ("of", "quantity"),
    [
        ("memory", "memory"),
        ("aperture", "aperture"),
        ("energy", "energy"),
        ("kickback", "kickback_common"),
        ("delay", "window"),
    ],
)
def test_one_changed_row_of_any_table_is_found(of, quantity):
    old = complete_model()
    points = next(p for p in old.points if p.quantity == quantity)
    changed = replace(
        points, y=(points.y[0] * 1.5, *points.y[1:]), files=("t.csv",),
        lines=tuple(range(2, 2 + len(points.x))),
    )  # fmt: skip
    new = replace(old, points=tuple(changed if p is points else p for p in old.points))
    (row,) = driving_rows(old, new, [of])
    assert (row.quantity, row.place) == (quantity, "t.csv:2")


def test_rows_that_stayed_as_they_were_drive_nothing(first):
    assert driving_rows(first, first, ["delay", "noise", "mismatch"]) == ()
