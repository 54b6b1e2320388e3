"""ComparatorModel -> one self-contained SystemVerilog module with real-number ports."""

from __future__ import annotations

from collections.abc import Sequence

from behavgen.emit.coordinates import Coordinate, coordinates
from behavgen.emit.emitted_file import EmittedFile
from behavgen.emit.literals import real_literal, string_literal
from behavgen.emit.quantity_text import QuantityText, SurfaceFolder
from behavgen.emit.surface_text import CONDITIONS
from behavgen.emit.systemverilog_conditions import (
    declarations,
    follower,
    process_branches,
    process_values,
    warned_ranges,
)
from behavgen.emit.systemverilog_delay import delay_curve
from behavgen.emit.systemverilog_interface import head, parameter_lines, port_lines
from behavgen.emit.systemverilog_noise import noise_text
from behavgen.emit.systemverilog_quantities import (
    energy_text,
    memory_text,
    quantities,
    surfaces_of,
)
from behavgen.emit.taken_names import refuse_taken_names
from behavgen.emit.templating import render
from behavgen.formulas.polynomial import quantise
from behavgen.model import Cell, ComparatorModel, DelayEffect

__all__ = ["module_text", "systemverilog"]

_LEVELS = {"high": "1'b1", "low": "1'b0", "mid": "1'bx", "hold": ""}
_STEPS_PER_V = 2.0**20


def systemverilog(model: ComparatorModel) -> EmittedFile:
    """Return the module of a cell.

    Raises
    ------
    ProjectError
        When a pin has the name of something inside the module.
    """
    text = _text(model)
    refuse_taken_names(model, _text, language="SystemVerilog")
    return EmittedFile(path=f"{model.cell.name}.sv", text=text)


def _text(model: ComparatorModel) -> str:
    return module_text(model, header=head(model))


def module_text(model: ComparatorModel, *, header: Sequence[str]) -> str:
    """Return the module of a cell under lines of comment."""
    points = coordinates(surfaces_of(model), model.processes)
    folder = SurfaceFolder(processes=model.processes, coordinates=points)
    return render(
        "systemverilog/module.sv",
        cell=model.cell,
        head=header,
        parameters=parameter_lines(model),
        ports=port_lines(model.cell),
        **_cell_facts(model.cell),
        **_effect_facts(model, folder),
        **_delay_facts(model.delay, folder),
        **_condition_facts(model, points, quantities(model, folder)),
    )


def _cell_facts(cell: Cell) -> dict[str, object]:
    """Return pins, levels and what switches the cell off."""
    pins = cell.pins
    rising = cell.decides_on == "rising"
    outputs = [pin for pin in (pins.outp, pins.outn) if pin is not None]
    return {
        "pins": pins,
        "outputs": outputs,
        "resting": "1'b0" if rising else "1'b1",
        "deciding_step": "2'b01" if rising else "2'b10",
        "resetting_step": "2'b10" if rising else "2'b01",
        "holds": cell.in_reset == "hold",
        "reset_level": _LEVELS[cell.in_reset],
        "supply_off": None if cell.supply_off_v is None else real_literal(cell.supply_off_v),
        "is_on": _is_on(cell),
        "off_events": " or ".join(pin for pin in (pins.vdd, pins.enable) if pin is not None),
        "ticks_per_s": {"1fs": "1e15", "1ps": "1e12"}[cell.time_precision],
        "ns_per_tick": {"1fs": "1e-6", "1ps": "1e-3"}[cell.time_precision],
    }


def _is_on(cell: Cell) -> str:
    """Return the condition under which the cell works; "" when it cannot be off."""
    pins, parts = cell.pins, []
    if pins.vdd is not None and cell.supply_off_v is not None:
        parts.append(f"{pins.vdd} >= SUPPLY_OFF_V")
    elif pins.vdd is not None:
        parts.append(f"{pins.vdd} - {pins.vdd} == 0.0")
    if pins.enable is not None:
        parts.append(f"{pins.enable} === 1'b1")
    return " && ".join(parts)


def _effect_facts(model: ComparatorModel, folder: SurfaceFolder) -> dict[str, object]:
    """Return which effects there are."""
    pins = model.cell.pins
    components = () if model.mismatch is None else model.mismatch.components
    overdrive = f"({pins.inp} - {pins.inn}) - {'trip_v' if model.offset else 'OFFSET_SHIFT_V'}"
    for part, present in (("mismatch_v", components), ("memory_v", model.memory)):
        overdrive = f"({overdrive}) - {part}" if present else overdrive
    aperture = "aperture" in surfaces_of(model)
    return {
        "offset": model.offset is not None,
        "mismatch": bool(components),
        "mismatch_names": [f"mismatch{k}_z" for k in range(len(components))],
        "noise": None if model.noise is None else noise_text(model.noise, folder),
        "reset": "reset" in surfaces_of(model),
        "memory": None if model.memory is None else memory_text(model.memory),
        "aperture": aperture,
        "energy": None if model.energy is None else energy_text(model.energy),
        "energy_over_overdrive": model.energy is not None and model.energy.overdrive_v is not None,
        "overdrive": overdrive,
        "least_ticks": "aperture_ticks + 1.0" if aperture else "1.0",
    }


def _delay_facts(delay: DelayEffect | None, folder: SurfaceFolder) -> dict[str, object]:
    """Return the law: ``"curve"``, ``"logarithm"`` or "" and what it needs."""
    if delay is None:
        return {"delay": ""}
    nodes = [
        {"number": k, "next": k + 1, "volts": real_literal(v)}
        for k, v in enumerate(delay.node_overdrive_v)
    ]
    law = "curve" if len(nodes) > 1 else "logarithm"
    curve = delay_curve(delay, folder) if law == "curve" else None
    return {
        "delay": law, "nodes": nodes, "curve": curve, "floor_v": real_literal(delay.floor_v),
    }  # fmt: skip


def _condition_facts(
    model: ComparatorModel, points: Sequence[Coordinate], found: Sequence[QuantityText]
) -> dict[str, object]:
    """Return what happens when a condition changes."""
    warned = warned_ranges(model, points)
    if model.cell.pins.vdd is None:
        warned.pop("vdd_v", None)
    temperature, supply, common_mode = (
        follower(name, points, found, warned.get(name)) for name in CONDITIONS
    )
    values = process_values(points, warned.values(), found)
    fixed = supply.matters and model.cell.pins.vdd is None
    return {
        "constants": follower("", points, found, None).paragraphs,
        "temperature": temperature,
        "supply": supply,
        "common_mode": common_mode,
        "fixed_supply": _fixed_supply(model) if fixed else "",
        "declarations": declarations(points, values, found),
        "processes": process_branches(model.processes, values),
        "known_processes": string_literal(", ".join(f"{p.code} {p.name}" for p in model.processes)),
        "needs_exact_exp": model.noise is not None or model.memory is not None,
    }


def _fixed_supply(model: ComparatorModel) -> str:
    """Return the supply of a cell without a supply pin: the middle of its range."""
    span = model.box.vdd_v
    middle = 0.0 if span is None else span.middle
    return real_literal(float(quantise(middle, _STEPS_PER_V)))
