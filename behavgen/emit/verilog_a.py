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
    overdrive_statement,
)
from behavgen.emit.verilog_a_parameters import continuous_parameters
from behavgen.emit.verilog_a_ports import outputs, ports, supply
from behavgen.emit.verilog_a_surfaces import Statements, declaration, surface_statements
from behavgen.model import Cell, ComparatorModel

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
    values = surface_statements(dict(decision_surfaces(model)), model.processes)
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
        **law_facts(model.delay),
    )


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
    yield from declaration([*law_variables(model.delay), "start_imbalance"])
    yield from declaration(["rise_rate", "fall_rate", "taking"])
    yield from declaration(["latch_state", "since_edge", "taken_state", "growth_rate"])
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
    return header_lines(header_sections(model, noise="Gaussian", differences=differences))


def _differences(model: ComparatorModel) -> Iterator[str]:
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
