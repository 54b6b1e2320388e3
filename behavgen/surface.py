"""Surfaces: one number as a function of the operating condition, as every language evaluates it."""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["Axis", "Box", "Matrix", "Range", "Surface", "Variant"]

Matrix = tuple[tuple[float, ...], ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Range:
    """A closed interval in SI units."""

    low: float
    high: float

    @property
    def middle(self) -> float:
        """Arithmetic middle."""
        return 0.5 * (self.low + self.high)


@dataclass(frozen=True, slots=True, kw_only=True)
class Box:
    """The characterised range; None: the condition is not characterised and has no influence."""

    vdd_v: Range | None = None
    temperature_k: Range | None = None
    vcm_v: Range | None = None
    overdrive_v: Range | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Axis:
    """How one condition enters a polynomial: ``(shape(x) - centre) / half_range``.

    Parameters
    ----------
    condition : str
        ``"temperature_k"``, ``"vdd_v"`` or ``"vcm_v"``.
    shape : str
        ``"plain"``, ``"reciprocal"``, ``"reciprocal_square"`` or ``"reciprocal_fourth"``.
    centre, half_range : float
        In the unit of ``shape(x)``.
    """

    condition: str
    shape: str = "plain"
    centre: float = 0.0
    half_range: float = 1.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Variant:
    """A surface's polynomial for one process.

    Parameters
    ----------
    process : str
    coefficients : tuple of float
        One for each of the surface's exponents.
    box : Box
        Conditions are clamped to it: where this quantity was measured in this process.
    scaled_from : str
        Process whose shape was scaled to this one; empty for a fit of its own.
    """

    process: str
    coefficients: tuple[float, ...]
    box: Box
    scaled_from: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Surface:
    """One number as a function of the operating condition.

    ``value = transform(sum over terms of coefficient * product of coordinate^power)``.

    Parameters
    ----------
    unit : str
        SI unit of the value.
    transform : str
        ``"plain"``: the polynomial itself; ``"log"``: its exponential, the
        polynomial being the natural logarithm of the value in SI units.
    axes : tuple of Axis
        Slow conditions first, always in the order temperature, supply, common
        mode; an axis that the data cannot see is absent.
    exponents : tuple of tuple of int
        One tuple a term, one power an axis.
    variants : tuple of Variant
        One a process, in the model's order of processes.
    covariance : Matrix
        Of the first variant's coefficients, shape (terms, terms); empty when unknown
        or, for delays, carried by `DelayEffect`.
    """

    unit: str
    transform: str
    axes: tuple[Axis, ...]
    exponents: tuple[tuple[int, ...], ...]
    variants: tuple[Variant, ...]
    covariance: Matrix = ()

    def variant(self, process: str) -> Variant:
        """Return the polynomial for a process; KeyError when there is none."""
        for variant in self.variants:
            if variant.process == process:
                return variant
        raise KeyError(process)
