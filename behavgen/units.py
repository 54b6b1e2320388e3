"""Text <-> SI, at the borders only.

    parse_si("12p", "s")           a cell or a setting -> number in SI
    unit_of_header("delay_ps","s") the unit that a column header carries
    format_si(1.51e-9, "s")        a number for people: "1.51 ns"

A quantity's dimension is named by its SI unit: "V", "s", "K", "J", "C"
(coulomb), "ohm", or "1" for a pure number. The dimension decides what an
ambiguous symbol means: ``C`` is a degree Celsius where a temperature is
expected and a coulomb where a charge is.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import cache

__all__ = [
    "CELL_PATTERN",
    "SI_PREFIXES",
    "ZERO_CELSIUS_K",
    "Unit",
    "UnitError",
    "as_number",
    "cell_suffixes",
    "default_unit",
    "find_unit",
    "format_celsius",
    "format_si",
    "header_stem",
    "parse_si",
    "unit_of_header",
    "unit_spellings",
]

ZERO_CELSIUS_K = 273.15
"""0 degC in K, exact by definition (BIPM, SI Brochure, 9th edition, 2.3.1)."""

SI_PREFIXES = {
    "T": 12,
    "G": 9,
    "M": 6,
    "k": 3,
    "m": -3,
    "u": -6,
    "\N{MICRO SIGN}": -6,
    "\N{GREEK SMALL LETTER MU}": -6,
    "n": -9,
    "p": -12,
    "f": -15,
    "a": -18,
    "z": -21,
    "y": -24,
}
"""Prefix to power of ten (BIPM, SI Brochure, table 7); ``M`` is mega, never milli."""

_ENGINEERING = {0: ""} | {power: text for text, power in SI_PREFIXES.items() if text.isascii()}
_SYMBOLS = {
    "V": ("V", "v"),
    "s": ("s",),
    "J": ("J",),
    "C": ("C",),
    "ohm": ("ohm", "Ohm", "\N{OHM SIGN}", "\N{GREEK CAPITAL LETTER OMEGA}"),
}
_KELVIN = ("K", "k")
_CELSIUS = ("C", "c", "degC", "degc", "\N{DEGREE SIGN}C", "\N{DEGREE CELSIUS}")
CELL_PATTERN = r"^([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+))(?:[eE]([+-]?[0-9]{1,4}))?\s*(\S*)$"
"""A cell's mantissa, exponent of ten (may be missing), and what follows (may be empty)."""

_BRACKETED = re.compile(
    r"(?P<stem>.*?)(?P<gap>[\s_]*)(?:\[(?P<square>[^\[\]]*)\]|\((?P<round>[^()]*)\))"
)


class UnitError(ValueError):
    """Text that is no number or no unit of the expected dimension."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Unit:
    """How a number in some unit becomes one in SI.

    Parameters
    ----------
    text : str
        The unit as written, e.g. ``"ps"``.
    power : int
        SI value = number times ten to this power ...
    shift : float
        ... plus this (only degrees Celsius have one).
    """

    text: str
    power: int = 0
    shift: float = 0.0


def default_unit(dimension: str) -> Unit:
    """Return the unit of a number that comes without one: SI, but degC for temperatures."""
    return _temperature_units()["C"] if dimension == "K" else Unit(text=dimension)


@cache
def unit_spellings(dimension: str) -> dict[str, Unit]:
    """Return every accepted spelling of the units of one dimension."""
    if dimension == "K":
        return _temperature_units()
    if dimension == "1":
        return {text: Unit(text="1") for text in ("1", "-", "")}
    powers = {"": 0, **SI_PREFIXES}
    return {
        prefix + symbol: Unit(text=prefix + symbol, power=power)
        for symbol in _SYMBOLS.get(dimension, ())
        for prefix, power in powers.items()
    }


def find_unit(text: str, dimension: str) -> Unit:
    """Return the unit of a dimension spelled `text`.

    Raises
    ------
    UnitError
        When `text` is no unit of that dimension; the message says what is allowed.
    """
    found = unit_spellings(dimension).get(text.strip())
    if found is None:
        raise UnitError(f"unknown unit '{text.strip()}'; {_examples(dimension)}")
    return found


def unit_of_header(header: str, dimension: str) -> Unit | None:
    """Return the unit that a column header carries, or None.

    ``delay_ps``, ``delay [ps]``, ``delay (ps)`` and ``delay(ps)`` carry ps. A
    bracket that says no unit is part of the name where it directly follows it,
    as in ``V(out)``, and a fault elsewhere.

    Raises
    ------
    UnitError
        When the header carries a unit that is unknown or of another dimension.
    """
    stem, text, certain = _split_header(header)
    if not stem or not (text or certain) or (dimension == "1" and not certain):
        return None
    spellings = unit_spellings(dimension)
    if text in spellings:
        return spellings[text]
    if certain or _is_any_unit(text) or text.lower() in {known.lower() for known in spellings}:
        raise UnitError(f"unit '{text}' in header '{header}'; {_examples(dimension)}")
    return None


def header_stem(header: str) -> str:
    """Return a header without the unit it carries: ``delay [ps]`` -> ``delay``."""
    stem, text, certain = _split_header(header)
    return stem if stem and (certain or _is_any_unit(text)) else header.strip()


def parse_si(text: str, dimension: str, unit: Unit | None = None) -> float:
    """Read one number such as ``12``, ``12p``, ``12 ps``, ``3.5m``.

    Parameters
    ----------
    text : str
        The cell or setting.
    dimension : str
        SI unit of what is expected.
    unit : Unit, optional
        Unit of a plain number; SI (degC for temperatures) when not given.

    Returns
    -------
    float
        In SI.

    Raises
    ------
    UnitError
        When the text is not such a number; the message names it.
    """
    match = re.match(CELL_PATTERN, text.strip())
    if match is None:
        raise UnitError(_not_a_number(text))
    mantissa, exponent, suffix = match.groups()
    plain = unit or default_unit(dimension)
    found = cell_suffixes(dimension, plain).get(suffix)
    if found is None and suffix in SI_PREFIXES:
        raise UnitError(f"'{text.strip()}' has a prefix of its own beside the unit {plain.text}")
    if found is None:
        raise UnitError(f"{_not_a_number(text)}; {_examples(dimension)}")
    # Scaling the text instead of the float gives the float nearest to what was written.
    value = float(f"{mantissa}e{int(exponent or 0) + found.power}") + found.shift
    if not math.isfinite(value):
        raise UnitError(f"'{text.strip()}' is too large a number")
    return value


def as_number(value: str | float) -> float | None:
    """Return a plain number, or None where the value is none."""
    try:
        return float(value)
    except ValueError:
        return None


def cell_suffixes(dimension: str, plain: Unit) -> dict[str, Unit]:
    """Return what may follow the digits in a cell, and the unit that this means.

    A bare prefix is allowed only where plain numbers are in SI: ``12p`` in a
    column of ps could mean either of two things.
    """
    scaled_already = plain.power or plain.shift
    bare = {} if scaled_already else {p: Unit(text=p, power=n) for p, n in SI_PREFIXES.items()}
    return {**bare, **unit_spellings(dimension), "": plain}


def format_si(value: float, unit: str, digits: int = 3) -> str:
    """Write a number with an engineering prefix, ASCII only.

    >>> format_si(1.51e-9, "s"), format_si(0.3, "V"), format_si(1e-6, "V")
    ('1.51 ns', '300 mV', '1 uV')
    """
    if not math.isfinite(value) or value == 0.0:
        return f"{value:g} {unit}".strip()
    mantissa, exponent = f"{value:.{digits - 1}e}".split("e")
    power = min(max(3 * (int(exponent) // 3), min(_ENGINEERING)), max(_ENGINEERING))
    number = float(f"{mantissa}e{int(exponent) - power}")
    return f"{number:.{max(digits, 4)}g} {_ENGINEERING[power]}{unit}".strip()


def format_celsius(temperature_k: float) -> str:
    """Write a temperature in degrees Celsius.

    >>> format_celsius(233.15)
    '-40 degC'
    """
    return f"{round(temperature_k - ZERO_CELSIUS_K, 3) + 0.0:g} degC"


@cache
def _temperature_units() -> dict[str, Unit]:
    kelvin = {symbol: Unit(text=symbol) for symbol in _KELVIN}
    celsius = {symbol: Unit(text=symbol, shift=ZERO_CELSIUS_K) for symbol in _CELSIUS}
    return kelvin | celsius


@cache
def _all_units() -> frozenset[str]:
    names = frozenset().union(*(unit_spellings(dimension) for dimension in (*_SYMBOLS, "K")))
    return names - {"c", "k"}  # as in "level_k": letters rather than units, unless a K is expected


def _is_any_unit(text: str) -> bool:
    return text in _all_units()


def _split_header(header: str) -> tuple[str, str, bool]:
    """Return stem, unit text and whether the writing leaves no doubt that it is a unit."""
    text = header.strip()
    if match := _BRACKETED.fullmatch(text):
        square = match["square"] is not None
        unit = (match["square"] if square else match["round"]).strip()
        return match["stem"], unit, square or bool(match["gap"])
    stem, _, suffix = text.rpartition("_")
    return stem, suffix, False


def _examples(dimension: str) -> str:
    if dimension == "K":
        return "a temperature in C or K"
    if dimension == "1":
        return "a plain number"
    return f"a number in {dimension}, with or without an SI prefix as in m{dimension}, u{dimension}"


def _not_a_number(text: str) -> str:
    shown = text.strip()
    if not shown:
        return "empty cell"
    if re.fullmatch(r"[+-]?\d+,\d+\S*", shown):
        return f"'{shown}' has a decimal comma; write a decimal point"
    return f"'{shown}' is not a number"
