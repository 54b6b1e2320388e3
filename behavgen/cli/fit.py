"""The command ``fit``: a model for each cell, and how well it fits."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import asdict, fields
from itertools import groupby
from statistics import median

from behavgen.cli.cells import CellResult, add_cells_argument, command_line, each_cell
from behavgen.cli.parser import Options, Parser
from behavgen.cli.terminal import Terminal, aligned
from behavgen.cli.verdict import Outcome
from behavgen.cli.wording import (
    estimate_text,
    interval_text,
    labelled,
    percent_text,
    range_text,
    shown_path,
    state_text,
)
from behavgen.condition_words import condition_words
from behavgen.model import ComparatorModel, ConditionFit, Parameter, Surface
from behavgen.pipeline import CellPlace, FittedCell, fit_cell
from behavgen.units import format_si

ABOUT = """\
Fit a model to the tables of each cell and write it to <out>/<cell>/<cell>.model.json.
Shown are the laws chosen, how well they follow the tables, and the main numbers."""
ARGUMENTS = "[CELL ...]"
EXAMPLE = "behavgen fit latch_a"

_AXES = {"temperature_k": "temperature", "vdd_v": "supply", "vcm_v": "common mode"}
_SHAPES = {
    "plain": "",
    "reciprocal": " as 1/x",
    "reciprocal_square": " as 1/x^2",
    "reciprocal_fourth": " as 1/x^4",
}


def add_arguments(parser: Parser) -> None:
    """Declare what the command takes."""
    add_cells_argument(parser)


def run(options: Options, terminal: Terminal) -> Outcome:
    """Fit the cells asked for."""
    done = each_cell(options, terminal, _fit, at_once=True)
    return done.outcome(options, done="fitted", then=command_line(options, "emit"))


def _fit(place: CellPlace) -> CellResult:
    return fit_result(fit_cell(place))


def fit_result(fitted: FittedCell) -> CellResult:
    """Return what there is to say of a fitted cell."""
    model = fitted.model
    file = shown_path(fitted.place.model_file)
    return CellResult(
        lines=[
            *labelled("model", file + state_text(made=fitted.made)),
            *labelled("range", _box_text(model)),
            *(line for label, text in _effects(model) for line in labelled(label, text)),
            *_parameter_lines(_ends_of_each_name(model.parameters)),
            *(line for notice in model.notices for line in labelled("look at", notice)),
        ],
        more=[
            *_parameter_lines(model.parameters),
            *aligned([_condition_row(fit) for fit in model.fits]),
        ],
        data={
            "model": file,
            "made": fitted.made,
            "box": asdict(model.box),
            "parameters": [asdict(parameter) for parameter in model.parameters],
            "fits": [asdict(fit) for fit in model.fits],
            "absent": _absent(model),
        },
        warnings=model.notices,
    )


def _box_text(model: ComparatorModel) -> str:
    box = model.box
    parts = [
        f"supply {range_text(box.vdd_v, 'V')}",
        f"temperature {range_text(box.temperature_k, 'K')}",
        f"common mode {range_text(box.vcm_v, 'V')}",
        f"overdrive {range_text(box.overdrive_v, 'V')}",
    ]
    codes = (f"{process.name} ({process.code})" for process in model.processes)
    return ", ".join([*parts, f"process {' '.join(codes)}"])


def _effects(model: ComparatorModel) -> Iterator[tuple[str, str]]:
    """Yield a label and a text for each effect that the model has."""
    if model.delay is not None:
        law = f"{model.delay.law}, " if model.delay.law else ""
        yield "delay", law + _surface_text(model.delay.tau)
        yield from _quality(model, "delay", "window")
    if model.noise is not None:
        yield "noise", _surface_text(model.noise.surface)
        yield from _quality(model, "noise")
    if model.offset is not None:
        source = f" from {model.offset.source}" if model.offset.source else ""
        yield "offset", _surface_text(model.offset.surface) + source
    if model.mismatch is not None:
        yield "mismatch", f"spread of {model.mismatch.instances} instances"
    if model.reset is not None:
        yield "reset", _surface_text(model.reset.surface)
    yield from _memory_and_charges(model)
    if _absent(model):
        yield "absent", f"{' '.join(_absent(model))} (not characterised, so without effect)"


def _memory_and_charges(model: ComparatorModel) -> Iterator[tuple[str, str]]:
    if model.memory is not None:
        terms, floor = len(model.memory.terms), model.memory.floor is not None
        number = "an exponential" if terms == 1 else f"{terms} exponentials"
        law = " and ".join([number] * (terms > 0) + ["a floor"] * floor)
        yield "memory", f"{law} over the reset time, at most {format_si(model.memory.cap_v, 'V')}"
        yield from _quality(model, "memory")
    if model.aperture is not None:
        yield "aperture", _surface_text(model.aperture.centre)
    if model.energy is not None:
        growth = {"delay": "more with the delay, ", "overdrive": "more at small overdrives, "}
        yield "energy", growth.get(model.energy.law, "") + _surface_text(model.energy.fixed)
        yield from _quality(model, "energy")
    if model.kickback is not None:
        yield "kickback", _surface_text(model.kickback.common)


def _absent(model: ComparatorModel) -> list[str]:
    """Return the effects that the model could have and has not."""
    effects = (field.name for field in fields(model) if field.default is None)
    return [name for name in effects if getattr(model, name) is None]


def _surface_text(surface: Surface) -> str:
    """Write what a surface depends on, and how."""
    axes = [_AXES[axis.condition] + _SHAPES[axis.shape] for axis in surface.axes]
    scaled = [variant.process for variant in surface.variants if variant.scaled_from]
    text = f"over {', '.join(axes)}" if axes else "the same at all conditions"
    return f"{text}; scaled for {' '.join(scaled)}" if scaled else text


def _quality(model: ComparatorModel, *quantities: str) -> Iterator[tuple[str, str]]:
    for quantity in quantities:
        fits = [fit for fit in model.fits if fit.quantity == quantity]
        if fits:
            yield "", f"{quantity}: {_quality_text(fits)}"


def _quality_text(fits: Sequence[ConditionFit]) -> str:
    rms = [fit.rms_relative for fit in fits if fit.rms_relative is not None]
    misses = [fit.worst_relative for fit in fits if fit.worst_relative is not None]
    held_out = [f.held_out_rms_relative for f in fits if f.held_out_rms_relative is not None]
    goodness = [fit.goodness for fit in fits if fit.goodness is not None]
    parts = [f"{len(fits)} conditions" if len(fits) > 1 else "1 condition"]
    if rms:
        parts.append(
            f"rms error {percent_text(median(rms))} median, {percent_text(max(rms))} worst"
        )
    if misses:
        parts.append(f"largest error of a row {percent_text(max(misses))}")
    if held_out:
        parts.append(f"held out {percent_text(median(held_out))} median, "
                     f"{percent_text(max(held_out))} worst")  # fmt: skip
    if goodness:
        parts.append(f"lowest p-value of fit {min(goodness):.2g}")
    return "; ".join(parts)


def _ends_of_each_name(parameters: Sequence[Parameter]) -> list[Parameter]:
    """Return the first and the last of the parameters of one name, as of delays along a curve."""
    shown: list[Parameter] = []
    for _, group in groupby(parameters, key=lambda parameter: parameter.name):
        first, *others = group
        shown += [first, *others[-1:]]
    return shown


def _parameter_lines(parameters: Sequence[Parameter]) -> list[str]:
    return aligned(
        [
            (
                parameter.name,
                estimate_text(parameter.estimate, parameter.unit),
                interval_text(parameter.estimate, parameter.unit),
                parameter.description,
            )
            for parameter in parameters
        ]
    )


def _condition_row(fit: ConditionFit) -> tuple[str, ...]:
    def share(name: str, value: float | None) -> str:
        return f"{name} {percent_text(value)}" if value is not None else ""

    own = ", ".join(f"{p.name} {estimate_text(p.estimate, p.unit)}" for p in fit.parameters)
    return (
        fit.quantity,
        condition_words(fit.condition) or "all conditions",
        f"{fit.rows} rows",
        share("rms", fit.rms_relative),
        share("worst", fit.worst_relative),
        share("held out", fit.held_out_rms_relative),
        own,
    )
