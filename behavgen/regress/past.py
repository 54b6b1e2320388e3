"""What the history keeps: runs, values, and values over runs."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime

__all__ = ["PastRun", "PastValue", "Trend", "TrendPoint"]


@dataclass(frozen=True, slots=True, kw_only=True)
class PastRun:
    """One regression; `passed` is None while it runs, and for ever if it was killed."""

    number: int
    began: datetime
    passed: bool | None


@dataclass(frozen=True, slots=True, kw_only=True)
class PastValue:
    """One parameter of one cell as one run found it.

    Parameters
    ----------
    cell, parameter : str
    unit : str
        SI unit, ``"1"`` for pure numbers.
    value : float
    low, high : float or None
        Its interval.
    verdict : str
        What was said of it, such as ``"within limits"``; empty when nothing was.
    """

    cell: str
    parameter: str
    unit: str
    value: float
    low: float | None = None
    high: float | None = None
    verdict: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class TrendPoint:
    """One point of a trend."""

    run: int
    began: datetime
    value: float
    low: float | None
    high: float | None
    verdict: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Trend:
    """One parameter of one cell over runs, the oldest first."""

    cell: str
    parameter: str
    unit: str
    points: tuple[TrendPoint, ...]
