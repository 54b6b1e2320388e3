"""Headers -> what they probably hold, by the words in them and the unit they carry.

Guesses only ever go into a starter project, where each is marked, and into hints
beside a fault; nothing is read on the strength of one.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from behavgen.quantities import CONDITIONS, QUANTITIES, Column, Form
from behavgen.units import UnitError, header_stem, unit_of_header

__all__ = ["Guess", "guess_column", "guess_quantity"]

_PHRASES: Mapping[str, tuple[str, ...]] = {
    "process": ("process", "proc", "corner", "pvt"),
    "vdd": ("vdd", "vcc", "avdd", "vdda", "supply", "vsupply", "vsup"),
    "temp": ("temp", "temperature", "junction", "tj", "t j", "t"),
    "vcm": ("vcm", "common mode", "vicm", "cm"),
    "instance": ("instance", "inst", "mc", "run", "seed", "sample", "iteration", "die", "device"),
    "offset": ("offset", "vos", "voff", "trip", "v os"),
    "offset_low": ("offset low", "offset min", "offset lo", "vos low", "vos min"),
    "offset_high": ("offset high", "offset max", "offset hi", "vos high", "vos max"),
    "mean": ("mean", "average", "avg", "mu"),
    "sigma": ("sigma", "std", "stdev", "rms"),
    "sigma_error": ("sigma error", "sigma err", "std error"),
    "instances": ("instances", "samples", "n"),
    "vdiff": ("vdiff", "vid", "vin diff", "v diff", "vin", "v in", "level", "input", "din"),
    "overdrive": ("overdrive", "vod", "v od", "od"),
    "trials": ("trials", "shots", "decisions", "n", "total"),
    "ones": ("ones", "hits", "highs", "n ones", "n high"),
    "bit": ("bit", "out", "q", "decision"),
    "delay": ("delay", "tpd", "tdelay", "td", "t d", "tdec", "latency"),
    "observed_for": ("observed for", "observed", "watched", "timeout", "tstop"),
    "decision": ("decision", "bit", "out", "q"),
    "resolve_time": ("resolve time", "t res", "tres", "t resolve", "resolve", "t after"),
    "window": ("window", "win", "width", "unresolved"),
    "searched_span": ("searched span", "searched"),
    "unresolved": ("unresolved", "metastable", "undecided"),
    "span": ("span", "swept"),
    "reset_time": ("reset time", "t reset", "treset", "t rst"),
    "memory_shift": ("memory shift", "shift", "memory", "hysteresis"),
    "censored": ("censored", "at least"),
    "reset_delay": ("reset delay", "t reset delay", "delay reset", "recovery"),
    "step_time": ("step time", "t step"),
    "step_weight": ("step weight", "weight"),
    "step": ("step", "step size"),
    "energy": ("energy", "e"),
    "cycle_time": ("cycle time", "cycle", "period", "t cycle"),
    "charge_common": ("charge common", "q cm", "q common", "charge cm"),
    "charge_differential": ("charge differential", "q diff", "charge diff", "q dm"),
    "source_resistance": ("source resistance", "rs", "rsource", "r source", "r s"),
}
"""Our column names to the words by which people call them, most of them common practice."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Guess:
    """What a file's headers probably mean.

    Parameters
    ----------
    quantity : str
        Quantity of the whole table.
    columns : mapping
        Our column names to headers, conditions included.
    """

    quantity: str
    columns: Mapping[str, str]


def guess_quantity(headers: Sequence[str]) -> Guess | None:
    """Return the quantity whose columns explain most of the headers, or None.

    >>> guess_quantity(["vdd_V", "vod_V", "delay_ps"])
    Guess(quantity='delay', columns={'vdd': 'vdd_V', 'overdrive': 'vod_V', 'delay': 'delay_ps'})
    """
    best: tuple[float, Guess] | None = None
    for quantity in QUANTITIES.values():
        own = {column.name: column for column in quantity.columns}
        for form in quantity.forms:
            columns, score = _assign(_columns_of_form(form, own), headers)
            if columns.keys() >= {*form.required} and (best is None or score > best[0]):
                best = score, Guess(quantity=quantity.name, columns=columns)
    return best[1] if best else None


def guess_column(column: Column, headers: Iterable[str]) -> str | None:
    """Return the header that most probably holds a column, or None."""
    scored = [(_likeness(column, header), header) for header in headers]
    score, header = max(scored, default=(0.0, ""))
    return header if score > 0.0 else None


def _columns_of_form(form: Form, own: Mapping[str, Column]) -> list[Column]:
    return [*CONDITIONS, *(own[name] for name in (*form.required, *form.optional))]


def _assign(columns: Iterable[Column], headers: Sequence[str]) -> tuple[dict[str, str], float]:
    """Give each column its likeliest header, best pairs first, none twice."""
    pairs = sorted(
        (
            (-score, index, column.name)
            for column in columns
            for index, header in enumerate(headers)
            if (score := _likeness(column, header)) > 0.0
        ),
    )
    found: dict[str, int] = {}
    total = 0.0
    for score, index, name in pairs:
        if name not in found and index not in found.values():
            found[name] = index
            total -= score
    in_order = sorted(found, key=lambda name: found[name])
    return {name: headers[found[name]] for name in in_order}, total


def _likeness(column: Column, header: str) -> float:
    """Return 0 to 1: the share of the header's words that are one of the column's names.

    A single letter, as in ``T_C``, is a name only beside a unit that confirms it.
    """
    try:
        unit = None if column.is_text else unit_of_header(header, column.unit)
    except UnitError:
        return 0.0
    words = _words(header_stem(header))
    likeness = 0.0
    for phrase in (column.name.replace("_", " "), *_PHRASES[column.name]):
        wanted = phrase.split()
        confirmed = unit is not None or column.unit in ("", "1") or len(phrase) > 1
        if words and confirmed and {*wanted} <= {*words}:
            likeness = max(likeness, len(wanted) / len(words))
    return likeness


def _words(text: str) -> list[str]:
    """Split ``t_stepRel.clk`` into words in small letters."""
    spaced = re.sub(r"(?<=[a-z])(?=[A-Z][a-z])", " ", text)
    return [word.lower() for word in re.split(r"[^A-Za-z0-9]+", spaced) if word]
