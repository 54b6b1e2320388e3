"""Surfaces as text: read back and evaluated, they give the bits of the numerical surfaces."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

from behavgen.emit.surface_text import CONDITIONS, fold, horner_text
from behavgen.formulas.polynomial import dense_coefficients, nested_horner
from behavgen.model import Axis, Box, Process, Surface, Variant

PROCESSES = (Process(name="typ", code=0), Process(name="slow", code=1))


def random_surface(rng, conditions, *, zeros):
    """Return a surface with up to third powers, some terms missing, some zero, some shared."""
    axes = tuple(Axis(condition=name) for name in conditions)
    powers = list(itertools.product(range(4), repeat=len(axes)))
    kept = tuple(p for p in powers if rng.random() < 0.6) or (powers[0],)
    first = rng.normal(size=len(kept))
    first[rng.random(len(kept)) < zeros] = 0.0
    second = np.where(rng.random(len(kept)) < 0.5, first, rng.normal(size=len(kept)))
    return Surface(
        unit="V", transform="plain", axes=axes, exponents=kept,
        variants=tuple(
            Variant(process=process.name, coefficients=tuple(map(float, values)), box=Box())
            for process, values in zip(PROCESSES, (first, second), strict=True)
        ),
    )  # fmt: skip


def evaluated(folded, process, values):
    """Run the assignments as an emitted model does, slow conditions first."""
    known = dict(values)
    known |= {value.name: value.values[process] for value in folded.process_values}
    for condition in CONDITIONS:
        for assignment in folded.assignments.get(condition, ()):
            known[assignment.target] = eval(assignment.value, {}, known)
    return eval(folded.value, {}, known)


@pytest.mark.parametrize("zeros", [0.0, 0.5])
@pytest.mark.parametrize(
    "conditions",
    [c for n in range(4) for c in itertools.combinations(CONDITIONS, n)],
    ids=lambda c: "-".join(c) or "none",
)
def test_the_text_gives_the_bits_of_nested_horner(conditions, zeros):
    rng = np.random.default_rng(len(conditions))
    for _ in range(20):
        surface = random_surface(rng, conditions, zeros=zeros)
        names = {axis: f"x_{axis.condition[0]}{k}" for k, axis in enumerate(surface.axes)}
        folded = fold("q", surface, PROCESSES, names, target="q_v")
        point = rng.uniform(-1.5, 1.5, len(conditions))
        for process, variant in enumerate(surface.variants):
            dense = dense_coefficients(surface.exponents, variant.coefficients)
            expected = nested_horner(dense, tuple(np.array([x]) for x in point))
            values = dict(zip(names.values(), map(float, point), strict=True))
            assert evaluated(folded, process, values) == float(np.ravel(expected)[0])


def test_horner_is_nested_from_the_highest_power_and_without_zero_terms():
    assert horner_text({0: "a", 1: "b", 2: "-2.5"}, "x") == "(-2.5 * x + b) * x + a"
    assert horner_text({0: "-1.0", 2: "c"}, "x") == "c * x * x - 1.0"
    assert horner_text({1: "b"}, "x") == "b * x"
    assert horner_text({}, "x") == "0.0"


def test_only_what_differs_between_processes_becomes_a_variable():
    surface = Surface(
        unit="s", transform="log", axes=(Axis(condition="vdd_v"),), exponents=((0,), (1,)),
        variants=(
            Variant(process="typ", coefficients=(1.0, 0.25), box=Box()),
            Variant(process="slow", coefficients=(1.5, 0.25), box=Box()),
        ),
    )  # fmt: skip
    folded = fold("tau", surface, PROCESSES, {surface.axes[0]: "x_v"}, target="tau_ln")
    assert [(v.name, v.values) for v in folded.process_values] == [("tau_v0", (1.0, 1.5))]
    assert [(a.target, a.value) for a in folded.assignments["vdd_v"]] == [
        ("tau_ln", "0.25 * x_v + tau_v0")
    ]
    assert folded.changes_with == "vdd_v"


def test_a_lazy_condition_is_left_to_the_reader():
    surface = random_surface(np.random.default_rng(1), CONDITIONS, zeros=0.0)
    names = {axis: axis.condition for axis in surface.axes}
    folded = fold("tau", surface, PROCESSES, names, target="tau_ln", lazy="vcm_v")
    assert set(folded.coefficients) <= {(power,) for power in range(4)}
    assert "vcm_v" not in folded.assignments
