"""ComparatorModel -> the continuous Verilog-A file.

The latch is a differential equation in the logarithm of its imbalance. There
regeneration is a straight line of slope ``1/tau`` whatever the overdrive, so
that decades of it cost neither accuracy nor time steps, and a balanced input
rests at the unstable zero. Where the line starts carries the delay law.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise

from behavgen.emit.emitted_file import EmittedFile
from behavgen.emit.literals import comment_text, real_literal
from behavgen.emit.provenance import HeaderSection, header_lines, header_sections
from behavgen.emit.templating import render
from behavgen.emit.verilog_a_parameters import verilog_a_parameters
from behavgen.emit.verilog_a_surfaces import (
    Statements,
    declaration,
    surface_statements,
    wrapped,
)
from behavgen.model import Cell, ComparatorModel, Surface

__all__ = ["verilog_a"]

_FLOOR_WITHOUT_DELAY_V = 1e-15


@dataclass(frozen=True, slots=True, kw_only=True)
class _Port:
    name: str
    direction: str
    meaning: str


@dataclass(frozen=True, slots=True, kw_only=True)
class _Output:
    pin: str
    level: str


def verilog_a(model: ComparatorModel) -> EmittedFile:
    """Return ``<cell>.va``; the same model gives the same bytes."""
    cell = model.cell
    values = surface_statements(dict(_surfaces(model)), model.processes)
    numbers = range(1, len(model.delay.nodes) + 1) if model.delay else range(0)
    text = render(
        "verilog_a/continuous.va",
        cell=cell,
        pins=cell.pins,
        in_reset=cell.in_reset,
        description=comment_text(cell.description),
        header=header_lines(_header(model)),
        ports=tuple(_ports(cell)),
        parameters=verilog_a_parameters(model),
        declarations=tuple(_declarations(model, values)),
        supply=f"V({cell.pins.vdd}, {cell.pins.vss})" if cell.pins.vdd else "SUPPLY_V",
        clock=_clock(cell),
        on=" * ".join(_on(cell)),
        conditions=values.conditions,
        values=values.lines,
        has_delay=model.delay is not None,
        has_noise=model.noise is not None,
        has_reset=model.reset is not None,
        target=_target(model),
        floor_v=real_literal(model.delay.floor_v if model.delay else _FLOOR_WITHOUT_DELAY_V),
        node_overdrives_v=_node_overdrives(model),
        segments=tuple(pairwise(numbers)),
        triples=tuple(zip(numbers, numbers[1:], numbers[2:], strict=False)),
        outputs=tuple(_outputs(cell)),
    )
    return EmittedFile(path=f"{cell.name}.va", text=text)


def _surfaces(model: ComparatorModel) -> Iterator[tuple[str, Surface]]:
    """Name the variables that a condition gives values to, in the order of a decision."""
    if model.offset is not None:
        yield "offset_v", model.offset.surface
    if model.mismatch is not None:
        for k, component in enumerate(model.mismatch.components):
            yield f"mismatch_{k}_v", component
    if model.noise is not None:
        yield "sigma_v", model.noise.surface
    if model.delay is not None:
        yield "tau_s", model.delay.tau
        for number, node in enumerate(model.delay.nodes, start=1):
            yield f"delay_{number}_s", node
    if model.reset is not None:
        yield "reset_s", model.reset.surface


def _declarations(model: ComparatorModel, values: Statements) -> Iterator[str]:
    """Declare the variables, in the order in which they get their values."""
    on = ["is_on"] if any(_on(model.cell)) else []
    conditions = [name for name in ("temperature_k", "vcm_v") if name in values.conditions]
    yield from declaration(
        ["supply_v", "supply_scale_v", "clock_depth", *on, "deciding", "following", *conditions]
    )
    yield from declaration(values.coordinates)
    yield from declaration(values.variables)
    nominal = [name for name in ("tau_s", "reset_s") if name not in values.variables]
    yield from declaration([*nominal, "regeneration_s"])
    density = ["noise_density"] if model.noise else []
    yield from declaration(["target_v", "filter_s", *density, "magnitude_v"])
    yield from declaration([*_law_variables(model), "start_imbalance"])
    yield from declaration(["rise_rate", "fall_rate", "taking"])
    yield from declaration(["latch_state", "since_edge", "taken_state", "growth_rate"])
    yield from declaration(["is_one", "is_zero", "is_ending", *_shown_variables(model.cell)])
    yield from declaration(output.level for output in _outputs(model.cell))
    yield from declaration(["longest_s"])


def _law_variables(model: ComparatorModel) -> list[str]:
    nodes = len(model.delay.nodes) if model.delay else 0
    if nodes < 2:
        return []
    slopes = [f"slope_{i}_s" for i in range(1, nodes + 1)]
    return ["log_v", *(["secant_s"] if nodes == 2 else []), *slopes, "delay_s"]


def _shown_variables(cell: Cell) -> list[str]:
    return {"hold": ["held_square", "separation"], "mid": []}.get(cell.in_reset, ["is_unresolved"])


def _ports(cell: Cell) -> Iterator[_Port]:
    pins = cell.pins
    candidates = (
        (pins.inp, "input", "input, positive"),
        (pins.inn, "input", "input, negative"),
        (pins.clk, "input", f"clock, decides at its {cell.decides_on} edge"),
        (pins.enable, "input", "off unless above half the supply"),
        (pins.outp, "output", "decision"),
        (pins.outn, "output", "its complement"),
        (pins.vdd, "inout", "supply"),
        (pins.vss, "inout", "ground that all levels refer to"),
    )
    for name, direction, meaning in candidates:
        if name is not None:
            yield _Port(name=name, direction=direction, meaning=meaning)


def _clock(cell: Cell) -> str:
    level = f"V({cell.pins.clk}, {cell.pins.vss})"
    return (
        f"{level} - 0.5 * supply_v" if cell.decides_on == "rising" else f"0.5 * supply_v - {level}"
    )


def _on(cell: Cell) -> Iterator[str]:
    """Return the factors that are 1 while the cell works and 0 while it is off."""
    pins = cell.pins
    if pins.vdd is not None and cell.supply_off_v is not None:
        yield f"smooth_step(supply_v / {real_literal(cell.supply_off_v)} - 1.0, 0.01)"
    if pins.enable is not None:
        yield f"smooth_step(V({pins.enable}, {pins.vss}) / supply_scale_v - 0.5, 0.02)"


def _node_overdrives(model: ComparatorModel) -> tuple[str, ...]:
    return tuple(map(real_literal, model.delay.node_overdrive_v)) if model.delay else ()


def _target(model: ComparatorModel) -> tuple[str, ...]:
    pins = model.cell.pins
    trip_point = "(offset_v + OFFSET_SHIFT_V)" if model.offset else "OFFSET_SHIFT_V"
    components = model.mismatch.components if model.mismatch else ()
    drawn = "".join(f" - mismatch_{k}_v * MISMATCH_Z{k}" for k in range(len(components)))
    return wrapped(f"target_v = V({pins.inp}, {pins.inn}) - {trip_point}{drawn};")


def _outputs(cell: Cell) -> Iterator[_Output]:
    yield _Output(pin=cell.pins.outp, level="level_p")
    if cell.pins.outn is not None:
        yield _Output(pin=cell.pins.outn, level="level_n")


def _header(model: ComparatorModel) -> Iterator[HeaderSection]:
    for section in header_sections(model):
        if section.title == "Caution":
            unlike = tuple(_unlike(model))
            yield HeaderSection(title="Unlike the event-driven models", lines=unlike)
        yield section


def _unlike(model: ComparatorModel) -> Iterator[str]:
    follows = "tau/2" if model.noise else "tau/20"
    yield (
        f"the input passes a low-pass of {follows} and is held at the clock edge; conditions act "
        "at any time, on the overdrive in the first 0.3 tau of a decision, on tau until it is done"
    )
    if model.noise is not None:
        yield (
            "noise acts in noise analysis, where V(n_overdrive) integrates to sigma, and in "
            "transient analysis with noise; clock edges beyond 5 tau average some of it away"
        )
    if model.mismatch is not None:
        yield "mismatch enters as parameters MISMATCH_Z, independent standard normal numbers"
    yield (
        "outputs are voltages behind OUTPUT_OHM that follow the supply, half of it apart after "
        "the delay; inputs draw no current, and the supply gives none"
    )
    yield (
        "an unresolved output rests at half the supply from the end of the decision phase until "
        "the reset state returns; there is neither X nor coin"
    )
    yield (
        "a latch that was reset for less than twice the reset delay may stay as it was; start a "
        "simulation in reset, in the decision phase it begins balanced and does not resolve"
    )
    yield (
        "delays are no shorter than tau/4, and a hundredth with DELAY_ON = 0 or where none was "
        "characterised; a reset delay that was not characterised is tau/4"
    )
    if any(_on(model.cell)):
        yield "a cell switched on in a decision phase decides then"
