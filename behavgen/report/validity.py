"""Where each quantity was characterised, as bars across the cell's whole range."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

from behavgen.model import Box, ComparatorModel, Range, Surface, Variant
from behavgen.report.numbers import ABSENT, range_text, volts_range_text

__all__ = ["ValidityCell", "ValidityRow", "validity_rows"]

CONDITIONS = ("vdd_v", "temperature_k", "vcm_v", "overdrive_v")
"""Columns of the table, as fields of `Box`."""


@dataclass(frozen=True, slots=True, kw_only=True)
class ValidityCell:
    """A range in words and as a bar (SVG; empty without a range)."""

    text: str
    bar: str


@dataclass(frozen=True, slots=True, kw_only=True)
class ValidityRow:
    """One quantity in one process or several processes that share a range."""

    quantity: str
    processes: str
    cells: tuple[ValidityCell, ...]


def validity_rows(model: ComparatorModel) -> tuple[ValidityRow, ...]:
    """Return one row for the cell, then one for each quantity and distinct range."""
    boxes = [("cell", "", model.box)]
    for quantity, surface in _surfaces(model):
        overdrive_v = model.box.overdrive_v if quantity == "delay" else None
        for box, names in _shared_boxes(surface):
            boxes.append((quantity, names, replace(box, overdrive_v=overdrive_v)))
    ends = {name: _union(getattr(box, name) for *_, box in boxes) for name in CONDITIONS}
    return tuple(
        ValidityRow(
            quantity=quantity,
            processes=names,
            cells=tuple(
                _cell(getattr(box, name), ends[name], name, quantity) for name in CONDITIONS
            ),
        )
        for quantity, names, box in boxes
    )


def _surfaces(model: ComparatorModel) -> list[tuple[str, Surface]]:
    found: list[tuple[str, Surface]] = []
    if model.delay:
        found.append(("delay", model.delay.tau))
    if model.noise:
        found.append(("noise", model.noise.surface))
    if model.offset:
        found.append(("offset", model.offset.surface))
    if model.mismatch and model.mismatch.components:
        found.append(("mismatch", model.mismatch.components[0]))
    if model.reset:
        found.append(("reset", model.reset.surface))
    if model.memory:
        parts = [*(term.tau for term in model.memory.terms), model.memory.floor]
        found += [("memory", part) for part in parts if part][:1]
    if model.aperture:
        found.append(("aperture", model.aperture.centre))
    if model.energy:
        found.append(("energy", model.energy.fixed))
    if model.kickback:
        found.append(("kickback", model.kickback.common))
    return found


def _shared_boxes(surface: Surface) -> list[tuple[Box, str]]:
    """Return distinct boxes with the processes that have them."""
    found: dict[Box, list[Variant]] = {}
    for variant in surface.variants:
        found.setdefault(variant.box, []).append(variant)
    if len(found) == 1 and not any(variant.scaled_from for variant in surface.variants):
        return [(box, "") for box in found]
    return [(box, _process_words(variants)) for box, variants in found.items()]


def _process_words(variants: Sequence[Variant]) -> str:
    """Name the processes, those scaled from another one after those with a fit of their own."""
    by_origin: dict[str, list[str]] = {}
    for variant in variants:
        by_origin.setdefault(variant.scaled_from, []).append(variant.process)
    own = [", ".join(by_origin.pop(""))] if "" in by_origin else []
    return "; ".join(own + [f"{', '.join(n)} scaled from {o}" for o, n in by_origin.items()])


def _union(spans: Iterable[Range | None]) -> Range | None:
    known = [span for span in spans if span is not None]
    if not known:
        return None
    return Range(low=min(s.low for s in known), high=max(s.high for s in known))


def _cell(span: Range | None, ends: Range | None, name: str, quantity: str) -> ValidityCell:
    if span is not None:
        return ValidityCell(text=_words(span, name), bar=_bar(span, ends or span))
    if name == "overdrive_v" and quantity != "cell":
        return ValidityCell(text=ABSENT, bar="")
    return ValidityCell(text="not characterised" if quantity == "cell" else "no influence", bar="")


def _words(span: Range, name: str) -> str:
    if name in ("vdd_v", "vcm_v"):
        return volts_range_text(span)
    return range_text(span, "K" if name == "temperature_k" else "V")


def _bar(span: Range, ends: Range) -> str:
    """Draw a range inside the ends; overdrives, which span decades, by their logarithm."""
    if ends.low > 0.0 and ends.high / ends.low > 100.0:
        span, ends = (replace(r, low=math.log(r.low), high=math.log(r.high)) for r in (span, ends))
    width = ends.high - ends.low
    start = 100.0 * (span.low - ends.low) / width if width > 0.0 else 0.0
    length = 100.0 * (span.high - span.low) / width if width > 0.0 else 100.0
    start, length = min(start, 98.0), max(length, 2.0)
    return (
        '<svg class="range" viewBox="0 0 100 6" preserveAspectRatio="none" aria-hidden="true">'
        '<path class="rail" d="M0 3H100"/>'
        f'<path class="extent" d="M{start:.1f} 3h{length:.1f}"/></svg>'
    )
