"""Two models of one cell held against each other: interface, numbers, and what follows."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence

from behavgen.limits import DriftLimit, Limit, quantity_words
from behavgen.model import ComparatorModel, Condition, Source
from behavgen.provenance import mixed_provenance
from behavgen.regress.comparison import FALSE_ALARMS, Comparison, Consequence, QuantityDrift
from behavgen.regress.consequences import consequences, differs
from behavgen.regress.drift import drifts, moved_quantities
from behavgen.regress.driving_rows import driving_rows
from behavgen.regress.interface import interface_changes
from behavgen.regress.limit_verdicts import limit_verdicts

__all__ = ["compare"]


def compare(
    old: ComparatorModel,
    new: ComparatorModel,
    limits: Mapping[str, DriftLimit] | None = None,
    *,
    settings: Sequence[Limit] = (),
    false_alarms: float = FALSE_ALARMS,
) -> Comparison:
    """Compare two models of one cell.

    Parameters
    ----------
    old, new : ComparatorModel
    limits : mapping, optional
        Quantity to how far it may move; without, no more than noise can explain.
    settings : sequence of Limit
        What users decide by: its numbers are told old and new, whatever its bounds.
    false_alarms : float
        Probability, over all numbers together, with which noise is called a drift.
    """
    quantities = drifts(old, new, limits or {}, false_alarms=false_alarms)
    moved = moved_quantities(quantities)
    places = dict.fromkeys([_middle(old), *_leading_conditions(moved)]) if moved else {}
    known = {process.name for process in new.processes} | {""}
    return Comparison(
        interface=interface_changes(old, new),
        quantities=quantities,
        rows=driving_rows(old, new, [quantity.of for quantity in moved]),
        consequences=(
            *(_at_settings(old, new, settings) if moved else ()),
            *consequences(old, new, [p for p in places if p.process in known]),
        ),
        notices=tuple(_notices(old, new, quantities)),
        false_alarms=false_alarms,
    )


def _at_settings(
    old: ComparatorModel, new: ComparatorModel, settings: Sequence[Limit]
) -> Iterator[Consequence]:
    """Yield the limited numbers of both models where the new one is nearest to its bound."""
    pairs = zip(limit_verdicts(old, settings), limit_verdicts(new, settings), strict=True)
    for was, now in pairs:
        if was.estimate is None or now.estimate is None or now.condition is None:
            continue
        if differs(was.estimate, now.estimate, now.limit.unit):
            yield Consequence(
                what=now.limit.subject,
                unit=now.limit.unit,
                condition=now.condition,
                old=was.estimate,
                new=now.estimate,
            )


def _middle(model: ComparatorModel) -> Condition:
    box = model.box
    spans = (box.vdd_v, box.temperature_k, box.vcm_v)
    vdd_v, temperature_k, vcm_v = (None if span is None else span.middle for span in spans)
    return Condition(
        process=model.processes[0].name, vdd_v=vdd_v, temperature_k=temperature_k, vcm_v=vcm_v
    )


def _leading_conditions(moved: Sequence[QuantityDrift]) -> Iterator[Condition]:
    """Yield where the first of the worst drifts is."""
    worst = [quantity for quantity in moved if quantity.state == "beyond"] or [*moved]
    for quantity in worst[:1]:
        if quantity.leading is not None:
            yield quantity.leading.place.condition


def _notices(
    old: ComparatorModel, new: ComparatorModel, quantities: tuple[QuantityDrift, ...]
) -> Iterator[str]:
    yield from mixed_provenance((source.file, source.provenance) for source in new.sources)
    yield from _stage_changes(old.sources, new.sources)
    for quantity in quantities:
        yield from _quantity_notices(quantity)


def _stage_changes(old: tuple[Source, ...], new: tuple[Source, ...]) -> Iterator[str]:
    """Say that models of different provenance are compared, which may be what is wanted."""
    for name, words in (("stage", "stage"), ("kit", "process kit"), ("netlist_hash", "netlist")):
        ours, theirs = (
            ", ".join(sorted({getattr(s.provenance, name) for s in sources} - {""}))
            for sources in (old, new)
        )
        if ours and theirs and ours != theirs:
            yield f"{words}: {ours} -> {theirs}"


def _quantity_notices(quantity: QuantityDrift) -> Iterator[str]:
    name = quantity_words(quantity.of)
    if quantity.presence == "gained":
        yield f"{name}: characterised now, not before"
    elif quantity.presence == "both" and not quantity.drifts:
        yield f"{name}: the measured ranges have nothing in common, nothing was compared"
    if quantity.same_tables and quantity.state in ("within limit", "beyond"):
        yield f"{name}: the tables are the same; the program or the cell's settings moved it"
    if quantity.blind:
        limit = quantity.limit.text if quantity.limit else ""
        yield f"{name}: noise in the tables could hide a drift beyond the limit of {limit}"
