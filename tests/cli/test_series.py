"""Numbers of options: one, several, series; and how they are refused."""

from __future__ import annotations

import doctest

import pytest

from behavgen.cli import answer_numbers
from behavgen.cli import series as series_module
from behavgen.cli.series import series
from behavgen.units import UnitError


@pytest.mark.parametrize(
    ("text", "dimension", "values"),
    [
        ("1m", "V", (1e-3,)),
        ("-1m,2 mV,5e-3", "V", (-1e-3, 2e-3, 5e-3)),
        ("1.1:1.3:0.05", "V", (1.1, 1.15, 1.2, 1.25, 1.3)),
        ("1.3:1.1:-0.1", "V", (1.3, 1.2, 1.1)),
        ("0:1:0.3", "V", (0.0, 0.3, 0.6, 0.9)),
        ("1u:1m:x10", "V", (1e-6, 1e-5, 1e-4, 1e-3)),
        ("1n:100p:x0.1", "s", (1e-9, 1e-10)),
        ("-40:125:55", "K", (-40.0, 15.0, 70.0, 125.0)),
        ("300.15K,85C,27", "K", (27.0, 85.0, 27.0)),
        ("1G,500MHz", "Hz", (1e9, 5e8)),
    ],
)
def test_values(text: str, dimension: str, values: tuple[float, ...]) -> None:
    assert series(text, dimension) == values


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("1,5 mV,", "empty cell"),
        ("1:2", "not START:STOP:STEP"),
        ("1:2:-1", "the step does not lead"),
        ("1:2:0", "the step does not lead"),
        ("1:2:x1", "the factor does not lead"),
        ("0:2:x2", "the factor does not lead"),
        ("1:0.1:x2", "the factor does not lead"),
        ("0:1:1u", "more than 10000 values"),
        ("fast", "not a number"),
        ("1ps", "V"),
    ],
)
def test_refusals(text: str, message: str) -> None:
    with pytest.raises(UnitError, match=message):
        series(text, "V")


@pytest.mark.parametrize("module", [series_module, answer_numbers])
def test_examples_in_docstrings(module: object) -> None:
    assert doctest.testmod(module).failed == 0
