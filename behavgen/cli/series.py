"""Numbers as options take them: one, several, or a series from a start to a stop."""

from __future__ import annotations

import math

from behavgen.model import significant
from behavgen.units import ZERO_CELSIUS_K, UnitError, parse_si

__all__ = ["SERIES_HELP", "series"]

SERIES_HELP = "a value, several as in 1,2,5, or START:STOP:STEP as in 1.1:1.3:0.05 or 1u:1m:x10"

_MOST_VALUES = 10_000


def series(text: str, dimension: str) -> tuple[float, ...]:
    """Read the numbers of one option.

    >>> series("1.1:1.3:0.1", "V"), series("1u:100u:x10", "V"), series("-40,125", "K")
    ((1.1, 1.2, 1.3), (1e-06, 1e-05, 0.0001), (-40.0, 125.0))

    Parameters
    ----------
    text : str
        ``a``, ``a,b,...``, ``start:stop:step`` or ``start:stop:xfactor``.
    dimension : str
        As of `parse_si`; temperatures, ``"K"``, are returned in degrees Celsius;
        frequencies are ``"Hz"``.

    Raises
    ------
    UnitError
        When it is no such text; the message says what of it.
    """
    if ":" not in text:
        return tuple(_number(part, dimension) for part in text.split(","))
    parts = text.split(":")
    if len(parts) != 3:
        raise UnitError(f"'{text}' is not START:STOP:STEP")
    start, stop = _number(parts[0], dimension), _number(parts[1], dimension)
    if parts[2].startswith("x"):
        return _multiples(start, stop, _number(parts[2][1:], "1"))
    step = parse_si(parts[2], "1") if dimension == "K" else _number(parts[2], dimension)
    return _steps(start, stop, step)


def _number(text: str, dimension: str) -> float:
    if dimension == "Hz":
        return parse_si(text.strip().removesuffix("Hz"), "Hz")
    value = parse_si(text, dimension)
    return round(value - ZERO_CELSIUS_K, 9) if dimension == "K" else value


def _steps(start: float, stop: float, step: float) -> tuple[float, ...]:
    if step == 0.0 or (stop - start) / step < 0.0:
        raise UnitError("the step does not lead from START to STOP")
    count = _counted((stop - start) / step)
    return tuple(significant(start + k * step, 12) for k in range(count))


def _multiples(start: float, stop: float, factor: float) -> tuple[float, ...]:
    if factor <= 0.0 or factor == 1.0 or start == 0.0 or stop / start <= 0.0:
        raise UnitError("the factor does not lead from START to STOP")
    ratio = math.log(stop / start) / math.log(factor)
    if ratio < 0.0:
        raise UnitError("the factor does not lead from START to STOP")
    return tuple(significant(start * factor**k, 12) for k in range(_counted(ratio)))


def _counted(intervals: float) -> int:
    """Return how many values there are; STOP is one of them but for rounding."""
    if intervals >= _MOST_VALUES:
        raise UnitError(f"more than {_MOST_VALUES} values")
    return 1 + math.floor(intervals + 1e-9)
