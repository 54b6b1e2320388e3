"""The quantities of a model as SystemVerilog text, in the order of a decision."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

from behavgen.emit.literals import real_literal
from behavgen.emit.quantity_text import (
    QuantityText,
    SurfaceFolder,
    exponential,
    fastest,
    last_folded,
)
from behavgen.emit.surface_text import FoldedSurface
from behavgen.emit.systemverilog_delay import delay_quantities
from behavgen.emit.systemverilog_noise import noise_quantity
from behavgen.formulas.memory import LONGEST_RESET_TAUS
from behavgen.model import ComparatorModel, EnergyEffect, MemoryEffect, Surface

__all__ = ["EnergyText", "MemoryText", "energy_text", "memory_text", "quantities", "surfaces_of"]


@dataclass(frozen=True, slots=True, kw_only=True)
class MemoryTermText:
    """Variables of a decaying part: shift in V, time constant in s, what is left, if known."""

    shift_v: str
    tau_s: str
    left_v: str
    known: str


@dataclass(frozen=True, slots=True, kw_only=True)
class MemoryText:
    """What a decision needs of the memory.

    Parameters
    ----------
    names : tuple of str
        Variables that follow the conditions.
    terms : tuple of MemoryTermText
    total : str
        The whole shift in V.
    cap_v, oldest : str
        Numbers.
    """

    names: tuple[str, ...]
    terms: tuple[MemoryTermText, ...]
    total: str
    cap_v: str
    oldest: str


class _MemoryPart(NamedTuple):
    """A surface of the memory: stem of its names, variable of its value, flag that it clears."""

    stem: str
    variable: str
    surface: Surface
    known: str


@dataclass(frozen=True, slots=True, kw_only=True)
class EnergyText:
    """What a decision needs of the energy.

    Parameters
    ----------
    variables : tuple of str
    shown, unresolved : str
        Energy in J of a decision that is shown and of one that is not; the former "" where
        the overdrive sets it.
    low_v, high_v : str
        Range of the overdrive on which it depends; "": on none.
    """

    variables: tuple[str, ...]
    shown: str
    unresolved: str
    low_v: str
    high_v: str


def surfaces_of(model: ComparatorModel) -> dict[str, Surface]:
    """Return the surfaces that the emitted text evaluates, by name, in the order of a decision.

    Where nothing is delayed, neither an aperture nor a reset delay has a meaning; where
    outputs are held in reset, the latter has none.
    """
    found: dict[str, Surface] = {}
    if model.offset is not None:
        found["offset"] = model.offset.surface
    if model.mismatch is not None:
        found |= {f"mismatch{k}": one for k, one in enumerate(model.mismatch.components)}
    if model.noise is not None:
        found["noise"] = model.noise.surface
    if model.memory is not None:
        found |= {part.stem: part.surface for part in _memory_parts(model.memory)}
    if model.aperture is not None and model.delay is not None:
        found["aperture"] = model.aperture.centre
    if model.delay is not None:
        found["delay"] = model.delay.tau
        found |= {f"node{k}": node for k, node in enumerate(model.delay.nodes)}
    if model.reset is not None and model.delay is not None and model.cell.in_reset != "hold":
        found["reset"] = model.reset.surface
    if model.energy is not None:
        found["energy_fixed"] = model.energy.fixed
        found |= {} if model.energy.rise is None else {"energy_rise": model.energy.rise}
    return found


def quantities(model: ComparatorModel, folder: SurfaceFolder) -> tuple[QuantityText, ...]:
    """Return all quantities of a model in the order of a decision."""
    surfaces = surfaces_of(model)
    found: list[QuantityText] = []
    if model.offset is not None:
        found.append(_offset(model.offset.surface, folder))
    if model.mismatch is not None:
        found.append(_mismatch(model.mismatch.components, folder))
    if model.memory is not None:
        found.append(_memory(model.memory, folder))
    if "aperture" in surfaces:
        found.append(_aperture(surfaces["aperture"], folder))
    if model.noise is not None:
        found.append(noise_quantity(model.noise, folder))
    if model.delay is not None:
        found.extend(delay_quantities(model.delay, folder))
    if "reset" in surfaces:
        found.append(_reset(surfaces["reset"], folder))
    if model.energy is not None:
        found.append(_energy(model.energy, folder))
    return tuple(found)


def _offset(surface: Surface, folder: SurfaceFolder) -> QuantityText:
    offset, offset_v, condition = last_folded(folder, "offset", surface, target="offset_v")
    return QuantityText(
        comment="Offset: the trip point in V",
        folded=(offset,),
        finish={condition: (f"trip_v = ({offset_v}) + OFFSET_SHIFT_V;",)},
    )


def _mismatch(components: tuple[Surface, ...], folder: SurfaceFolder) -> QuantityText:
    parts = tuple(
        folder(f"mismatch{k}", component, target=f"mismatch{k}_v")
        for k, component in enumerate(components)
    )
    total = " + ".join(f"{part.value} * mismatch{k}_z" for k, part in enumerate(parts))
    return QuantityText(
        comment="Mismatch: components in V per sigma, and this instance's offset from the nominal",
        folded=parts,
        finish={fastest(parts): (f"mismatch_v = {total};",)},
        only_if="mismatch_on != 0",
    )


def _memory(effect: MemoryEffect, folder: SurfaceFolder) -> QuantityText:
    """Return the exponentials; what is left after a reset belongs to its length."""
    folds: list[FoldedSurface] = []
    finish: dict[str, tuple[str, ...]] = {}
    for part in _memory_parts(effect):
        one, value, condition = last_folded(
            folder, part.stem, part.surface, target=f"{part.stem}_ln"
        )
        folds.append(one)
        lines = [f"{part.variable} = {exponential('exact_exp', value)};"]
        if condition in ("vdd_v", "vcm_v"):
            lines += [*([f"{part.known} = 1'b0;"] if part.known else []), "shift_ticks = -1.0;"]
        finish[condition] = tuple(dict.fromkeys([*finish.get(condition, ()), *lines]))
    return QuantityText(
        comment="Memory: ln of the shifts in V and of their time constants in s",
        folded=tuple(folds),
        finish=finish,
        only_if="MEMORY_ON != 0",
    )


def _aperture(surface: Surface, folder: SurfaceFolder) -> QuantityText:
    centre, centre_s, condition = last_folded(folder, "aperture", surface, target="aperture_s")
    ticks = f"$floor(({centre_s}) * TICKS_PER_S + 0.5)"
    return QuantityText(
        comment="Aperture: its centre in ticks after the decision edge, never before",
        folded=(centre,),
        finish={
            condition: (
                f"aperture_ticks = DELAY_ON != 0 ? {ticks} : 0.0;",
                "if (aperture_ticks < 0.0) aperture_ticks = 0.0;",
            )
        },
    )


def _reset(surface: Surface, folder: SurfaceFolder) -> QuantityText:
    reset, reset_ln, condition = last_folded(folder, "reset", surface, target="reset_ln")
    ticks = f"$floor({exponential('$exp', reset_ln)} * TICKS_PER_S + 0.5)"
    return QuantityText(
        comment="Reset: ln of its delay in s",
        folded=(reset,),
        finish={condition: (f"reset_ticks = DELAY_ON != 0 ? {ticks} : 0.0;",)},
    )


def _energy(effect: EnergyEffect, folder: SurfaceFolder) -> QuantityText:
    parts = {"energy_fixed_j": ("energy_fixed", effect.fixed)}
    if effect.rise is not None:
        parts["energy_rise"] = ("energy_rise", effect.rise)
    folds: list[FoldedSurface] = []
    finish: dict[str, tuple[str, ...]] = {}
    for variable, (name, surface) in parts.items():
        fold, value, condition = last_folded(folder, name, surface, target=f"{name}_ln")
        folds.append(fold)
        line = f"{variable} = {exponential('$exp', value)};"
        finish[condition] = (*finish.get(condition, ()), line)
    unit = "" if effect.rise is None else f", and of its rise in {effect.rise.unit}"
    return QuantityText(
        comment=f"Energy: ln of its fixed part in J{unit}",
        folded=tuple(folds),
        finish=finish,
    )


def memory_text(effect: MemoryEffect) -> MemoryText:
    """Return the names of a memory's quantities."""
    terms = tuple(
        MemoryTermText(
            shift_v=f"memory{k}_v",
            tau_s=f"recovery{k}_s",
            left_v=f"left{k}_v",
            known=f"left{k}_known",
        )
        for k in range(len(effect.terms))
    )
    parts = ["memory_floor_v"] if effect.floor is not None else []
    return MemoryText(
        names=tuple(part.variable for part in _memory_parts(effect)),
        terms=terms,
        total=" + ".join([*parts, *(term.left_v for term in terms)]) or "0.0",
        cap_v=real_literal(effect.cap_v),
        oldest=real_literal(LONGEST_RESET_TAUS),
    )


def _memory_parts(effect: MemoryEffect) -> tuple[_MemoryPart, ...]:
    parts: list[_MemoryPart] = []
    for k, term in enumerate(effect.terms):
        known = f"left{k}_known"
        parts += [
            _MemoryPart(f"memory{k}", f"memory{k}_v", term.shift, known),
            _MemoryPart(f"recovery{k}", f"recovery{k}_s", term.tau, known),
        ]
    if effect.floor is not None:
        parts.append(_MemoryPart("memory_floor", "memory_floor_v", effect.floor, ""))
    return tuple(parts)


def energy_text(effect: EnergyEffect) -> EnergyText:
    """Return the energy of a decision, shown or not, as expressions."""
    if effect.rise is None:
        return EnergyText(variables=("energy_fixed_j",), shown="energy_fixed_j",
                          unresolved="energy_fixed_j", low_v="", high_v="")  # fmt: skip
    variables = ("energy_fixed_j", "energy_rise")
    span = effect.overdrive_v
    if span is None:
        law = "energy_fixed_j + energy_rise * {}"
        return EnergyText(
            variables=variables,
            shown=law.format("(delay_ticks / TICKS_PER_S)"),
            unresolved=law.format("((reset_time - edge_time) / TICKS_PER_S)"),
            low_v="", high_v="",
        )  # fmt: skip
    return EnergyText(
        variables=variables,
        shown="",
        unresolved="energy_fixed_j + energy_rise * $ln(HIGH_V / LOW_V)",
        low_v=real_literal(span.low), high_v=real_literal(span.high),
    )  # fmt: skip
