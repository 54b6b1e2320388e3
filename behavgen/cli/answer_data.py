"""The answers of ``predict`` for machines: rows of a table with units, and plain data."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Iterable, Mapping
from dataclasses import asdict

from behavgen.cli.answer import Answer, Answers
from behavgen.cli.answer_notices import clamped
from behavgen.model import Estimate

__all__ = ["as_csv", "as_data", "csv_rows"]

_ESTIMATES = {
    "log10_wrong_by_noise [1]": "log10_noise_error",
    "log10_unresolved [1]": "log10_unresolved",
    "log10_wrong_or_unresolved [1]": "log10_error",
    "log10_seconds_between_unresolved [1]": "log10_time_between_failures_s",
    "delay [s]": "delay_s",
}
_CASE = {
    "process": "process",
    "vdd [V]": "vdd_v",
    "temp [degC]": "temp_c",
    "vcm [V]": "vcm_v",
    "resolve_time [s]": "resolve_time_s",
    "clock [Hz]": "clock_hz",
}
_BASIS = {
    "overdrive_of_delay [V]": "overdrive_v",
    "sigmas_used [1]": "sigmas",
    "log10_half_window_used [log10 V]": "log10_half_window_v",
    "decades_beyond_tables [1]": "decades_beyond",
}


def csv_rows(cell: str, answers: Answers) -> Iterable[dict[str, object]]:
    """Yield a row a case, keyed by headers that carry their units."""
    for found in answers.cases:
        row: dict[str, object] = {"cell": cell}
        row |= {header: getattr(found.case, name) for header, name in _CASE.items()}
        row |= {"input_kind": answers.question.kind, "input [V]": _input(found, answers)}
        row |= {"instances": answers.question.instances, "confidence [1]": answers.question.level}
        for header, name in _ESTIMATES.items():
            row |= _with_ends(header, getattr(found, name))
        row |= {header: getattr(found, name) for header, name in _BASIS.items()}
        row["sigmas_counted [1]"] = answers.evidence.sigmas
        row["clamped"] = "; ".join(clamped([found.outside]))
        yield row


def as_csv(rows: Iterable[Mapping[str, object]]) -> str:
    """Return rows, all with the same keys, as comma-separated text (RFC 4180, lines end in LF)."""
    listed = list(rows)
    text = io.StringIO()
    writer = csv.DictWriter(text, listed[0] if listed else (), lineterminator="\n")
    writer.writeheader()
    writer.writerows({key: _cell(value) for key, value in row.items()} for row in listed)
    return text.getvalue()


def as_data(answers: Answers) -> dict[str, object]:
    """Return everything as plain values for JSON; what is infinite is null."""
    return {
        "question": asdict(answers.question),
        "evidence": asdict(answers.evidence),
        "settings": [_finite(asdict(found)) for found in answers.cases],
    }


def _input(found: Answer, answers: Answers) -> object:
    if answers.question.kind == "levels":
        return " ".join(f"{value:.9g}" for value in answers.question.values_v)
    return found.case.value_v


def _with_ends(header: str, estimate: Estimate | None) -> dict[str, object]:
    name, _, unit = header.partition(" ")
    ends = (None, None, None) if estimate is None else (
        estimate.value, estimate.low, estimate.high
    )  # fmt: skip
    headers = (header, f"{name}_low {unit}", f"{name}_high {unit}")
    return dict(zip(headers, ends, strict=True))


def _cell(value: object) -> str:
    if value is None:
        return ""
    return f"{value:.9g}" if isinstance(value, float) else str(value)


def _finite(value: object) -> object:
    if isinstance(value, Mapping):
        return {key: _finite(inner) for key, inner in value.items()}
    if isinstance(value, list | tuple):
        return [_finite(inner) for inner in value]
    if isinstance(value, float):
        return value + 0.0 if math.isfinite(value) else None  # no minus zero
    return value
