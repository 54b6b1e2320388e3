"""What the continuous Verilog-A module adds for memory, kickback and energy."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from behavgen.emit.literals import real_literal
from behavgen.emit.verilog_a_decision import energy_law, energy_span
from behavgen.emit.verilog_a_surfaces import wrapped
from behavgen.model import ComparatorModel, EnergyEffect, KickbackEffect, MemoryEffect
from behavgen.units import format_si

__all__ = ["MemoryState", "charge_facts", "charge_variables", "charge_words", "memory_states"]

_UNKNOWN_VDIFF_V = 1.0


@dataclass(frozen=True, slots=True, kw_only=True)
class MemoryState:
    """A node that holds 1 after a one and -1 after a zero.

    Parameters
    ----------
    node : str
    meaning : str
    tau : str
        Variable of the time constant with which it decays in reset; "" if it does not.
    """

    node: str
    meaning: str
    tau: str = ""


def memory_states(memory: MemoryEffect) -> Iterator[MemoryState]:
    """Yield one state a term, and one for what no reset time removes."""
    for k in range(1, len(memory.terms) + 1):
        yield MemoryState(
            node=f"n_memory_{k}", tau=f"memory_{k}_tau_s",
            meaning=f"1 after a one, -1 after a zero; decays in reset with memory_{k}_tau_s",
        )  # fmt: skip
    if memory.floor is not None:
        yield MemoryState(
            node="n_remembered", meaning="1 after a one, -1 after a zero, 0 after neither"
        )


def charge_facts(model: ComparatorModel) -> dict[str, object]:
    """Return what the templates name of the charges at the pins."""
    kickback, energy = model.kickback, _drawn(model)
    return {
        "has_charge": kickback is not None or energy is not None,
        "has_kickback": kickback is not None,
        "kickback_difference": _difference(model, kickback) if kickback else (),
        "has_supply_charge": energy is not None,
        "energy_span": energy_span(energy),
        "supply_power": _power(energy) if energy else (),
    }


def charge_variables(model: ComparatorModel) -> list[str]:
    """Return the variables that the charges need."""
    kickback = ["kickback_difference_c"] if model.kickback else []
    drawn = ["supply_w"] if _drawn(model) else []
    return [*(["pulse_phase", "pulse_rate"] if kickback or drawn else []), *kickback, *drawn]


def charge_words(model: ComparatorModel) -> Iterator[str]:
    """Say which currents flow at the pins."""
    pulse = (
        "between 0.3 and 0.9 tau after the input was taken, in phases that last so long and not "
        "with DELAY_ON = 0"
    )
    if model.kickback is not None:
        yield f"kickback flows {pulse}; but for it, inputs draw no current"
        if model.kickback.differential_per_v is not None:
            limit = format_si(_largest_vdiff_v(model), "V")
            yield f"for the kickback, differential inputs beyond {limit} count as that"
    else:
        yield "inputs draw no current"
    if _drawn(model) is None:
        yield "the supply gives none"
    elif model.energy is not None and model.energy.law == "delay":
        yield (
            f"the supply gives the charge energy/supply, its constant part {pulse}, the rest "
            "while undecided"
        )
    else:
        yield f"the supply gives the charge energy/supply {pulse}"


def _drawn(model: ComparatorModel) -> EnergyEffect | None:
    return model.energy if model.cell.pins.vdd is not None else None


def _difference(model: ComparatorModel, kickback: KickbackEffect) -> tuple[str, ...]:
    if kickback.differential_per_v is None:
        return ("kickback_difference_c = kickback_difference_0_c;",)
    pins = model.cell.pins
    limit = real_literal(_largest_vdiff_v(model))
    vdiff = f"clamp(V({pins.inp}, {pins.inn}), -{limit}, {limit})"
    sloping = f"kickback_difference_c_per_v * {vdiff}"
    return wrapped(f"kickback_difference_c = kickback_difference_0_c + {sloping};")


def _largest_vdiff_v(model: ComparatorModel) -> float:
    """Return the largest tabulated differential input: beyond, kickback is not extrapolated."""
    points = [point for point in model.points if point.quantity == "kickback_differential"]
    tabulated = [abs(vdiff) for point in points for vdiff in point.x]
    span = model.box.overdrive_v
    return max(tabulated, default=span.high if span else _UNKNOWN_VDIFF_V)


def _power(energy: EnergyEffect) -> tuple[str, ...]:
    """Return lines that give ``supply_w`` a value whose integral is the energy.

    What grows with the delay flows while the cell decides, all else in the pulse.
    """
    if energy.law == "delay":
        rise = "DELAY_ON * energy_rise_w * deciding * (1.0 - is_one - is_zero)"
        return wrapped(f"supply_w = energy_fixed_j * pulse_rate + {rise};")
    magnitude = "clamp(abs(overdrive_v), LOW_V, HIGH_V)"
    pulsed = energy_law(energy, time_s="", overdrive_v=magnitude)
    return wrapped(f"supply_w = ({pulsed}) * pulse_rate;")
