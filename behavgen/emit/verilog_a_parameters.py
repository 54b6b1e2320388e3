"""Parameters of the emitted Verilog-A module.

Those that every language has keep their names. There is no run-wide random
sequence: an instance's mismatch is given in sigmas, one number a component.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from behavgen.emit.literals import real_literal, string_literal
from behavgen.emit.module_parameters import ModuleParameter, module_parameters
from behavgen.model import ComparatorModel

__all__ = ["ParameterText", "verilog_a_parameters"]

_SHARED = (
    "OFFSET_SHIFT_V", "NOISE_ON", "MEMORY_ON", "DELAY_ON", "TEMPERATURE_C", "PROCESS",
)  # fmt: skip
_DESCRIPTIONS = {
    "DELAY_ON": "delays; a hundredth of them when off",
    "TEMPERATURE_C": "cell temperature; unless given, the circuit's",
}
"""Where the meaning differs from that in event-driven languages."""

_WIDTH = 88
_LARGEST_Z = 10.0
_UNKNOWN_SUPPLY_V = 1.0


@dataclass(frozen=True, slots=True, kw_only=True)
class ParameterText:
    """A parameter as it is written: lines of attributes, then its declaration."""

    attributes: tuple[str, ...]
    declaration: str


def verilog_a_parameters(model: ComparatorModel) -> tuple[ParameterText, ...]:
    """Return all parameters in the order in which the module declares them."""
    return tuple(map(_text, (*_shared(model), *_mismatch(model), *_electrical(model))))


def _shared(model: ComparatorModel) -> Iterator[ModuleParameter]:
    for parameter in module_parameters(model):
        if parameter.name in _SHARED:
            description = _DESCRIPTIONS.get(parameter.name, parameter.description)
            yield replace(parameter, description=description)


def _mismatch(model: ComparatorModel) -> Iterator[ModuleParameter]:
    components = model.mismatch.components if model.mismatch else ()
    for k in range(len(components)):
        yield ModuleParameter(
            name=f"MISMATCH_Z{k}", kind="real", default=0.0, low=-_LARGEST_Z, high=_LARGEST_Z,
            description=f"mismatch component {k} of this instance, in sigmas",
        )  # fmt: skip


def _electrical(model: ComparatorModel) -> Iterator[ModuleParameter]:
    if model.cell.pins.vdd is None:
        span = model.box.vdd_v
        yield ModuleParameter(
            name="SUPPLY_V", kind="real", unit="V", low=0.0, description="supply",
            default=round(span.middle, 9) if span else _UNKNOWN_SUPPLY_V,
        )  # fmt: skip
    yield ModuleParameter(
        name="OUTPUT_OHM", kind="real", default=100.0, unit="ohm", low=1e-3,
        description="resistance of each output",
    )  # fmt: skip


def _text(parameter: ModuleParameter) -> ParameterText:
    kind = "real" if parameter.kind == "real" else "integer"
    default = real_literal(parameter.default) if kind == "real" else f"{parameter.default:d}"
    return ParameterText(
        attributes=_attributes(parameter),
        declaration=f"parameter {kind} {parameter.name} = {default}{_range(parameter)};",
    )


def _attributes(parameter: ModuleParameter) -> tuple[str, ...]:
    """Describe a parameter; simulators that tell model from instance take it at both."""
    note = parameter.description
    if parameter.codes:
        note = f"{note}: {parameter.allowed}"
    if not parameter.effective:
        note = f"{note} (not characterised: does nothing)"
    kind = (
        f'type = "instance", units = "{parameter.unit}"' if parameter.unit else 'type = "instance"'
    )
    description = f"desc = {string_literal(note)}"
    if len(kind) + len(description) <= _WIDTH:
        return (f"(* {kind}, {description} *)",)
    return (f"(* {kind},", f"   {description} *)")


def _range(parameter: ModuleParameter) -> str:
    if parameter.codes:
        codes = sorted(code for code, _ in parameter.codes)
        gaps = sorted(set(range(codes[0], codes[-1])) - set(codes))
        return f" from [{codes[0]}:{codes[-1]}]" + "".join(f" exclude {gap}" for gap in gaps)
    if parameter.low is None:
        return ""
    high = "inf)" if parameter.high is None else f"{real_literal(parameter.high)}]"
    return f" from [{real_literal(parameter.low)}:{high}"
