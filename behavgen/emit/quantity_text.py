"""What SystemVerilog does with each quantity when a condition changes.

A `QuantityText` holds the folds of a quantity's surfaces and the statements
that finish it once the conditions it depends on are known. The nodes of a
delay curve stay unfolded in the common mode: an emitted model evaluates only
those that an overdrive needs.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

import numpy as np

from behavgen.emit.coordinates import Coordinate, coordinate_names
from behavgen.emit.literals import real_literal
from behavgen.emit.surface_text import CONDITIONS, FoldedSurface, fold, horner_text
from behavgen.formulas.exact_math import exact_exp
from behavgen.model import ComparatorModel, DelayEffect, Process, Surface

__all__ = [
    "DelayCurveText",
    "QuantityText",
    "SurfaceFolder",
    "delay_curve",
    "quantities",
    "surfaces_of",
]

_UNDO_CURVE = ("segment_known = '0;", "tail_known = 1'b0;")


@dataclass(frozen=True, slots=True, kw_only=True)
class QuantityText:
    """One quantity.

    Parameters
    ----------
    comment : str
        What it is, with its unit.
    folded : tuple of FoldedSurface
    finish : tuple of str
        Statements that follow the last of the folds.
    finished_by : str
        Condition that the last statements wait for; "" is the start.
    only_if : str
        Without it nothing of this is needed; "": always needed.
    """

    comment: str
    folded: tuple[FoldedSurface, ...]
    finish: tuple[str, ...]
    finished_by: str
    only_if: str = ""

    def lines(self, condition: str) -> tuple[str, ...]:
        """Return the statements that belong to a condition, or with "" to the start."""
        folds = [
            f"{assignment.target} = {assignment.value};"
            for folded in self.folded
            for assignment in folded.assignments.get(condition, ())
        ]
        lines = (*folds, *(self.finish if condition == self.finished_by else ()))
        if not lines or not self.only_if:
            return lines
        return (f"if ({self.only_if}) begin", *(f"  {line}" for line in lines), "end")


@dataclass(frozen=True, slots=True, kw_only=True)
class DelayCurveText:
    """The delay curve's parameters in s as expressions."""

    tau_s: str
    node_s: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class SurfaceFolder:
    """Folds surfaces of one model."""

    processes: tuple[Process, ...]
    coordinates: tuple[Coordinate, ...]

    def __call__(
        self, name: str, surface: Surface, *, target: str, lazy: str = ""
    ) -> FoldedSurface:
        """Fold a surface; see `surface_text.fold`."""
        names = coordinate_names(surface, self.processes, self.coordinates)
        return fold(name, surface, self.processes, names, target=target, lazy=lazy)


def surfaces_of(model: ComparatorModel) -> dict[str, Surface]:
    """Return the surfaces that the emitted text evaluates, by name, in the order of a decision.

    A reset delay has no meaning where nothing is delayed or where outputs are held in reset.
    """
    found: dict[str, Surface] = {}
    if model.offset is not None:
        found["offset"] = model.offset.surface
    if model.mismatch is not None:
        found |= {f"mismatch{k}": one for k, one in enumerate(model.mismatch.components)}
    if model.noise is not None:
        found["noise"] = model.noise.surface
    if model.delay is not None:
        found["delay"] = model.delay.tau
        found |= {f"node{k}": node for k, node in enumerate(model.delay.nodes)}
    if model.reset is not None and model.delay is not None and model.cell.in_reset != "hold":
        found["reset"] = model.reset.surface
    return found


def quantities(model: ComparatorModel, folder: SurfaceFolder) -> tuple[QuantityText, ...]:
    """Return all quantities of a model in the order of a decision."""
    surfaces = surfaces_of(model)
    found: list[QuantityText] = []
    if model.offset is not None:
        found.append(_offset(model.offset.surface, folder))
    if model.mismatch is not None:
        found.append(_mismatch(model.mismatch.components, folder))
    if model.noise is not None:
        found.append(_noise(model.noise.surface, folder))
    if model.delay is not None and len(model.delay.nodes) > 1:
        found.extend(_curve(model.delay, folder))
    elif model.delay is not None:
        found.append(_logarithmic_delay(model.delay, folder))
    if "reset" in surfaces:
        found.append(_reset(surfaces["reset"], folder))
    return tuple(found)


def _offset(surface: Surface, folder: SurfaceFolder) -> QuantityText:
    offset = folder("offset", surface, target="offset_v")
    return QuantityText(
        comment="Offset: the trip point in V",
        folded=(offset,),
        finish=(f"trip_v = {offset.value} + OFFSET_SHIFT_V;",),
        finished_by=offset.changes_with,
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
        finish=(f"mismatch_v = {total};",),
        finished_by=_fastest(parts),
        only_if="mismatch_on != 0",
    )


def _noise(surface: Surface, folder: SurfaceFolder) -> QuantityText:
    sigma = folder("noise", surface, target="noise_ln")
    if _is_literal(sigma.value):
        finish = (
            f"sigma_v = {_exponential('exact_exp', sigma.value)};",
            "noise_reach_v = noise_on != 0 ? CERTAIN_SIGMAS * sigma_v : 0.0;",
        )
    else:
        finish = (
            "noise_reach_v = noise_on != 0 ? 1.01 * CERTAIN_SIGMAS * $exp(noise_ln) : 0.0;",
            "sigma_known = 1'b0;",
        )
    return QuantityText(
        comment="Noise: ln of its sigma in V, and overdrives from which it need not be known",
        folded=(sigma,),
        finish=finish,
        finished_by=sigma.changes_with,
    )


def _logarithmic_delay(effect: DelayEffect, folder: SurfaceFolder) -> QuantityText:
    tau = folder("tau", effect.tau, target="tau_ln")
    node = folder("node", effect.nodes[0], target="node_ln")
    return QuantityText(
        comment="Delay: ln of the time constant and of the delay at the node, both in s",
        folded=(tau, node),
        finish=(
            f"tau_s = {_exponential('$exp', tau.value)};",
            f"node_s = {_exponential('$exp', node.value)};",
        ),
        finished_by=_fastest((tau, node)),
    )


def _reset(surface: Surface, folder: SurfaceFolder) -> QuantityText:
    reset = folder("reset", surface, target="reset_ln")
    reset_s = _exponential("$exp", reset.value)
    return QuantityText(
        comment="Reset: ln of its delay in s",
        folded=(reset,),
        finish=(f"reset_ticks = DELAY_ON != 0 ? {reset_s} * TICKS_PER_S : 0.0;",),
        finished_by=reset.changes_with,
    )


def _curve(effect: DelayEffect, folder: SurfaceFolder) -> tuple[QuantityText, ...]:
    """Return tau and the nodes, and what a change of theirs undoes."""
    tau, *nodes = _curve_folds(effect, folder)
    lazily = any(axis.condition == "vcm_v" for axis in effect.tau.axes)
    undone = "vcm_v" if lazily else _fastest((tau, *nodes))
    found = [
        QuantityText(
            comment="Delay: ln of the regeneration time constant in s",
            folded=(tau,), finish=(), finished_by="",
        ),
        QuantityText(
            comment="Delay: ln of the delay at each node in s",
            folded=tuple(nodes), finish=(), finished_by="",
        ),
        QuantityText(
            comment="Delay: the curve is to be evaluated anew",
            folded=(), finish=_UNDO_CURVE, finished_by=undone,
        ),
    ]  # fmt: skip
    return tuple(found if undone in ("vdd_v", "vcm_v") else found[:-1])


def delay_curve(effect: DelayEffect, folder: SurfaceFolder) -> DelayCurveText:
    """Return tau and the delays at the nodes as functions of what is known at a decision."""
    names = coordinate_names(effect.tau, folder.processes, folder.coordinates)
    common = "".join(name for axis, name in names.items() if axis.condition == "vcm_v")
    tau_s, *node_s = (
        _exponential("$exp", _left_polynomial(folded.coefficients, common))
        for folded in _curve_folds(effect, folder)
    )
    return DelayCurveText(tau_s=tau_s, node_s=tuple(node_s))


def _curve_folds(effect: DelayEffect, folder: SurfaceFolder) -> tuple[FoldedSurface, ...]:
    surfaces = {"tau": effect.tau} | {f"node{k}": node for k, node in enumerate(effect.nodes)}
    return tuple(
        folder(name, surface, target=f"{name}_ln", lazy="vcm_v")
        for name, surface in surfaces.items()
    )


def _left_polynomial(coefficients: Mapping[tuple[int, ...], str], coordinate: str) -> str:
    """Write what is left of a polynomial when all but the common mode is folded."""
    if () in coefficients:
        return coefficients[()]
    return horner_text({powers[0]: text for powers, text in coefficients.items()}, coordinate)


def _fastest(folded: Iterable[FoldedSurface]) -> str:
    order = ("", *CONDITIONS)
    return max((one.changes_with for one in folded), key=order.index, default="")


def _is_literal(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True


def _exponential(function: str, value: str) -> str:
    """Return the exponential of a variable, or of a literal as another literal."""
    if _is_literal(value):
        return real_literal(float(exact_exp(np.array(float(value)))))
    return f"{function}({value})"
