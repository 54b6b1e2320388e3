"""How the command line writes ranges, shares, numbers with intervals and labelled lines; ASCII."""

from __future__ import annotations

import os
import textwrap
from collections.abc import Sequence
from math import floor, log10
from pathlib import Path

from behavgen.model import Estimate, Range
from behavgen.units import format_celsius, format_si

__all__ = [
    "behind",
    "estimate_text",
    "interval_text",
    "labelled",
    "percent_text",
    "range_text",
    "shown_path",
    "state_text",
    "wrapped",
]

_LABEL_WIDTH = 11
_LINE_WIDTH = 100


def labelled(label: str, text: str) -> list[str]:
    """Return a text behind its label, its further lines under its first.

    >>> labelled("noise", "5 conditions")
    ['  noise      5 conditions']
    """
    head = f"  {label:<{_LABEL_WIDTH}}"
    parts = text.splitlines()
    lines = [line for part in parts for line in wrapped(part, indent=len(head))] or [head.rstrip()]
    return [head + lines[0][len(head) :], *lines[1:]]


def behind(label: str, lines: Sequence[str]) -> list[str]:
    """Return finished lines behind a label that stands beside the first of them."""
    heads = [label, *[""] * (len(lines) - 1)]
    return [f"  {head:<{_LABEL_WIDTH}}{line}" for head, line in zip(heads, lines, strict=False)]


def wrapped(text: str, *, indent: int = 0) -> list[str]:
    """Return the lines of a text, none wider than a terminal usually is; paths stay whole."""
    pad = " " * indent
    return textwrap.wrap(
        text, _LINE_WIDTH, initial_indent=pad, subsequent_indent=pad,
        break_long_words=False, break_on_hyphens=False,
    )  # fmt: skip


def range_text(span: Range | None, unit: str) -> str:
    """Write a range with its units; a single value stands alone.

    >>> range_text(Range(low=233.15, high=398.15), "K"), range_text(Range(low=0.6, high=0.6), "V")
    ('-40 degC..125 degC', '600 mV')
    """
    if span is None:
        return "not characterised"
    ends = [_number(value, unit, 4) for value in (span.low, span.high)]
    return ends[0] if span.low == span.high else "..".join(ends)


def percent_text(ratio: float) -> str:
    """Write a ratio in per cent with two digits.

    >>> percent_text(0.00912), percent_text(0.123)
    ('0.91 %', '12 %')
    """
    return f"{float(f'{100.0 * ratio:.1e}'):g} %"


def estimate_text(estimate: Estimate, unit: str) -> str:
    """Write an estimate without its interval, but not finer than a thousandth of it.

    >>> estimate_text(Estimate(value=-2e-20, low=-3e-5, high=3e-5), "V")
    '0 V'
    """
    value = estimate.value
    if estimate.low is not None and estimate.high is not None and estimate.high > estimate.low:
        digit = floor(log10(estimate.high - estimate.low)) - 3
        value = round(value, -digit) + 0.0
    return _number(value, unit, 4)


def interval_text(estimate: Estimate, unit: str) -> str:
    """Write the interval of an estimate, empty where there is none."""
    if estimate.low is None or estimate.high is None:
        return ""
    ends = "..".join(_number(value, unit, 4) for value in (estimate.low, estimate.high))
    return f"{ends} ({100.0 * estimate.level:g} %)"


def shown_path(path: Path) -> str:
    """Write a path as one would type it from here."""
    near = os.path.relpath(path)
    return near if len(near) < len(str(path)) else str(path)


def state_text(*, made: bool) -> str:
    """Tell a result made now from one that was current already."""
    return "" if made else "   (current already)"


def _number(value: float, unit: str, digits: int) -> str:
    if unit == "K":
        return format_celsius(value)
    return f"{value:.{digits}g}" if unit in ("1", "") else format_si(value, unit, digits)
