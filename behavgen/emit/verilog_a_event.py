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
    law_facts,
    law_variables,
    overdrive_statement,
)
from behavgen.emit.verilog_a_parameters import event_parameters
from behavgen.emit.verilog_a_ports import outputs, ports, supply
from behavgen.emit.verilog_a_surfaces import Statements, declaration, surface_statements
from behavgen.model import Cell, ComparatorModel

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
    surfaces = dict(decision_surfaces(model))
    if model.delay is None:
        surfaces.pop("reset_s", None)  # without delays, resets have none either
    values = surface_statements(surfaces, model.processes)
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
        overdrive=overdrive_statement(model, "overdrive_v"),
        has_noise=model.noise is not None,
        has_reset="reset_s" in values.variables,
        floor_v=real_literal(model.delay.floor_v) if model.delay else "",
        reset_level=_RESET_LEVELS[cell.in_reset],
        **_clock_facts(cell),
        **law_facts(model.delay),
    )


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
    whole = ["random_state", "skipped", "decision_count", "awaited", "is_one", *flags, *on]
    yield f"integer {', '.join(whole)};"
    yield from declaration(["unused", "due_s", "ready_s"])
    yield from declaration(output.level for output in outputs(model.cell))
    known = {"temperature_k": "temperature_k", "vdd_v": "supply_v", "vcm_v": "vcm_v"}
    yield from declaration(name for key, name in known.items() if key in values.conditions)
    yield from declaration(values.coordinates)
    yield from declaration(values.variables)
    yield from declaration(["overdrive_v", *(["magnitude_v"] if model.delay else [])])
    law = law_variables(model.delay)
    yield from declaration([*law, *(["delay_s"] if "delay_s" not in law else [])])


def _header(model: ComparatorModel) -> tuple[str, ...]:
    differences = HeaderSection(
        title="Unlike the SystemVerilog model", lines=tuple(_differences(model))
    )
    return header_lines(header_sections(model, differences=differences))


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
    yield "inputs draw no current, and the supply gives none"
    yield "conditions outside their ranges are clamped without a message"
