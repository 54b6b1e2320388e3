"""The reset delay in words."""

import math
from dataclasses import replace

import pytest

from behavgen.model import Condition, CurvePoints, ResetEffect
from behavgen.reference import Reference
from behavgen.report.reset_words import reset_sentence
from tests.example_models import constant_surface, minimal_model

NBSP = "\N{NO-BREAK SPACE}"


def model_with(*rows_s):
    """Return a model whose reset takes 20 ps everywhere."""
    surface = constant_surface("s", "log", math.log(20e-12), "nominal")
    points = tuple(
        CurvePoints(quantity="reset", condition=Condition(vdd_v=1.0 + k), x=(0.0,), y=(row,))
        for k, row in enumerate(rows_s)
    )
    return replace(minimal_model(), reset=ResetEffect(surface=surface), points=points)


def test_the_worst_row_decides():
    model = model_with(20e-12, 25e-12, 19e-12)
    text = reset_sentence(model, Reference(model))
    assert f"19 … 25{NBSP}ps" in text
    assert "3 conditions" in text
    assert f"within 20{NBSP}% of every row" in text  # 20 ps where the table says 25 ps


@pytest.mark.parametrize(
    ("model", "words"),
    [
        (minimal_model(), "No reset delay was characterised"),
        (model_with(), f"20{NBSP}ps after the reset edge"),
        (model_with(0.0), "at 1 condition."),
    ],
)
def test_what_is_missing_is_said(model, words):
    assert words in reset_sentence(model, Reference(model))
