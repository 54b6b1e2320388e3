"""Nested polynomials against numpy's own."""

import numpy as np
import pytest

from behavgen.formulas.polynomial import (
    axis_coordinate,
    dense_coefficients,
    nested_horner,
    quantise,
)


def test_nested_horner_equals_the_sum_of_terms():
    rng = np.random.default_rng(1)
    exponents = ((0, 0, 0), (1, 0, 2), (0, 2, 0), (2, 1, 1))
    coefficients = rng.normal(size=4)
    x = rng.uniform(-1, 1, size=(3, 50))
    expected = sum(
        c * x[0] ** i * x[1] ** j * x[2] ** k
        for c, (i, j, k) in zip(coefficients, exponents, strict=True)
    )
    dense = dense_coefficients(exponents, coefficients)
    assert nested_horner(dense, tuple(x)) == pytest.approx(expected, rel=1e-13, abs=1e-14)


def test_one_axis_is_horners_rule_to_the_last_bit():
    x = np.array([0.3, -0.7])
    dense = dense_coefficients(((0,), (1,), (2,)), (1.1, 2.2, 3.3))
    assert (nested_horner(dense, (x,)) == (3.3 * x + 2.2) * x + 1.1).all()


def test_no_axis_is_a_constant():
    assert nested_horner(dense_coefficients(((),), (4.5,)), ()) == 4.5


@pytest.mark.parametrize(
    ("shape", "expected"),
    [
        ("plain", 3.0),
        ("reciprocal", 0.0),
        ("reciprocal_square", -0.5),
        ("reciprocal_fourth", -0.875),
    ],
)
def test_axis_shapes(shape, expected):
    assert axis_coordinate(np.array([2.0]), shape, 0.5, 0.5)[0] == expected


def test_quantise_is_idempotent_and_near():
    x = np.linspace(-3.0, 3.0, 1001)
    q = quantise(x, 2.0**20)
    assert (quantise(q, 2.0**20) == q).all()
    assert np.abs(q - x).max() <= 2.0**-21
