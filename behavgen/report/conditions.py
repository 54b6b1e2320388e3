"""Operating conditions in words, and as keywords of the reference."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Any

from behavgen.model import ComparatorModel, Condition, Range
from behavgen.report.numbers import ABSENT, temperature_text, volts_text
from behavgen.units import ZERO_CELSIUS_K

__all__ = [
    "FIELDS",
    "FIELD_TITLES",
    "condition_words",
    "field_text",
    "middle_condition",
    "reference_keywords",
    "shared_words",
    "varying_fields",
]

FIELDS = ("process", "vdd_v", "temperature_k", "vcm_v")
"""Of a `Condition`, in the order in which people say them."""

FIELD_TITLES = {
    "process": "process",
    "vdd_v": "supply",
    "temperature_k": "temp",
    "vcm_v": "vcm",
}


def field_text(condition: Condition, name: str) -> str:
    """Write one part of a condition; a dash where the table does not say."""
    value = getattr(condition, name)
    if value is None or value == "":
        return ABSENT
    if name == "process":
        return str(value)
    return temperature_text(value) if name == "temperature_k" else volts_text(value)


def condition_words(condition: Condition, names: Iterable[str] = FIELDS) -> str:
    """Write a condition in one line, e.g. ``tt, 1.8 V, 27 °C, vcm 0.95 V``."""
    parts = [
        ("vcm\N{NO-BREAK SPACE}" if name == "vcm_v" else "") + field_text(condition, name)
        for name in names
        if getattr(condition, name) not in (None, "")
    ]
    return ", ".join(parts)


def varying_fields(conditions: Sequence[Condition]) -> tuple[str, ...]:
    """Return the parts in which the conditions differ."""
    return tuple(name for name in FIELDS if len({getattr(c, name) for c in conditions}) > 1)


def shared_words(conditions: Sequence[Condition]) -> str:
    """Write the parts that all conditions share; empty when there are none."""
    varying = varying_fields(conditions)
    shared = [name for name in FIELDS if name not in varying]
    words = condition_words(conditions[0], shared) if conditions else ""
    return f"process {words}" if words and shared == ["process"] else words


def middle_condition(model: ComparatorModel) -> Condition:
    """Return the condition at which the reference evaluates when not told otherwise."""

    def middle(span: Range | None) -> float | None:
        return None if span is None else span.middle

    process = model.processes[0].name if len(model.processes) > 1 else ""
    return Condition(process=process, vdd_v=middle(model.box.vdd_v),
                     temperature_k=middle(model.box.temperature_k),
                     vcm_v=middle(model.box.vcm_v))  # fmt: skip


def reference_keywords(condition: Condition) -> dict[str, Any]:
    """Return a condition as keywords of `Reference`; what the table leaves open is left out."""
    keywords: dict[str, Any] = {}
    if condition.process:
        keywords["process"] = condition.process
    if condition.vdd_v is not None:
        keywords["vdd"] = condition.vdd_v
    if condition.temperature_k is not None:
        keywords["temp_c"] = condition.temperature_k - ZERO_CELSIUS_K
    if condition.vcm_v is not None:
        keywords["vcm"] = condition.vcm_v
    return keywords
