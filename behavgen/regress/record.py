"""Verdicts as plain data: the versioned JSON that other programs read."""

from __future__ import annotations

import json
import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import asdict, is_dataclass

from behavgen.limits import Limit
from behavgen.model import Condition, Estimate
from behavgen.regress.comparison import Comparison, Drift, QuantityDrift
from behavgen.regress.findings import Finding
from behavgen.regress.verdict import CellVerdict, LimitVerdict, RunVerdict

__all__ = ["FORMAT", "cell_data", "comparison_data", "finding_data", "run_data", "run_json"]

FORMAT = 1
"""Version of the data; raised when an old reader would misread them."""


def run_data(run: RunVerdict, findings: Sequence[Finding]) -> dict[str, object]:
    """Return a run as plain values: numbers in SI units, what is not finite as null.

    Parameters
    ----------
    run : RunVerdict
    findings : sequence of Finding
        Those of the run.
    """
    return {
        "format": FORMAT,
        "passed": run.passed,
        "project_file": run.project_file,
        "gone": list(run.gone),
        "cells": {cell.name: cell_data(cell) for cell in run.cells},
        "findings": [finding_data(f) for f in findings if f.level != "passed"],
    }


def run_json(data: Mapping[str, object]) -> str:
    """Return a run's data as JSON text, one cell and one finding a line."""
    parts = []
    for key, value in sorted(data.items()):
        if isinstance(value, Mapping):
            rows = [f"{json.dumps(name)}: {_line(one)}" for name, one in sorted(value.items())]
            parts.append(f"{json.dumps(key)}: " + "{" + _rows(rows) + "}")
        elif isinstance(value, list):
            parts.append(f"{json.dumps(key)}: [" + _rows(map(_line, value)) + "]")
        else:
            parts.append(f"{json.dumps(key)}: {_line(value)}")
    return "{\n" + ",\n".join(parts) + "\n}\n"


def _rows(rows: Iterable[str]) -> str:
    text = ",\n  ".join(rows)
    return f"\n  {text}\n" if text else ""


def _line(value: object) -> str:
    return json.dumps(value, sort_keys=True, allow_nan=False)


def cell_data(cell: CellVerdict) -> dict[str, object]:
    """Return one cell's verdict as plain values."""
    return {
        "passed": cell.passed,
        "recorded": cell.comparison is not None,
        "comparison": comparison_data(cell.comparison) if cell.comparison else None,
        "limits": [_limit_data(verdict) for verdict in cell.limits],
        "check": None if cell.check is None else cell.check.passed,
        "tables": [_plain(asdict(source)) for source in cell.sources],
    }


def comparison_data(comparison: Comparison) -> dict[str, object]:
    """Return a comparison as plain values."""
    return {
        "passed": comparison.passed,
        "false_alarms": comparison.false_alarms,
        "interface": [_plain(asdict(change)) for change in comparison.interface],
        "quantities": {q.of: _quantity_data(q) for q in comparison.quantities},
        "rows": [_plain(asdict(row)) for row in comparison.rows],
        "consequences": [_plain(asdict(one)) for one in comparison.consequences],
        "notices": list(comparison.notices),
    }


def finding_data(finding: Finding) -> dict[str, object]:
    """Return a finding as plain values."""
    return {
        "fails": finding.fails,
        "cell": finding.cell,
        "kind": finding.kind,
        "subject": finding.subject,
        "level": finding.level,
        "message": finding.message,
        "spots": [{"file": s.file, "line": s.line, "words": s.words} for s in finding.spots],
    }


def _quantity_data(quantity: QuantityDrift) -> dict[str, object]:
    return {
        "state": quantity.state,
        "presence": quantity.presence,
        "same_tables": quantity.same_tables,
        "limit": _plain(asdict(quantity.limit)) if quantity.limit else None,
        "compared": quantity.compared,
        "drifts": [_drift_data(drift) for drift in quantity.drifts],
    }


def _drift_data(drift: Drift) -> dict[str, object]:
    return {
        "state": drift.state,
        "condition": _fields(drift.place.condition),
        "at": drift.place.at,
        "s_curve": drift.place.s_curve,
        "unit": drift.unit,
        "old": _fields(drift.old),
        "new": _fields(drift.new),
        "difference": drift.difference,
        "share": drift.share,
        "joint_errors": _plain(drift.errors),
        "detectable": _plain(drift.detectable),
    }


def _limit_data(verdict: LimitVerdict) -> dict[str, object]:
    return {
        "limit": _fields(verdict.limit),
        "text": verdict.limit.text,
        "state": verdict.state,
        "estimate": _of(verdict.estimate),
        "condition": _of(verdict.condition),
        "reason": verdict.reason,
    }


def _of(value: Estimate | Condition | None) -> object:
    return None if value is None else _fields(value)


def _fields(value: Estimate | Condition | Limit) -> object:
    """Return the fields of a flat dataclass; `asdict` would look for others within."""
    return _plain({name: getattr(value, name) for name in value.__dataclass_fields__})


def _mapping(value: Mapping[str, object]) -> dict[str, object]:
    return {key: _plain(inner) for key, inner in value.items()}


def _plain(value: object) -> object:
    if isinstance(value, Mapping):
        return _mapping(value)
    if isinstance(value, str) or value is None:
        return value
    if isinstance(value, float):
        return value + 0.0 if math.isfinite(value) else None  # no minus zero
    if is_dataclass(value) and not isinstance(value, type):
        return _plain(asdict(value))
    if isinstance(value, Iterable):
        return [_plain(inner) for inner in value]
    return value
