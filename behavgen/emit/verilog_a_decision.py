"""What a decision depends on and what it costs, as both Verilog-A modules write it."""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable, Iterator
from itertools import pairwise

from behavgen.emit.literals import real_literal
from behavgen.emit.verilog_a_surfaces import wrapped
from behavgen.model import (
    ComparatorModel,
    DelayEffect,
    EnergyEffect,
    KickbackEffect,
    MemoryEffect,
    MismatchEffect,
    Surface,
)

__all__ = [
    "decision_surfaces",
    "energy_law",
    "energy_span",
    "law_facts",
    "law_variables",
    "memory_sum",
    "overdrive_statement",
]


def decision_surfaces(
    model: ComparatorModel, left_out: Collection[str] = ()
) -> Iterator[tuple[str, Surface]]:
    """Name the variables that a condition gives values to, in the order of a decision.

    Parameters
    ----------
    model : ComparatorModel
    left_out : collection of str
        Effects, by their field in the model, that the module has no equations for.
    """
    for effect, surfaces in _SURFACES.items():
        if getattr(model, effect) is not None and effect not in left_out:
            yield from surfaces(getattr(model, effect))


def _mismatch_surfaces(mismatch: MismatchEffect) -> Iterator[tuple[str, Surface]]:
    for k, component in enumerate(mismatch.components):
        yield f"mismatch_{k}_v", component


def _delay_surfaces(delay: DelayEffect) -> Iterator[tuple[str, Surface]]:
    yield "tau_s", delay.tau
    for number, node in enumerate(delay.nodes, start=1):
        yield f"delay_{number}_s", node


def _memory_surfaces(memory: MemoryEffect) -> Iterator[tuple[str, Surface]]:
    for number, term in enumerate(memory.terms, start=1):
        yield f"memory_{number}_v", term.shift
        yield f"memory_{number}_tau_s", term.tau
    if memory.floor is not None:
        yield "memory_floor_v", memory.floor


def _energy_surfaces(energy: EnergyEffect) -> Iterator[tuple[str, Surface]]:
    yield "energy_fixed_j", energy.fixed
    if energy.rise is not None:
        yield "energy_rise_w" if energy.law == "delay" else "energy_rise_j", energy.rise


def _kickback_surfaces(kickback: KickbackEffect) -> Iterator[tuple[str, Surface]]:
    yield "kickback_c", kickback.common
    yield "kickback_difference_0_c", kickback.differential
    if kickback.differential_per_v is not None:
        yield "kickback_difference_c_per_v", kickback.differential_per_v


_SURFACES: dict[str, Callable[..., Iterable[tuple[str, Surface]]]] = {
    "offset": lambda offset: [("offset_v", offset.surface)],
    "mismatch": _mismatch_surfaces,
    "noise": lambda noise: [("sigma_v", noise.surface)],
    "delay": _delay_surfaces,
    "reset": lambda reset: [("reset_s", reset.surface)],
    "memory": _memory_surfaces,
    "aperture": lambda aperture: [("aperture_s", aperture.centre)],
    "energy": _energy_surfaces,
    "kickback": _kickback_surfaces,
}


def memory_sum(memory: MemoryEffect, parts: Iterable[str], floor: str) -> tuple[str, ...]:
    """Return lines that give ``memory_v`` the sum of its terms.

    Parameters
    ----------
    memory : MemoryEffect
    parts : iterable of str
        What is left of each term, a share of its shift.
    floor : str
        The floor where there is one.
    """
    terms = [f"memory_{k}_v * {part}" for k, part in enumerate(parts, start=1)]
    return wrapped(
        f"memory_v = {' + '.join([*([floor] if memory.floor else []), *terms]) or '0.0'};"
    )


def energy_law(energy: EnergyEffect, *, time_s: str, overdrive_v: str) -> str:
    """Return the expression for the energy of a decision.

    Parameters
    ----------
    energy : EnergyEffect
    time_s : str
        For how long the cell decided.
    overdrive_v : str
        Its magnitude, inside `overdrive_v` of the effect.
    """
    rise = {
        "constant": "",
        "delay": f" + energy_rise_w * {time_s}",
        "overdrive": f" + energy_rise_j * ln(HIGH_V / {overdrive_v})",
    }[energy.law]
    return f"energy_fixed_j{rise}"


def energy_span(energy: EnergyEffect | None) -> tuple[str, ...]:
    """Return the smallest and the largest overdrive of an energy that varies with it, in V."""
    span = energy.overdrive_v if energy else None
    return tuple(map(real_literal, (span.low, span.high))) if span else ()


def overdrive_statement(
    model: ComparatorModel, variable: str, *, memory: str = ""
) -> tuple[str, ...]:
    """Return lines that give a variable the input beyond the trip point, in V.

    Parameters
    ----------
    model : ComparatorModel
    variable : str
    memory : str
        Added to it, with its sign; "" for none.
    """
    pins = model.cell.pins
    trip_point = "(offset_v + OFFSET_SHIFT_V)" if model.offset else "OFFSET_SHIFT_V"
    components = model.mismatch.components if model.mismatch else ()
    drawn = "".join(f" - mismatch_{k}_v * MISMATCH_Z{k}" for k in range(len(components)))
    return wrapped(f"{variable} = V({pins.inp}, {pins.inn}) - {trip_point}{drawn}{memory};")


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
