"""What a decision depends on, as both Verilog-A modules write it: surfaces, overdrive, node law."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import pairwise

from behavgen.emit.literals import real_literal
from behavgen.emit.verilog_a_surfaces import wrapped
from behavgen.model import ComparatorModel, DelayEffect, Surface

__all__ = ["decision_surfaces", "law_facts", "law_variables", "overdrive_statement"]


def decision_surfaces(model: ComparatorModel) -> Iterator[tuple[str, Surface]]:
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


def overdrive_statement(model: ComparatorModel, variable: str) -> tuple[str, ...]:
    """Return lines that give a variable the input beyond the trip point, in V."""
    pins = model.cell.pins
    trip_point = "(offset_v + OFFSET_SHIFT_V)" if model.offset else "OFFSET_SHIFT_V"
    components = model.mismatch.components if model.mismatch else ()
    drawn = "".join(f" - mismatch_{k}_v * MISMATCH_Z{k}" for k in range(len(components)))
    return wrapped(f"{variable} = V({pins.inp}, {pins.inn}) - {trip_point}{drawn};")


def law_facts(delay: DelayEffect | None) -> dict[str, object]:
    """Return what the templates of the node law name; nodes are numbered from 1."""
    overdrives = delay.node_overdrive_v if delay else ()
    numbers = range(1, len(overdrives) + 1)
    return {
        "has_delay": delay is not None,
        "node_overdrives_v": tuple(map(real_literal, overdrives)),
        "segments": tuple(pairwise(numbers)),
        "triples": tuple(zip(numbers, numbers[1:], numbers[2:], strict=False)),
    }


def law_variables(delay: DelayEffect | None) -> list[str]:
    """Return the variables of a node law with more than one node; none for any other."""
    nodes = len(delay.nodes) if delay else 0
    if nodes < 2:
        return []
    slopes = [f"slope_{i}_s" for i in range(1, nodes + 1)]
    return ["log_v", *(["secant_s"] if nodes == 2 else []), *slopes, "delay_s"]
