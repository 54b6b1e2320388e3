"""Surfaces as assignments: nested Horner expressions, folded one condition at a time.

A polynomial in temperature, supply and common mode becomes a polynomial in
supply and common mode as soon as the temperature is known, and so on. Each
fold is an `Assignment` that belongs to the condition which completes it, so
that an emitted model repeats only what has changed. Numbers that are known
when the text is written stay literals; coefficients that differ between
processes become variables (`ProcessValue`).

The order of operations is that of `formulas.polynomial`. Terms that are zero
in every process are left out: multiplying zero and adding it changes no bit.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from behavgen.emit.literals import real_literal
from behavgen.model import Axis, Process, Surface

__all__ = [
    "CONDITIONS",
    "Assignment",
    "FoldedSurface",
    "ProcessValue",
    "fold",
    "horner_text",
    "process_value",
]

CONDITIONS = ("temperature_k", "vdd_v", "vcm_v")
"""In the order of folding, slowest first."""

_LETTERS = {"temperature_k": "t", "vdd_v": "v", "vcm_v": "c"}

Powers = tuple[int, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Assignment:
    """A variable of the emitted text and the expression that gives it its value."""

    target: str
    value: str


@dataclass(frozen=True, slots=True, kw_only=True)
class ProcessValue:
    """A variable whose value depends on the process only; one value a process, in order."""

    name: str
    values: tuple[float, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class FoldedSurface:
    """A surface's polynomial as text.

    Parameters
    ----------
    process_values : tuple of ProcessValue
    assignments : mapping
        Condition and the assignments that it completes, in `CONDITIONS`' order.
    coefficients : mapping
        Power of each condition that is not yet folded and the coefficient there,
        a literal or a variable's name. After the last fold the key is ``()``.
    """

    process_values: tuple[ProcessValue, ...]
    assignments: Mapping[str, tuple[Assignment, ...]]
    coefficients: Mapping[Powers, str]

    @property
    def value(self) -> str:
        """The whole polynomial; only after the last fold."""
        return self.coefficients[()]

    @property
    def changes_with(self) -> str:
        """Fastest condition that any assignment needs; "" when the value is a literal."""
        needed = [name for name in CONDITIONS if self.assignments.get(name)]
        return needed[-1] if needed else ""


def process_value(name: str, values: Iterable[float]) -> tuple[str, tuple[ProcessValue, ...]]:
    """Return how to write a number that may differ between processes, and what that declares."""
    numbers = tuple(float(value) for value in values)
    if all(number == numbers[0] for number in numbers):
        return real_literal(numbers[0]), ()
    return name, (ProcessValue(name=name, values=numbers),)


def horner_text(coefficients: Mapping[int, str], coordinate: str) -> str:
    """Return ``(c2 * x + c1) * x + c0`` for coefficients by power; absent ones are zero."""
    if not coefficients:
        return "0.0"
    text, plain = coefficients[max(coefficients)], True
    for power in range(max(coefficients) - 1, -1, -1):
        text = f"{text if plain else f'({text})'} * {coordinate}"
        plain = power not in coefficients
        if not plain:
            text = _sum(text, coefficients[power])
    return text


def fold(
    name: str,
    surface: Surface,
    processes: tuple[Process, ...],
    coordinates: Mapping[Axis, str],
    *,
    target: str,
    lazy: str = "",
) -> FoldedSurface:
    """Return a surface's polynomial, folded one condition at a time.

    Parameters
    ----------
    name : str
        Stem of the variables' names.
    surface : Surface
    processes : tuple of Process
        Those of the model, in its order.
    coordinates : mapping
        Variable that holds the coordinate of each of the surface's axes.
    target : str
        Name of the variable that holds the value of the whole polynomial.
    lazy : str
        A condition that is not to be folded here; its coefficients are left.
    """
    namer = _Namer(stem=name, target=target)
    remaining = tuple(axis.condition for axis in surface.axes)
    coefficients, process_values = _known_coefficients(namer, surface, processes)
    assignments: dict[str, tuple[Assignment, ...]] = {}
    for axis in surface.axes:
        if axis.condition == lazy:
            break
        remaining = remaining[1:]
        coefficients, made = _folded(coefficients, coordinates[axis], namer, remaining)
        assignments[axis.condition] = made
    return FoldedSurface(
        process_values=process_values,
        assignments=assignments,
        coefficients=coefficients or {(0,) * len(remaining): "0.0"},
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Namer:
    """Names the coefficients that are left when some conditions are folded."""

    stem: str
    target: str

    def __call__(self, remaining: tuple[str, ...], powers: Powers) -> str:
        digits = zip(remaining, powers, strict=True)
        order = "".join(f"{_LETTERS[name]}{power}" for name, power in digits)
        return f"{self.stem}_{order}" if order else self.target


def _known_coefficients(
    namer: _Namer, surface: Surface, processes: tuple[Process, ...]
) -> tuple[dict[Powers, str], tuple[ProcessValue, ...]]:
    variants = [surface.variant(process.name).coefficients for process in processes]
    conditions = tuple(axis.condition for axis in surface.axes)
    coefficients: dict[Powers, str] = {}
    found: list[ProcessValue] = []
    for term, powers in enumerate(surface.exponents):
        values = [variant[term] for variant in variants]
        if any(values):
            coefficients[powers], declared = process_value(namer(conditions, powers), values)
            found.extend(declared)
    return coefficients, tuple(found)


def _folded(
    coefficients: Mapping[Powers, str],
    coordinate: str,
    namer: _Namer,
    remaining: tuple[str, ...],
) -> tuple[dict[Powers, str], tuple[Assignment, ...]]:
    """Fold the first condition; a coefficient that does not depend on it passes unchanged."""
    grouped: dict[Powers, dict[int, str]] = {}
    for powers, text in coefficients.items():
        grouped.setdefault(powers[1:], {})[powers[0]] = text
    left: dict[Powers, str] = {}
    made: list[Assignment] = []
    for powers, by_power in sorted(grouped.items()):
        if set(by_power) == {0}:
            left[powers] = by_power[0]
        else:
            left[powers] = namer(remaining, powers)
            value = horner_text(by_power, coordinate)
            made.append(Assignment(target=left[powers], value=value))
    return left, tuple(made)


def _sum(text: str, term: str) -> str:
    return f"{text} - {term[1:]}" if term.startswith("-") else f"{text} + {term}"
