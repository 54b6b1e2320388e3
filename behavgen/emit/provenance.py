"""What the head of an emitted file says about it, as plain lines for any language.

What it models and how well, from which tables, for which conditions, what it
leaves out, and what must not be read into it.
"""

from __future__ import annotations

import textwrap
from collections.abc import Collection, Iterable
from dataclasses import dataclass

from behavgen.emit.literals import comment_text, range_text
from behavgen.model import Box, ComparatorModel, ConditionFit, Parameter, Range
from behavgen.units import format_si

__all__ = ["HeaderSection", "header_lines", "header_sections"]

_LATER = ("memory", "aperture", "energy", "kickback")

_CONDITIONS = (
    ("vdd_v", "supply", "V"),
    ("temperature_k", "temperature", "K"),
    ("vcm_v", "common mode", "V"),
    ("overdrive_v", "overdrive", "V"),
)
_NOISE = "Gaussian, no draws beyond 8.3 sigma where they cannot change a bit"
_ENERGY_LAWS = {
    "constant": "the same for all",
    "delay": "grows with the delay",
    "overdrive": "grows with the logarithm of a falling overdrive",
}
_CAUTIONS = (
    "Fitted to tables and valid inside the stated ranges; outside, conditions "
    "are clamped and results are no predictions.",
    "It replaces neither transistor-level, extracted, timing or reliability sign-off nor your "
    "own safety process, and claims no integrity level.",
    "Rates far below what was counted rest on a Gaussian and an exponential law. Intervals "
    "leave out the process kit's accuracy, parasitics, ageing, supply noise and jitter; "
    "mismatch has no spatial correlation.",
    "What an unresolved output shows is a convention; coin and hold can hide a synchroniser "
    "fault. Random numbers reproduce a simulation and are not for security.",
    "The file reveals performance that derives from a process kit: check its licence before "
    "passing it on.",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class HeaderSection:
    """A titled group of lines; each line is one fact, not yet wrapped."""

    title: str
    lines: tuple[str, ...]


def header_sections(
    model: ComparatorModel,
    *,
    noise: str = _NOISE,
    differences: HeaderSection | None = None,
    left_out: Collection[str] = _LATER,
) -> tuple[HeaderSection, ...]:
    """Return the head of an emitted file in reading order; sections without content are absent.

    Parameters
    ----------
    model : ComparatorModel
    noise : str
        How the file models noise.
    differences : HeaderSection or None
        From the models in other languages.
    left_out : collection of str
        Effects, by their field in the model, that the file has no equations for.
    """
    candidates = (
        ("Valid for", _ranges(model)),
        ("Models", _effects(model, noise, left_out)),
        ("Does not model", (", ".join(_absent(model, left_out)),)),
        ("Values at the middle of the range", tuple(map(_value, model.parameters))),
        ("Made from", _tables(model)),
        ("Fits the tables", _fits(model)),
        ("Note", tuple(map(comment_text, model.notices))),
        *([(differences.title, differences.lines)] if differences else []),
        ("Caution", _CAUTIONS),
        ("Use", (_origin(model),)),
    )
    return tuple(HeaderSection(title=title, lines=lines) for title, lines in candidates if lines)


def header_lines(sections: Iterable[HeaderSection], width: int = 96) -> tuple[str, ...]:
    """Return the sections as wrapped lines of at most `width` characters, without comment marks."""
    lines: list[str] = []
    for section in sections:
        lines += ["", f"{section.title}:"]
        for line in section.lines:
            lines += textwrap.wrap(
                line, width, initial_indent="  ", subsequent_indent="    ", break_on_hyphens=False
            )
    return tuple(lines[1:])


def _ranges(model: ComparatorModel) -> tuple[str, ...]:
    lines = []
    for name, label, unit in _CONDITIONS:
        span: Range | None = getattr(model.box, name)
        known = range_text(span, unit) if span else "not characterised: has no influence"
        lines.append(f"{label} {known}")
    if model.cell.supply_off_v is not None and model.cell.pins.vdd is not None:
        lines.append(f"off below a supply of {format_si(model.cell.supply_off_v, 'V')}")
    lines += [
        f"process {p.name} (code {p.code}){_own_range(model, p.name)}" for p in model.processes
    ]
    return tuple(map(comment_text, lines))


def _own_range(model: ComparatorModel, process: str) -> str:
    """Say so where a process was measured in a smaller range than the cell."""
    if model.delay is None:
        return ""
    variant = model.delay.tau.variant(process)
    parts = [f"scaled from {variant.scaled_from}"] if variant.scaled_from else []
    parts += [
        f"{label} {range_text(span, unit)}"
        for name, label, unit in _CONDITIONS[:3]
        if (span := _span(variant.box, name)) is not None and span != _span(model.box, name)
    ]
    return ": " + ", ".join(parts) if parts else ""


def _span(box: Box, condition: str) -> Range | None:
    span: Range | None = getattr(box, condition)
    return span


def _effects(model: ComparatorModel, noise: str, left_out: Collection[str]) -> tuple[str, ...]:
    lines = []
    if model.offset is not None:
        lines.append(f"offset: {model.offset.source or 'nominal trip point'}")
    if model.mismatch is not None:
        lines.append(f"mismatch between instances: {model.mismatch.instances} measured")
    if model.noise is not None:
        lines.append(f"noise: {noise}")
    if model.delay is not None:
        law = f"delay over overdrive: {model.delay.law or 'nodes'}"
        measured = f", measured from {model.delay.measured}" if model.delay.measured else ""
        lines.append(law + measured)
    if model.reset is not None:
        lines.append("reset delay")
    lines += [
        words
        for name, words in _laws(model).items()
        if getattr(model, name) is not None and name not in left_out
    ]
    return tuple(map(comment_text, lines))


def _laws(model: ComparatorModel) -> dict[str, str]:
    """Say in which form the later effects are modelled."""
    cap = model.memory.cap_v if model.memory else 0.0
    law = model.energy.law if model.energy else ""
    return {
        "memory": "memory of the previous decision by the length of the reset, "
        f"up to {format_si(cap, 'V')}",
        "aperture": "aperture: the input counts as it stands at its centre, not before the edge",
        "energy": f"energy of each decision and the reset after it: {_ENERGY_LAWS.get(law, law)}",
        "kickback": "kickback: charge driven out of the inputs at each decision",
    }


def _absent(model: ComparatorModel, left_out: Collection[str]) -> tuple[str, ...]:
    """Name effects that were not characterised, and those that were but have no equations."""
    names = {
        "offset": "offset", "mismatch": "mismatch", "noise": "noise", "delay": "delay",
        "reset": "reset delay", "memory": "memory of earlier decisions",
        "aperture": "aperture", "energy": "energy", "kickback": "kickback",
    }  # fmt: skip
    return tuple(
        name if getattr(model, field) is None else f"{name} (though characterised)"
        for field, name in names.items()
        if getattr(model, field) is None or field in left_out
    )


def _value(parameter: Parameter) -> str:
    estimate, unit = parameter.estimate, "" if parameter.unit == "1" else parameter.unit
    text = f"{parameter.name} {format_si(estimate.value, unit)}"
    if estimate.low is not None and estimate.high is not None:
        span = f"{format_si(estimate.low, unit)} to {format_si(estimate.high, unit)}"
        text += f" ({span} at {100 * estimate.level:g} %)"
    return comment_text(f"{text}: {parameter.description}" if parameter.description else text)


def _tables(model: ComparatorModel) -> tuple[str, ...]:
    lines = []
    for source in model.sources:
        failed = f", {source.failed_rows} failed" if source.failed_rows else ""
        lines.append(
            f"{source.quantity}: {source.file}, {source.rows} rows{failed}, "
            f"sha256 {source.sha256[:12]}"
        )
    return tuple(map(comment_text, lines))


def _fits(model: ComparatorModel) -> tuple[str, ...]:
    quantities = dict.fromkeys(fit.quantity for fit in model.fits)
    lines = [_fit([f for f in model.fits if f.quantity == q], q) for q in quantities]
    return tuple(line for line in lines if line)


def _fit(fits: list[ConditionFit], quantity: str) -> str:
    rows = sum(fit.rows for fit in fits)
    errors = (
        ("rms", [f.rms_relative for f in fits]),
        ("worst", [f.worst_relative for f in fits]),
        ("rms without that condition", [f.held_out_rms_relative for f in fits]),
    )
    shown = [
        f"{label} up to {100 * max(known):.2g} %"
        for label, values in errors
        if (known := [value for value in values if value is not None])
    ]
    word = "condition" if len(fits) == 1 else "conditions"
    goodness = [f.goodness for f in fits if f.goodness is not None]
    if goodness:
        shown.append(f"smallest p-value of the goodness of fit {min(goodness):.2g}")
    return f"{quantity}: {rows} rows, {len(fits)} {word}; {', '.join(shown)}" if shown else ""


def _origin(model: ComparatorModel) -> str:
    by = f"Written by {model.generator}. " if model.generator else ""
    return comment_text(
        f"{by}This file belongs to you: use, change and pass it on without condition."
    )
