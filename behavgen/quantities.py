"""What a project file may name: quantities, their columns, and what a cell of each may hold.

This is the one place that knows them. The project file is judged by it, the
tables are read by it, and a starter project is guessed by it. Adding a quantity
is one entry in `QUANTITIES` and a function in `tables.assemble`.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

__all__ = [
    "CONDITIONS",
    "CORNER",
    "QUANTITIES",
    "Column",
    "Form",
    "Quantity",
    "column_named",
    "columns_of",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """One column of a table.

    Parameters
    ----------
    name : str
        Our name for it.
    unit : str
        SI unit of its numbers, ``"1"`` for a pure number, ``""`` for text.
    above, at_least, at_most : float
        Limits in SI; `above` itself is not allowed.
    whole : bool
        Only whole numbers.
    may_be_empty : bool
        An empty cell says something (a row not resolved, for instance).
    usual : tuple of float
        Magnitudes in SI outside which the unit is worth a second look.
    """

    name: str
    unit: str = "1"
    above: float = -math.inf
    at_least: float = -math.inf
    at_most: float = math.inf
    whole: bool = False
    may_be_empty: bool = False
    usual: tuple[float, float] = (0.0, math.inf)

    @property
    def is_text(self) -> bool:
        """Whether the cells are names rather than numbers."""
        return not self.unit

    def accepts(self, value: float) -> bool:
        """Tell whether a number in SI is allowed in this column."""
        inside = self.above < value and self.at_least <= value <= self.at_most
        return inside and (not self.whole or value == math.floor(value))

    @property
    def allowed(self) -> str:
        """What a cell may hold, for messages."""
        empty = ", or empty" if self.may_be_empty else ""
        if self.is_text:
            return "a name"
        if self.unit == "K":
            return "a temperature above absolute zero"
        if self.whole and (self.at_least, self.at_most) == (0, 1):
            return f"0 or 1{empty}"
        kind = "a whole number" if self.whole else "a number"
        unit = "" if self.unit == "1" else f" in {self.unit}"
        words = {"above": self.above, "at least": self.at_least, "at most": self.at_most}
        limits = [f"{word} {limit:g}" for word, limit in words.items() if math.isfinite(limit)]
        return " ".join([kind + unit, " and ".join(limits)]).strip() + empty


@dataclass(frozen=True, slots=True, kw_only=True)
class Form:
    """One of the ways in which a quantity is written down.

    Parameters
    ----------
    name : str
        Tells the forms of a quantity apart.
    required, optional : tuple of str
        Column names.
    counted : str
        Column of single outcomes (0 or 1): rows alike are repetitions, counted
        on reading, instead of a fault.
    """

    name: str
    required: tuple[str, ...]
    optional: tuple[str, ...] = ()
    counted: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Quantity:
    """One thing a table characterises.

    Parameters
    ----------
    columns : tuple of Column
        All columns of all its forms.
    forms : tuple of Form
        The first whose required columns a table has is taken.
    ordered : tuple of (str, str)
        Columns of which the first may never exceed the second in a row.
    """

    name: str
    columns: tuple[Column, ...]
    forms: tuple[Form, ...]
    ordered: tuple[tuple[str, str], ...] = ()


_VOLTS = (0.0, 100.0)
_TIMES = (1e-15, 1e-3)


def _volts(name: str, *, may_be_empty: bool = False) -> Column:
    return Column(name=name, unit="V", usual=_VOLTS, may_be_empty=may_be_empty)


def _spread(name: str, *, may_be_empty: bool = False) -> Column:
    usual = (1e-9, 10.0)
    return Column(name=name, unit="V", above=0.0, usual=usual, may_be_empty=may_be_empty)


def _time(name: str, *, may_be_empty: bool = False) -> Column:
    return Column(name=name, unit="s", above=0.0, usual=_TIMES, may_be_empty=may_be_empty)


def _count(name: str, at_least: int = 0) -> Column:
    return Column(name=name, at_least=at_least, whole=True)


def _flag(name: str, *, may_be_empty: bool = False) -> Column:
    return Column(name=name, at_least=0, at_most=1, whole=True, may_be_empty=may_be_empty)


CONDITIONS = (
    Column(name="process", unit=""),
    Column(name="vdd", unit="V", above=0.0, usual=(0.05, 100.0)),
    Column(name="temp", unit="K", above=0.0, usual=(1.0, 1000.0)),
    _volts("vcm"),
)
"""Operating conditions: every quantity may depend on each of them."""

CORNER = Column(name="corner", unit="")
"""A named set of conditions in one column."""

QUANTITIES: Mapping[str, Quantity] = {
    quantity.name: quantity
    for quantity in (
        Quantity(
            name="offset",
            columns=(
                Column(name="instance", unit=""),
                _volts("offset"),
                _volts("offset_low", may_be_empty=True),
                _volts("offset_high", may_be_empty=True),
                _volts("mean"),
                _spread("sigma"),
                _count("instances", at_least=2),
            ),
            forms=(
                Form(
                    name="instances",
                    required=("instance", "offset"),
                    optional=("offset_low", "offset_high"),
                ),
                Form(name="statistics", required=("mean", "sigma", "instances")),
            ),
            ordered=(("offset_low", "offset"), ("offset", "offset_high")),
        ),
        Quantity(
            name="noise",
            columns=(
                _volts("vdiff"),
                _count("trials", at_least=1),
                _count("ones"),
                _flag("bit"),
                _spread("sigma"),
                _spread("sigma_error", may_be_empty=True),
                Column(name="instance", unit=""),
            ),
            forms=(
                Form(name="counts", required=("vdiff", "trials", "ones"), optional=("instance",)),
                Form(name="bits", required=("vdiff", "bit"), optional=("instance",), counted="bit"),
                Form(name="sigma", required=("sigma",), optional=("sigma_error", "instance")),
            ),
            ordered=(("ones", "trials"),),
        ),
        Quantity(
            name="delay",
            columns=(
                _volts("overdrive"),
                _volts("vdiff"),
                _volts("offset"),
                _time("delay", may_be_empty=True),
                _time("observed_for", may_be_empty=True),
                _flag("decision", may_be_empty=True),
            ),
            forms=tuple(
                Form(
                    name=level,
                    required=(level, "delay"),
                    optional=("offset", "observed_for", "decision"),
                )
                for level in ("overdrive", "vdiff")
            ),
            ordered=(("delay", "observed_for"),),
        ),
        Quantity(
            name="window",
            columns=(
                _time("resolve_time"),
                Column(name="window", unit="V", above=0.0, may_be_empty=True, usual=_VOLTS),
                Column(name="searched_span", unit="V", above=0.0, may_be_empty=True, usual=_VOLTS),
                _count("trials", at_least=1),
                _count("unresolved"),
                Column(name="span", unit="V", above=0.0, usual=_VOLTS),
            ),
            forms=(
                Form(
                    name="searched",
                    required=("resolve_time", "window"),
                    optional=("searched_span",),
                ),
                Form(name="counted", required=("resolve_time", "trials", "unresolved", "span")),
            ),
            ordered=(("window", "searched_span"), ("unresolved", "trials")),
        ),
        Quantity(
            name="memory",
            columns=(_time("reset_time"), _volts("memory_shift"), _flag("censored")),
            forms=(
                Form(
                    name="memory", required=("reset_time", "memory_shift"), optional=("censored",)
                ),
            ),
        ),
        Quantity(
            name="reset",
            columns=(_time("reset_delay"),),
            forms=(Form(name="reset", required=("reset_delay",)),),
        ),
        Quantity(
            name="aperture",
            columns=(
                Column(name="step_time", unit="s", usual=(0.0, 1e-3)),
                Column(name="step_weight", at_least=-0.2, at_most=1.2),
                _volts("step"),
            ),
            forms=(
                Form(name="aperture", required=("step_time", "step_weight"), optional=("step",)),
            ),
        ),
        Quantity(
            name="energy",
            columns=(
                _volts("overdrive"),
                _volts("vdiff"),
                Column(name="energy", unit="J", above=0.0, usual=(1e-18, 1e-6)),
                _time("cycle_time"),
            ),
            forms=tuple(
                Form(name=level, required=(level, "energy"), optional=("cycle_time",))
                for level in ("overdrive", "vdiff")
            ),
        ),
        Quantity(
            name="kickback",
            columns=(
                Column(name="charge_common", unit="C", usual=(0.0, 1e-9)),
                Column(name="charge_differential", unit="C", usual=(0.0, 1e-9)),
                _volts("vdiff"),
                Column(name="source_resistance", unit="ohm", at_least=0.0),
            ),
            forms=(
                Form(
                    name="kickback",
                    required=("charge_common", "charge_differential"),
                    optional=("vdiff", "source_resistance"),
                ),
            ),
        ),
    )
}


def columns_of(quantity: str) -> dict[str, Column]:
    """Return every column a table of this quantity may have, conditions included, by name."""
    own = QUANTITIES[quantity].columns
    return {column.name: column for column in (*CONDITIONS, CORNER, *own)}


def column_named(name: str) -> Column | None:
    """Return a column of this name, of whatever quantity: the unit is the same in all."""
    for quantity in QUANTITIES:
        if column := columns_of(quantity).get(name):
            return column
    return None
