"""ComparatorModel -> the event-driven Verilog-A file.

The clock's crossings of half the supply decide and reset, one timer brings what
follows them, and ``transition`` filters drive the outputs. Everything is
Verilog-A as its standard has it (Verilog-AMS LRM 2.4: cross and timer 5.10.3,
transition 4.5.8, $rdist_normal 9.13.2), without arrays and attributes, which not
every simulator takes.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from behavgen.emit.emitted_file import EmittedFile
from behavgen.emit.literals import comment_text, real_literal
from behavgen.emit.provenance import HeaderSection, header_lines, header_sections
from behavgen.emit.taken_names import refuse_taken_names
from behavgen.emit.templating import render
from behavgen.emit.verilog_a_decision import (
    decision_surfaces,
    energy_law,
    energy_span,
    law_facts,
    law_variables,
    memory_sum,
    overdrive_statement,
)
from behavgen.emit.verilog_a_parameters import event_parameters
from behavgen.emit.verilog_a_ports import outputs, ports, supply
from behavgen.emit.verilog_a_surfaces import Statements, declaration, surface_statements, wrapped
from behavgen.model import Cell, ComparatorModel, EnergyEffect, MemoryEffect

__all__ = ["verilog_a_event"]

_RESET_LEVELS = {"high": "1.0", "low": "0.0", "mid": "0.5", "hold": ""}


@dataclass(frozen=True, slots=True, kw_only=True)
class _Switch:
    """Something that switches the cell off while an expression is negative."""

    flag: str
    excess: str


def verilog_a_event(model: ComparatorModel) -> EmittedFile:
    """Return ``<cell>_event.va``; the same model gives the same bytes.

    Its module is ``<cell>_event``, so that it shares a library with the continuous one.

    Raises
    ------
    ProjectError
        When a pin has the name of something inside the module.
    """
    refuse_taken_names(model, _text, language="Verilog-A")
    return EmittedFile(path=f"{model.cell.name}_event.va", text=_text(model))


def _text(model: ComparatorModel) -> str:
    cell = model.cell
    left_out = tuple(_left_out(model))
    values = surface_statements(dict(decision_surfaces(model, left_out)), model.processes)
    switches = tuple(_switches(cell))
    return render(
        "verilog_a/event.va",
        cell=cell,
        pins=cell.pins,
        description=comment_text(cell.description),
        header=_header(model),
        ports=tuple(ports(cell)),
        outputs=tuple(outputs(cell)),
        parameters=event_parameters(model),
        declarations=tuple(_declarations(model, values, switches)),
        supply=supply(cell),
        switches=switches,
        on=" * ".join(switch.flag for switch in switches),
        conditions=values.conditions,
        values=values.lines,
        overdrive=overdrive_statement(
            model, "overdrive_v", memory=" + memory_v" if model.memory else ""
        ),
        has_noise=model.noise is not None,
        has_reset="reset_s" in values.variables,
        floor_v=real_literal(model.delay.floor_v) if model.delay else "",
        reset_level=_RESET_LEVELS[cell.in_reset],
        has_aperture="aperture_s" in values.variables,
        needs_edge_time=_needs_edge_time(model),
        **_memory_facts(model.memory),
        **_energy_facts(model.energy),
        **_clock_facts(cell),
        **law_facts(model.delay),
    )


def _needs_edge_time(model: ComparatorModel) -> bool:
    """Tell whether anything counts from the decision edge that happens at another event."""
    by_time = model.energy is not None and model.energy.law == "delay"
    return by_time or (model.aperture is not None and model.delay is not None)


def _memory_facts(memory: MemoryEffect | None) -> dict[str, object]:
    if memory is None:
        return {"has_memory": False}
    numbers = range(1, len(memory.terms) + 1)
    decayed = [f"exp(-memory_age_s / memory_{k}_tau_s)" for k in numbers]
    return {
        "has_memory": True,
        "memory": memory_sum(memory, decayed, "memory_floor_v"),
        "memory_cap_v": real_literal(memory.cap_v),
    }


def _energy_facts(energy: EnergyEffect | None) -> dict[str, object]:
    """Return lines that add the energy of a decision to the running total."""
    if energy is None:
        return {"energy_span": (), "energy_resolved": (), "energy_unresolved": ()}
    magnitude = "clamp(abs(overdrive_v), LOW_V, HIGH_V)"
    resolved = energy_law(energy, time_s="delay_s", overdrive_v=magnitude)
    unresolved = energy_law(energy, time_s="($abstime - edge_s)", overdrive_v="LOW_V")
    return {
        "energy_span": energy_span(energy),
        "energy_resolved": wrapped(f"energy_j = energy_j + {resolved};"),
        "energy_unresolved": wrapped(f"energy_j = energy_j + {unresolved};"),
    }


def _clock_facts(cell: Cell) -> dict[str, object]:
    """Return the clock beyond half the supply and the directions in which it crosses that."""
    rising = cell.decides_on == "rising"
    clock = f"V({cell.pins.clk}, {cell.pins.vss}) - 0.5 * {supply(cell)}"
    return {
        "clock": clock,
        "deciding": "+1" if rising else "-1",
        "resetting": "-1" if rising else "+1",
        "is_resting": f"{clock} {'<=' if rising else '>='} 0.0",
    }


def _switches(cell: Cell) -> Iterator[_Switch]:
    pins = cell.pins
    if pins.vdd is not None and cell.supply_off_v is not None:
        yield _Switch(
            flag="is_supplied", excess=f"{supply(cell)} - {real_literal(cell.supply_off_v)}"
        )
    if pins.enable is not None:
        excess = f"V({pins.enable}, {pins.vss}) - 0.5 * {supply(cell)}"
        yield _Switch(flag="is_enabled", excess=excess)


def _declarations(
    model: ComparatorModel, values: Statements, switches: tuple[_Switch, ...]
) -> Iterator[str]:
    flags = [switch.flag for switch in switches]
    on = ["is_on"] if switches else []
    sampling = ["is_sampling"] if "aperture_s" in values.variables else []
    remembered = ["remembered"] if model.memory else []
    whole = ["random_state", "skipped", "decision_count", *sampling, "awaited", "is_one"]
    yield from wrapped(f"integer {', '.join([*whole, *remembered, *flags, *on])};")
    edge = ["edge_s"] if _needs_edge_time(model) else []
    sample = ["sample_s"] if sampling else []
    reset_edge = ["reset_edge_s"] if model.memory else []
    yield from declaration(["unused", *edge, *sample, "due_s", "ready_s", *reset_edge])
    if model.energy is not None:
        yield "real energy_j;  // running total of all decisions and the resets after them, J"
    yield from declaration(output.level for output in outputs(model.cell))
    known = {"temperature_k": "temperature_k", "vdd_v": "supply_v", "vcm_v": "vcm_v"}
    yield from declaration(name for key, name in known.items() if key in values.conditions)
    yield from declaration(values.coordinates)
    yield from declaration(values.variables)
    memory = ["memory_age_s", "memory_v"] if model.memory else []
    yield from declaration([*memory, "overdrive_v", *(["magnitude_v"] if model.delay else [])])
    law = law_variables(model.delay)
    yield from declaration([*law, *(["delay_s"] if "delay_s" not in law else [])])


def _header(model: ComparatorModel) -> tuple[str, ...]:
    differences = HeaderSection(
        title="Unlike the SystemVerilog model", lines=tuple(_differences(model))
    )
    return header_lines(
        header_sections(model, differences=differences, left_out=tuple(_left_out(model)))
    )


def _left_out(model: ComparatorModel) -> Iterator[str]:
    """Name the effects that the module has no equations for."""
    yield "kickback"
    if model.delay is None:  # then nothing takes time
        yield from ("reset", "aperture")


def _differences(model: ComparatorModel) -> Iterator[str]:
    yield (
        "random numbers are the simulator's own: equal in distribution only, and equal between "
        "instances of equal SEED"
    )
    if model.mismatch is not None:
        yield "mismatch enters as parameters MISMATCH_Z, independent standard normal numbers"
    yield (
        "outputs are ideal voltages that follow the supply; delays end in the middle of their "
        "straight edges, so none is shorter than half of EDGE_S"
    )
    yield (
        "half the supply stands for X; an unresolved output shows it from the end of the decision "
        "phase until the reset state returns, for EDGE_S at least"
    )
    yield from _differences_of_effects(model)
    yield "conditions outside their ranges are clamped without a message"


def _differences_of_effects(model: ComparatorModel) -> Iterator[str]:
    if model.aperture is not None and model.delay is not None:
        yield "the input is sampled no earlier than STEP_S after the edge"
    if model.energy is not None:
        yield "the running total of the energy is the variable energy_j, in J"
    charges = " and ".join(
        words
        for words, effect in (("kickback", model.kickback), ("supply charge", model.energy))
        if effect is not None
    )
    yield "inputs draw no current, and the supply gives none" + (
        f": {charges} flow in the continuous model only" if charges else ""
    )
