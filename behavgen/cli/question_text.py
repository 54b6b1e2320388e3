"""What ``predict`` was asked, in words."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace
from typing import Any

from behavgen.cli.question import Case, Question
from behavgen.cli.wording import labelled
from behavgen.units import format_si

__all__ = ["asked_lines", "condition_text", "field_text", "field_title", "varying_fields"]

_CONDITIONS = ("process", "vdd_v", "temp_c", "vcm_v")
_FIELDS = (*_CONDITIONS, "value_v", "resolve_time_s", "clock_hz")
_TITLES = {
    "vdd_v": "supply",
    "temp_c": "temperature",
    "vcm_v": "common mode",
    "resolve_time_s": "time",
    "clock_hz": "clock",
}
_UNITS = {"vdd_v": "V", "vcm_v": "V", "value_v": "V", "resolve_time_s": "s", "clock_hz": "Hz"}
_INSTANCES = {
    "average": "mean over all instances: mismatch counts as noise",
    "3-sigma": "each number is that of the worst instance within 3 sigma of mismatch",
}


def varying_fields(cases: Sequence[Case]) -> tuple[str, ...]:
    """Return the fields in which cases differ."""
    return tuple(name for name in _FIELDS if len({getattr(case, name) for case in cases}) > 1)


def field_title(name: str, question: Question) -> str:
    """Return the head of a field's column."""
    return question.kind if name == "value_v" else _TITLES.get(name, name)


def field_text(case: Case, name: str) -> str:
    """Write one field; nothing where the case leaves it open."""
    value = getattr(case, name)
    if value is None or name == "process":
        return value or ""
    return f"{value:g} degC" if name == "temp_c" else format_si(value, _UNITS[name], 4)


def condition_text(case: Case) -> str:
    """Write the condition of a case in one line."""
    texts = {name: field_text(case, name) for name in _CONDITIONS}
    return ", ".join(("vcm " if name == "vcm_v" else "") + t for name, t in texts.items() if t)


def asked_lines(question: Question, cases: Sequence[Case]) -> Iterator[str]:
    """Yield what all cases share; what differs stands in the table."""
    nothing: dict[str, Any] = dict.fromkeys(varying_fields(cases))
    shared = replace(cases[0], **nothing)
    if question.corners:
        corners = f"middle and {len(cases) - 1} corners of the characterised range"
        yield from labelled("setting", corners)
    elif condition := condition_text(shared):
        yield from labelled("setting", condition)
    yield from labelled("input", _input_text(question, shared))
    if time := _time_text(question, shared):
        yield from labelled("time", time)
    if question.instances in _INSTANCES:
        yield from labelled("instances", _INSTANCES[question.instances])


def _input_text(question: Question, shared: Case) -> str:
    value = field_text(shared, "value_v")
    if question.kind == "span":
        return f"uniform over {value or 'a span'} about the nominal trip point"
    if question.kind == "levels":
        levels = " ".join(format_si(v, "V", 4) for v in question.values_v)
        weights = " ".join(f"{w:g}" for w in question.weights)
        return f"{levels}, {f'weights {weights}' if weights else 'equally often'}; {_BY_SIGN}"
    right = _BY_SIGN if question.right_bit is None else f"{question.right_bit} is right"
    where = "from the nominal trip point" if question.kind == "overdrive" else "differential"
    return f"{value} {where}, {right}".lstrip()


_BY_SIGN = "the sign tells the right bit"


def _time_text(question: Question, shared: Case) -> str:
    time, clock = field_text(shared, "resolve_time_s"), field_text(shared, "clock_hz")
    half = "" if question.resolve_time_s else " (half a clock period)"
    parts = ([f"{time} to resolve{half}"] if time else []) + ([f"{clock} clock"] if clock else [])
    return ", ".join(parts)
