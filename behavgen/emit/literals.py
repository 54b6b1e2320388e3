"""Numbers and text as hardware description languages write them.

`real_literal` reads back to the same bits in every language: it is the
shortest decimal text of the double, which correct rounding returns to it.
"""

from __future__ import annotations

import math
import unicodedata

from behavgen.model import Range
from behavgen.units import format_celsius, format_si

__all__ = ["bits_literal", "comment_text", "range_text", "real_literal", "string_literal"]

_MICRO = {0x00B5: "u", 0x03BC: "u", 0x03A9: "ohm", 0x2126: "ohm", 0x00B0: "deg"}


def real_literal(value: float) -> str:
    """Return a real number, e.g. ``1.5``, ``2e-15`` or ``-3.0``.

    Raises
    ------
    ValueError
        For infinities and NaN, which no language can write.
    """
    value = float(value)
    if not math.isfinite(value):
        raise ValueError(f"{value} has no literal in a hardware description language")
    mantissa, _, exponent = repr(value).partition("e")
    return f"{mantissa}e{int(exponent)}" if exponent else mantissa


def bits_literal(value: int, width: int = 64) -> str:
    """Return an unsigned number of `width` bits (a multiple of 16), e.g. ``32'h0000_00ff``."""
    digits = f"{value:0{width // 4}x}"
    groups = [digits[i : i + 4] for i in range(0, len(digits), 4)]
    return f"{width}'h{'_'.join(groups)}"


def string_literal(text: str) -> str:
    """Return a quoted string; characters outside printable ASCII are spelt or dropped."""
    plain = comment_text(text).replace("\\", "\\\\").replace('"', '\\"')
    return f'"{plain}"'


def comment_text(text: str) -> str:
    """Return text that is safe in a one-line comment: printable ASCII, single spaces."""
    spelt = unicodedata.normalize("NFKD", text.translate(_MICRO))
    ascii_text = spelt.encode("ascii", "ignore").decode("ascii")
    return " ".join(ascii_text.split()).rstrip("\\")


def range_text(span: Range, unit: str) -> str:
    """Return a range for people, e.g. ``1.08 V to 1.32 V``; kelvins as degrees Celsius."""
    low, high = (
        format_celsius(value) if unit == "K" else format_si(value, unit)
        for value in (span.low, span.high)
    )
    return low if low == high else f"{low} to {high}"
