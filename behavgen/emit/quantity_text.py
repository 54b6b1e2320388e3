"""What SystemVerilog does with each quantity when a condition changes.

A `QuantityText` holds the folds of a quantity's surfaces and the statements
that follow once the conditions they depend on are known.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field

import numpy as np

from behavgen.emit.coordinates import Coordinate, coordinate_names
from behavgen.emit.literals import real_literal
from behavgen.emit.surface_text import CONDITIONS, FoldedSurface, fold, horner_text
from behavgen.formulas.exact_math import exact_exp
from behavgen.model import Process, Surface

__all__ = [
    "QuantityText",
    "SurfaceFolder",
    "exponential",
    "fastest",
    "is_literal",
    "last_folded",
    "left_polynomial",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class QuantityText:
    """One quantity.

    Parameters
    ----------
    comment : str
        What it is, with its unit.
    folded : tuple of FoldedSurface
    finish : mapping
        Condition, or "" for the start, and the statements that follow its folds.
    only_if : str
        Without it nothing of this is needed; "": always needed.
    """

    comment: str
    folded: tuple[FoldedSurface, ...] = ()
    finish: Mapping[str, tuple[str, ...]] = field(default_factory=dict)
    only_if: str = ""

    def lines(self, condition: str) -> tuple[str, ...]:
        """Return the statements that belong to a condition, or with "" to the start."""
        folds = [
            f"{assignment.target} = {assignment.value};"
            for folded in self.folded
            for assignment in folded.assignments.get(condition, ())
        ]
        lines = (*folds, *self.finish.get(condition, ()))
        if not lines or not self.only_if:
            return lines
        return (f"if ({self.only_if}) begin", *(f"  {line}" for line in lines), "end")


@dataclass(frozen=True, slots=True, kw_only=True)
class SurfaceFolder:
    """Folds surfaces of one model."""

    processes: tuple[Process, ...]
    coordinates: tuple[Coordinate, ...]

    def __call__(
        self, name: str, surface: Surface, *, target: str, lazy: str = ""
    ) -> FoldedSurface:
        """Fold a surface; see `surface_text.fold`."""
        names = coordinate_names(surface, self.processes, self.coordinates)
        return fold(name, surface, self.processes, names, target=target, lazy=lazy)


def last_folded(
    folder: SurfaceFolder, name: str, surface: Surface, *, target: str
) -> tuple[FoldedSurface, str, str]:
    """Return the folds of all but the common mode, the value, and the fastest condition it needs.

    The value is an expression: one that is used once needs no variable of its own.
    """
    folded = folder(name, surface, target=target, lazy="vcm_v")
    names = coordinate_names(surface, folder.processes, folder.coordinates)
    common = "".join(name for axis, name in names.items() if axis.condition == "vcm_v")
    varies = any(powers[-1:] > (0,) for powers in folded.coefficients)
    value = left_polynomial(folded.coefficients, common)
    return folded, value, "vcm_v" if varies else folded.changes_with


def left_polynomial(coefficients: Mapping[tuple[int, ...], str], coordinate: str) -> str:
    """Write what is left of a polynomial when all but the common mode is folded."""
    if () in coefficients:
        return coefficients[()]
    return horner_text({powers[0]: text for powers, text in coefficients.items()}, coordinate)


def fastest(folded: Iterable[FoldedSurface]) -> str:
    """Return the fastest condition that any fold needs; "" when none needs any."""
    order = ("", *CONDITIONS)
    return max((one.changes_with for one in folded), key=order.index, default="")


def is_literal(text: str) -> bool:
    """Tell whether an expression is a number."""
    try:
        float(text)
    except ValueError:
        return False
    return True


def exponential(function: str, value: str) -> str:
    """Return the exponential of a variable, or of a literal as another literal."""
    if is_literal(value):
        return real_literal(float(exact_exp(np.array(float(value)))))
    return f"{function}({value})"
