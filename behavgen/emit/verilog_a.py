"""ComparatorModel -> the continuous Verilog-A file.

The latch is a differential equation in the logarithm of its imbalance. There
regeneration is a straight line of slope ``1/tau`` whatever the overdrive, so
that decades of it cost neither accuracy nor time steps, and a balanced input
rests at the unstable zero. Where the line starts carries the delay law.
"""

from __future__ import annotations

from collections.abc import Iterator

from behavgen.emit.emitted_file import EmittedFile
from behavgen.emit.literals import comment_text, real_literal
from behavgen.emit.provenance import HeaderSection, header_lines, header_sections
from behavgen.emit.taken_names import refuse_taken_names
from behavgen.emit.templating import render
from behavgen.emit.verilog_a_decision import (
    decision_surfaces,
    law_facts,
    law_variables,
    memory_sum,
    overdrive_statement,
)
from behavgen.emit.verilog_a_parameters import continuous_parameters
from behavgen.emit.verilog_a_ports import outputs, ports, supply
from behavgen.emit.verilog_a_states import (
    charge_facts,
    charge_variables,
    charge_words,
    memory_states,
)
from behavgen.emit.verilog_a_surfaces import Statements, declaration, surface_statements
from behavgen.model import Cell, ComparatorModel, MemoryEffect

__all__ = ["verilog_a"]

_FLOOR_WITHOUT_DELAY_V = 1e-15


def verilog_a(model: ComparatorModel) -> EmittedFile:
    """Return ``<cell>.va``; the same model gives the same bytes.

    Raises
    ------
    ProjectError
        When a pin has the name of something inside the module.
    """
    refuse_taken_names(model, _text, language="Verilog-A")
    return EmittedFile(path=f"{model.cell.name}.va", text=_text(model))


def _text(model: ComparatorModel) -> str:
    cell = model.cell
    left_out = tuple(_left_out(model))
    values = surface_statements(dict(decision_surfaces(model, left_out)), model.processes)
    return render(
        "verilog_a/continuous.va",
        cell=cell,
        pins=cell.pins,
        in_reset=cell.in_reset,
        description=comment_text(cell.description),
        header=_header(model),
        ports=tuple(ports(cell)),
        parameters=continuous_parameters(model),
        declarations=tuple(_declarations(model, values)),
        supply=supply(cell),
        clock=_clock(cell),
        on=" * ".join(_on(cell)),
        conditions=values.conditions,
        values=values.lines,
        has_noise=model.noise is not None,
        has_reset=model.reset is not None,
        target=overdrive_statement(model, "target_v"),
        floor_v=real_literal(model.delay.floor_v if model.delay else _FLOOR_WITHOUT_DELAY_V),
        outputs=tuple(outputs(cell)),
        has_aperture="aperture_s" in values.variables,
        **_memory_facts(model.memory),
        **charge_facts(model),
        **law_facts(model.delay),
    )


def _left_out(model: ComparatorModel) -> Iterator[str]:
    """Name the effects that the module has no equations for."""
    if model.delay is None:
        yield "aperture"
    if model.cell.pins.vdd is None:
        yield "energy"


def _memory_facts(memory: MemoryEffect | None) -> dict[str, object]:
    if memory is None:
        return {"has_memory": False, "memory_states": ()}
    states = tuple(memory_states(memory))
    shares = [f"V({state.node})" for state in states if state.tau]
    return {
        "has_memory": True,
        "memory_states": states,
        "memory": memory_sum(memory, shares, "memory_floor_v * V(n_remembered)"),
        "memory_cap_v": real_literal(memory.cap_v),
    }


def _declarations(model: ComparatorModel, values: Statements) -> Iterator[str]:
    """Declare the variables, in the order in which they get their values."""
    on = ["is_on"] if any(_on(model.cell)) else []
    conditions = [name for name in ("temperature_k", "vcm_v") if name in values.conditions]
    yield from declaration(
        ["supply_v", "supply_scale_v", "clock_depth", *on, "deciding", "beyond_edge", "resting"]
    )
    yield from declaration(["settled", *conditions])
    yield from declaration(values.coordinates)
    yield from declaration(values.variables)
    nominal = [name for name in ("tau_s", "reset_s") if name not in values.variables]
    yield from declaration([*nominal, "regeneration_s"])
    density = ["noise_density"] if model.noise else []
    common = ["common_v"] if "vcm_v" in values.conditions else []
    hold = ["hold_phase"] if "aperture_s" in values.variables else []
    memory = ["memory_v"] if model.memory else []
    yield from declaration(
        ["filter_s", *common, "target_v", *hold, "following", *density, *memory, "overdrive_v"]
    )
    yield from declaration(["magnitude_v", *law_variables(model.delay), "start_imbalance"])
    yield from declaration(["last_phase", "phase_rate", "return_rate"])
    yield from declaration(["latch_state", "since_edge", "taken_phase", "taking", "taken_state"])
    storing = ["decided", "storing_rate"] if model.memory else []
    yield from declaration(["growth_rate", *storing, *charge_variables(model)])
    yield from declaration(["is_one", "is_zero", "is_ending", *_shown_variables(model.cell)])
    yield from declaration(output.level for output in outputs(model.cell))
    yield from declaration(["longest_s"])


def _shown_variables(cell: Cell) -> list[str]:
    return {"hold": ["held_square", "separation"], "mid": []}.get(cell.in_reset, ["is_unresolved"])


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


def _header(model: ComparatorModel) -> tuple[str, ...]:
    differences = HeaderSection(
        title="Unlike the event-driven models", lines=tuple(_differences(model))
    )
    left_out = tuple(_left_out(model))
    return header_lines(
        header_sections(model, noise="Gaussian", differences=differences, left_out=left_out)
    )


def _differences(model: ComparatorModel) -> Iterator[str]:
    follows = "tau/2" if model.noise else "tau/20"
    aperture = model.aperture is not None and model.delay is not None
    held = (
        "and is held when its mean weight lies at the aperture's centre"
        if aperture
        else ("and is held at the clock edge")
    )
    yield (
        f"the input passes a low-pass of {follows} {held}, the common mode at the clock edge; "
        "other conditions act at any time, on the overdrive until 0.3 tau after that, on tau until "
        "the decision is done"
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
        "the delay"
    )
    yield from charge_words(model)
    if model.memory is not None:
        yield (
            "memory is a state for each of its time constants: any sum of terms is carried, at "
            "the conditions of the reset; decisions less than tau/4 before the end of their phase "
            "are half remembered"
        )
    yield (
        "an unresolved output rests at half the supply from the end of the decision phase until "
        "the reset state returns; there is neither X nor coin"
    )
    yield (
        "a decision edge before the reset state has returned shows it at once; a latch that was "
        "reset for less than tau/2 may stay as it was"
    )
    yield (
        "start a simulation in reset: in the decision phase it begins balanced and does not resolve"
    )
    yield (
        "delays are no shorter than tau/4, and a hundredth with DELAY_ON = 0 or where none was "
        "characterised; a reset delay that was not characterised is tau/4"
    )
    if any(_on(model.cell)):
        yield "a cell switched on in a decision phase decides then"
