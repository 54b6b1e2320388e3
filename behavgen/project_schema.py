"""The shape of behavgen.toml: which keys stand where and what each may hold.

Imported only when a project file is read, since pydantic is slow to load.
"""

from __future__ import annotations

import copy
import datetime
import functools
import json
import operator
import re
from collections.abc import Callable, Iterable, Mapping, Sequence
from typing import Annotated, Any, Literal, TypeVar

from pydantic import BaseModel, BeforeValidator, ConfigDict, Field, ValidationError

from behavgen.nearest import did_you_mean
from behavgen.units import UnitError, parse_si

__all__ = [
    "CellPart",
    "CornerPart",
    "DefaultsPart",
    "DriftPart",
    "LimitPart",
    "ProjectPart",
    "SymbolPart",
    "TablePart",
    "checked",
]


def _text_or_number(value: object) -> str | float:
    if isinstance(value, str):
        return value
    if isinstance(value, (int, float)) and not isinstance(value, bool):
        return value
    raise ValueError("a text or a number is needed")


def _texts_or_numbers(value: object) -> tuple[str | float, ...]:
    listed = value if isinstance(value, list) else [value]
    if not listed:
        raise ValueError("an empty list keeps no row; a text, a number or a list of them")
    return tuple(_text_or_number(item) for item in listed)


def _in_si(dimension: str) -> Callable[[object], float]:
    def convert(value: object) -> float:
        try:
            return parse_si(str(_text_or_number(value)), dimension)
        except UnitError as error:
            raise ValueError(str(error)) from None

    return convert


def _pin(value: object) -> str | bool:
    if isinstance(value, (str, bool)):
        return value
    raise ValueError("a name in quotes is needed, or false to leave the pin out")


def _hertz(value: object) -> float:
    return _in_si("Hz")(str(_text_or_number(value)).strip().removesuffix("Hz"))


def _iso_date(value: object) -> str:
    """Return a date, which TOML may give as one or as a text, in ISO 8601."""
    if isinstance(value, datetime.date):  # one with a time of day too
        return value.isoformat()
    try:
        return datetime.date.fromisoformat(str(value)).isoformat()
    except ValueError:
        raise ValueError("a date such as 2026-01-31 is needed") from None


TextOrNumber = Annotated[str | float, BeforeValidator(_text_or_number)]
TextsOrNumbers = Annotated[tuple[str | float, ...], BeforeValidator(_texts_or_numbers)]
Volts = Annotated[float, BeforeValidator(_in_si("V"))]
Seconds = Annotated[float, BeforeValidator(_in_si("s"))]
Kelvin = Annotated[float, BeforeValidator(_in_si("K"))]
Hertz = Annotated[float, BeforeValidator(_hertz)]
Number = Annotated[float, BeforeValidator(_in_si("1"))]
Date = Annotated[str, BeforeValidator(_iso_date)]
Pin = Annotated[str | bool, BeforeValidator(_pin)]


class _Part(BaseModel):
    model_config = ConfigDict(extra="forbid", strict=True, frozen=True)


class ProjectPart(_Part):
    """``[project]``."""

    out: str = Field("build", min_length=1)
    baseline: str = Field("baseline", min_length=1)
    vendor: str = Field("local", pattern=r"^[A-Za-z_][A-Za-z0-9_.-]*$")


class DefaultsPart(_Part):
    """``[defaults]``."""

    columns: dict[str, str] = {}
    units: dict[str, str] = {}
    where: dict[str, TextsOrNumbers] = {}
    at: dict[str, TextOrNumber] = {}
    failed: list[str] | None = None
    measured: str | None = None
    stage: Literal["estimated", "schematic", "extracted", "measured"] | None = None
    kit: str | None = None
    netlist_hash: str | None = None
    date: Date | None = None


class TablePart(DefaultsPart):
    """``[[cells.NAME.tables]]``."""

    quantity: str
    file: str = Field(min_length=1)


class CellPart(_Part):
    """``[cells.NAME]``."""

    description: str = ""
    decides_on: Literal["rising", "falling"] = "rising"
    in_reset: Literal["high", "low", "mid", "hold"] = "high"
    when_unresolved: Literal["x", "coin", "hold"] = "x"
    processes: dict[str, int] = {}
    reset_delay: Seconds | None = Field(None, ge=0)
    supply_off: Volts | None = Field(None, ge=0)
    time_precision: Literal["1fs", "1ps"] = "1fs"
    pins: dict[str, Pin] = {}
    tables: list[dict[str, Any]] = []
    limits: list[dict[str, Any]] = []
    drift: dict[str, Any] = {}
    symbol: dict[str, Any] = {}


class SymbolPart(_Part):
    """``[cells.NAME.symbol]``; the order of its pins is that of the symbol."""

    name: str | None = None
    pins: dict[str, str]
    supply: Volts | None = Field(None, gt=0)


class LimitPart(_Part):
    """``[[limits]]`` and ``[[cells.NAME.limits]]``."""

    of: str
    below: TextOrNumber | None = None
    above: TextOrNumber | None = None
    sigmas: Number | None = Field(None, ge=0)
    overdrive: Volts | None = Field(None, gt=0)
    input: Volts | None = None
    span: Volts | None = Field(None, gt=0)
    resolve_time: Seconds | None = Field(None, gt=0)
    clock: Hertz | None = Field(None, gt=0)
    reset_time: Seconds | None = Field(None, ge=0)
    corner: str | None = None
    process: str | None = None
    temp: Kelvin | None = Field(None, gt=0)
    vdd: Volts | None = Field(None, gt=0)
    vcm: Volts | None = None


class DriftPart(_Part):
    """``[drift]`` and ``[cells.NAME.drift]``: a share as in "5 %", or an amount."""

    offset: TextOrNumber | None = None
    mismatch: TextOrNumber | None = None
    noise: TextOrNumber | None = None
    tau: TextOrNumber | None = None
    delay: TextOrNumber | None = None
    reset_delay: TextOrNumber | None = None
    memory: TextOrNumber | None = None
    aperture: TextOrNumber | None = None
    energy: TextOrNumber | None = None
    kickback: TextOrNumber | None = None


class CornerPart(_Part):
    """``[corners.NAME]``."""

    process: str | None = None
    temp: Kelvin | None = Field(None, gt=0)
    vdd: Volts | None = Field(None, gt=0)
    vcm: Volts | None = None


AnyPart = TypeVar("AnyPart", bound=_Part)
KeyPath = tuple[str | int, ...]


def checked(
    part: type[AnyPart], raw: Mapping[str, Any], add: Callable[[KeyPath, str, str], None]
) -> AnyPart | None:
    """Return the part, having reported every fault of its shape.

    Where there are faults the part comes without what is faulty, so that the
    rules on names and values can judge the rest as well.

    Parameters
    ----------
    part : type
        Which part of the file.
    raw : mapping
        As tomllib gave it.
    add : callable
        Takes the path inside the part, what was found, and what is allowed.

    Returns
    -------
    AnyPart or None
        None when nothing of it can be used.
    """
    try:
        return part.model_validate(dict(raw))
    except ValidationError as error:
        faults = error.errors()
    for details in faults:
        add(tuple(details["loc"]), *_in_words(details, part.model_fields))
    try:
        return part.model_validate(_without(raw, faults))
    except ValidationError:
        return None


def _without(raw: Mapping[str, Any], faults: Iterable[Mapping[str, Any]]) -> dict[str, Any]:
    """Return a copy that lacks what is faulty, and has a stand-in for what is missing."""
    pruned = copy.deepcopy(dict(raw))
    for details in reversed([*faults]):
        *path, last = details["loc"]
        holder = functools.reduce(operator.getitem, path, pruned)
        if details["type"] == "missing":
            holder[last] = "?"  # every required key holds a text
        else:
            del holder[last]
    return pruned


def _in_words(details: Mapping[str, Any], known: Iterable[str]) -> tuple[str, str]:
    """Return a validation error as (what was found, what is allowed)."""
    kind, found, context = details["type"], details["input"], details.get("ctx", {})
    words: dict[str, Callable[[], tuple[str, str]]] = {
        "extra_forbidden": lambda: _unknown_key(str(details["loc"][-1]), sorted(known)),
        "missing": lambda: ("missing", "this key is required"),
        "literal_error": lambda: _unknown_word(str(found), context["expected"]),
        "value_error": lambda: (_with_value(found, str(context["error"])), ""),
        "string_too_short": lambda: ("empty text", "a name is needed here"),
        "greater_than": lambda: (_shown(found), f"above {context['gt']:g}"),
        "greater_than_equal": lambda: (_shown(found), f"at least {context['ge']:g}"),
    }
    if kind in words:
        return words[kind]()
    return _shown(found), _NEEDED.get(kind, details["msg"])


def _shown(value: object) -> str:
    """Write a value as it stands in the project file."""
    return f"'{value}'" if isinstance(value, str) else json.dumps(value, default=str)


def _with_value(value: object, reason: str) -> str:
    return reason if str(value) in reason else f"{_shown(value)}: {reason}"


def _unknown_key(name: str, known: Sequence[str]) -> tuple[str, str]:
    return f"unknown key '{name}'{did_you_mean(name, known)}", f"known: {', '.join(known)}"


def _unknown_word(found: str, expected: str) -> tuple[str, str]:
    """Judge a word by pydantic's list of the expected ones, which reads ``'a', 'b' or 'c'``."""
    words = re.findall(r"'([^']*)'", expected)
    return f"'{found}'{did_you_mean(found, words)}", f"one of {', '.join(words)}"


_NEEDED = {
    "string_type": "a text in quotes is needed",
    "dict_type": "a table is needed, as in { name = ... } or under a [heading] of its own",
    "list_type": "a list is needed, as in [ ... ]",
    "int_type": "a whole number is needed",
}
