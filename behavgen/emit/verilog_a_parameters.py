"""Parameters of the emitted Verilog-A modules.

Those that every language has keep their names. There is no run-wide random
sequence: an instance's mismatch is given in sigmas, one number a component.
"""

from __future__ import annotations

import textwrap
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

from behavgen.emit.literals import comment_text, real_literal, string_literal
from behavgen.emit.module_parameters import (
    UNRESOLVED_MODES,
    ModuleParameter,
    module_parameters,
)
from behavgen.model import ComparatorModel, significant
from behavgen.operating_point import evaluate, operating_point

__all__ = ["ParameterText", "continuous_parameters", "event_parameters"]

_BOTH = ("OFFSET_SHIFT_V", "NOISE_ON", "MEMORY_ON", "DELAY_ON", "TEMPERATURE_C", "PROCESS")
_EVENT = (*_BOTH, "SEED", "UNRESOLVED_MODE", "FORCE_UNRESOLVED_EVERY")

_TEMPERATURE = "cell temperature; unless given, the circuit's"
_IN_CONTINUOUS = {
    "DELAY_ON": "delays; a hundredth of them when off",
    "TEMPERATURE_C": _TEMPERATURE,
}
_IN_EVENT = {
    "DELAY_ON": "delays, else outputs follow at once",
    "TEMPERATURE_C": _TEMPERATURE,
    "SEED": "seed of this instance's random numbers; equal seeds give equal numbers",
}
"""Descriptions where the meaning differs from that in SystemVerilog."""

_WIDTH = 92
_LARGEST_Z = 10.0
_UNKNOWN_SUPPLY_V = 1.0
_UNKNOWN_EDGE_S = 1e-12
_EDGE_OVER_TAU = 0.2


@dataclass(frozen=True, slots=True, kw_only=True)
class ParameterText:
    """A parameter as it is written: lines that say what it is, then its declaration."""

    notes: tuple[str, ...]
    declaration: str


def continuous_parameters(model: ComparatorModel) -> tuple[ParameterText, ...]:
    """Return the continuous module's parameters in order, described by attributes."""
    resistance = ModuleParameter(
        name="OUTPUT_OHM", kind="real", default=100.0, unit="ohm", low=1e-3,
        description="resistance of each output",
    )  # fmt: skip
    shared = _shared(model, _BOTH, _IN_CONTINUOUS)
    parameters = (*shared, *_mismatch(model), *_supply(model), resistance)
    return tuple(
        ParameterText(notes=_attributes(one), declaration=_declaration(one)) for one in parameters
    )


def event_parameters(model: ComparatorModel) -> tuple[ParameterText, ...]:
    """Return the event-driven module's parameters in order, described by comments.

    Not every simulator that takes its events takes attributes.
    """
    duration = ModuleParameter(
        name="EDGE_S", kind="real", unit="s", low=1e-15, default=_edge_s(model),
        description="duration of the output edges",
    )  # fmt: skip
    shared = _shared(model, _EVENT, _IN_EVENT)
    parameters = (*map(_in_event, shared), *_mismatch(model), *_supply(model), duration)
    return tuple(
        ParameterText(notes=_comments(one), declaration=_declaration(one)) for one in parameters
    )


def _shared(
    model: ComparatorModel, names: tuple[str, ...], descriptions: Mapping[str, str]
) -> Iterator[ModuleParameter]:
    for parameter in module_parameters(model):
        if parameter.name in names:
            description = descriptions.get(parameter.name, parameter.description)
            is_memory = parameter.name == "MEMORY_ON" and model.memory is not None
            effective = parameter.effective or is_memory
            yield replace(parameter, description=description, effective=effective)


def _in_event(parameter: ModuleParameter) -> ModuleParameter:
    if parameter.name == "SEED":
        return replace(parameter, kind="integer", default=1, low=None)
    if parameter.name == "UNRESOLVED_MODE":
        words = {**dict(parameter.codes), UNRESOLVED_MODES["x"]: "half the supply"}
        return replace(parameter, codes=tuple(words.items()))
    return parameter


def _mismatch(model: ComparatorModel) -> Iterator[ModuleParameter]:
    components = model.mismatch.components if model.mismatch else ()
    for k in range(len(components)):
        yield ModuleParameter(
            name=f"MISMATCH_Z{k}", kind="real", default=0.0, low=-_LARGEST_Z, high=_LARGEST_Z,
            description=f"mismatch component {k} of this instance, in sigmas",
        )  # fmt: skip


def _supply(model: ComparatorModel) -> Iterator[ModuleParameter]:
    if model.cell.pins.vdd is None:
        span = model.box.vdd_v
        yield ModuleParameter(
            name="SUPPLY_V", kind="real", unit="V", low=0.0, description="supply",
            default=round(span.middle, 9) if span else _UNKNOWN_SUPPLY_V,
        )  # fmt: skip


def _edge_s(model: ComparatorModel) -> float:
    """Return a fifth of the regeneration time constant at the middle of the range."""
    if model.delay is None:
        return _UNKNOWN_EDGE_S
    tau_s = evaluate(model.delay.tau, operating_point(model, (), {}))
    return significant(_EDGE_OVER_TAU * float(tau_s[0]), digits=1)


def _declaration(parameter: ModuleParameter) -> str:
    kind = "real" if parameter.kind == "real" else "integer"
    default = _literal(parameter, parameter.default)
    return f"parameter {kind} {parameter.name} = {default}{_range(parameter)};"


def _attributes(parameter: ModuleParameter) -> tuple[str, ...]:
    """Describe a parameter; simulators that tell model from instance take it at both."""
    kind = (
        f'type = "instance", units = "{parameter.unit}"' if parameter.unit else 'type = "instance"'
    )
    description = f"desc = {string_literal(_note(parameter))}"
    if len(kind) + len(description) <= _WIDTH - 4:
        return (f"(* {kind}, {description} *)",)
    return (f"(* {kind},", f"   {description} *)")


def _comments(parameter: ModuleParameter) -> tuple[str, ...]:
    note = _note(parameter)
    text = f"{note} ({parameter.unit})" if parameter.unit else note
    lines = textwrap.wrap(
        comment_text(text), _WIDTH, initial_indent="// ", subsequent_indent="//   "
    )
    return tuple(lines)


def _note(parameter: ModuleParameter) -> str:
    note = parameter.description
    if parameter.codes:
        note = f"{note}: {parameter.allowed}"
    return note if parameter.effective else f"{note} (not characterised: does nothing)"


def _range(parameter: ModuleParameter) -> str:
    if parameter.codes:
        codes = sorted(code for code, _ in parameter.codes)
        gaps = sorted(set(range(codes[0], codes[-1])) - set(codes))
        return f" from [{codes[0]}:{codes[-1]}]" + "".join(f" exclude {gap}" for gap in gaps)
    if parameter.low is None:
        return ""
    low = _literal(parameter, parameter.low)
    high = "inf)" if parameter.high is None else f"{_literal(parameter, parameter.high)}]"
    return f" from [{low}:{high}"


def _literal(parameter: ModuleParameter, value: float) -> str:
    return real_literal(value) if parameter.kind == "real" else f"{value:.0f}"
