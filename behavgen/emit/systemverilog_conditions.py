"""What follows a condition in the SystemVerilog module, as finished lines."""

from __future__ import annotations

import textwrap
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from behavgen.emit.coordinates import Coordinate, span_text
from behavgen.emit.literals import comment_text, real_literal
from behavgen.emit.quantity_text import QuantityText
from behavgen.emit.surface_text import ProcessValue
from behavgen.emit.systemverilog_interface import WIDTH
from behavgen.model import ComparatorModel, Process, Range

__all__ = [
    "Follower",
    "Paragraph",
    "ProcessBranch",
    "WarnedRange",
    "declarations",
    "follower",
    "process_branches",
    "process_values",
    "warned_ranges",
    "wrapped",
]

_TASK_INDENT = 4
_STEMS = {"temperature_k": "temperature", "vdd_v": "supply", "vcm_v": "common_mode"}


@dataclass(frozen=True, slots=True, kw_only=True)
class Paragraph:
    """Statements under one comment."""

    comment: str
    lines: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class ProcessBranch:
    """What a process sets."""

    code: int
    name: str
    lines: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class WarnedRange:
    """The range outside which a condition draws a warning; ends as written, a process may set."""

    low: str
    high: str
    process_values: tuple[ProcessValue, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Follower:
    """What the module does when a condition changes.

    Parameters
    ----------
    warned : WarnedRange or None
        None: the condition is not characterised.
    maps : bool
        Whether coordinates follow.
    paragraphs : tuple of Paragraph
    """

    warned: WarnedRange | None
    maps: bool
    paragraphs: tuple[Paragraph, ...]

    @property
    def matters(self) -> bool:
        """Whether the module has to look at the condition at all."""
        return self.warned is not None or bool(self.paragraphs)


def follower(
    condition: str,
    points: Sequence[Coordinate],
    quantities: Sequence[QuantityText],
    warned: WarnedRange | None,
) -> Follower:
    """Return what follows a condition, or with "" what is known without any.

    Its coordinates come first, then one paragraph a quantity.
    """
    return Follower(
        warned=warned,
        maps=any(point.axis.condition == condition for point in points),
        paragraphs=_paragraphs(condition, points, quantities),
    )


def _paragraphs(
    condition: str, points: Sequence[Coordinate], quantities: Sequence[QuantityText]
) -> tuple[Paragraph, ...]:
    mapped = wrapped(_mapped([c for c in points if c.axis.condition == condition]))
    found = [Paragraph(comment="Coordinates", lines=mapped)] if mapped else []
    for quantity in quantities:
        lines = quantity.lines(condition)
        if lines:
            found.append(Paragraph(comment=quantity.comment, lines=wrapped(lines)))
    return tuple(found)


def _mapped(points: Sequence[Coordinate]) -> list[str]:
    """Return clamps and maps; coordinates that are clamped alike share their clamp."""
    by_clamp: dict[str, list[str]] = {}
    for point in points:
        clamp, mapping = point.statements
        by_clamp.setdefault(clamp, []).append(mapping)
    return [line for clamp, mappings in by_clamp.items() for line in (clamp, *mappings)]


def warned_ranges(model: ComparatorModel, points: Sequence[Coordinate]) -> dict[str, WarnedRange]:
    """Return the characterised range of each condition that has one.

    That of the delay, process by process; where the delay is not
    characterised that of the cell.
    """
    found = {}
    for condition, stem in _STEMS.items():
        ranges = [_range(model, process, condition) for process in model.processes]
        known = tuple(span for span in ranges if span is not None)
        if known and len(known) == len(ranges):
            shared = [c.name for c in points if (c.axis.condition, c.ranges) == (condition, known)]
            low, high, declared = span_text(shared[0] if shared else stem, known)
            found[condition] = WarnedRange(
                low=low, high=high, process_values=() if shared else declared
            )
    return found


def _range(model: ComparatorModel, process: Process, condition: str) -> Range | None:
    cell: Range | None = getattr(model.box, condition)
    if cell is None or model.delay is None:
        return cell
    own: Range | None = getattr(model.delay.tau.variant(process.name).box, condition)
    return own or cell


def process_values(
    points: Sequence[Coordinate],
    ranges: Iterable[WarnedRange],
    quantities: Sequence[QuantityText],
) -> tuple[ProcessValue, ...]:
    """Return everything that the process sets."""
    return (
        *(value for warned in ranges for value in warned.process_values),
        *(value for point in points for value in point.process_values),
        *(value for one in quantities for fold in one.folded for value in fold.process_values),
    )


def process_branches(
    processes: Sequence[Process], values: Sequence[ProcessValue]
) -> tuple[ProcessBranch, ...]:
    """Return what each process sets, as few lines as possible."""
    return tuple(
        ProcessBranch(
            code=process.code,
            name=comment_text(process.name),
            lines=_filled(
                [f"{value.name} = {real_literal(value.values[number])};" for value in values],
                WIDTH - _TASK_INDENT - 4,
            ),
        )
        for number, process in enumerate(processes)
    )


def declarations(
    points: Sequence[Coordinate],
    values: Sequence[ProcessValue],
    quantities: Sequence[QuantityText],
) -> tuple[str, ...]:
    """Declare the variables of coordinates, processes and folds."""
    folds = [
        assignment.target
        for quantity in quantities
        for fold in quantity.folded
        for made in fold.assignments.values()
        for assignment in made
    ]
    declared = dict.fromkeys([*(p.name for p in points), *(v.name for v in values), *folds])
    return tuple(
        line
        for group in _by_quantity(declared)
        for line in textwrap.wrap(f"real {', '.join(group)};", WIDTH - 2, subsequent_indent="     ")
    )


def _by_quantity(names: Iterable[str]) -> Iterable[list[str]]:
    """Group names by what stands before their last underscore."""
    groups: dict[str, list[str]] = {}
    for name in names:
        groups.setdefault(name.split("_")[0], []).append(name)
    return groups.values()


def wrapped(lines: Iterable[str]) -> tuple[str, ...]:
    """Return statements of a task in lines that are not too long."""
    return tuple(
        part
        for line in lines
        for part in textwrap.wrap(
            line, WIDTH - _TASK_INDENT, subsequent_indent="    ", break_on_hyphens=False
        )
    )


def _filled(statements: Iterable[str], width: int) -> tuple[str, ...]:
    """Put statements side by side as long as they fit."""
    lines: list[str] = []
    for statement in statements:
        if lines and len(lines[-1]) + 1 + len(statement) <= width:
            lines[-1] += f" {statement}"
        else:
            lines.append(statement)
    return tuple(lines)
