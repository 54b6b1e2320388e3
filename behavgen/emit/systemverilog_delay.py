"""Delays as SystemVerilog text: what follows the conditions, and what is left for a decision.

The nodes of a delay curve stay unfolded in the common mode: an emitted model
evaluates only those that an overdrive needs. Each segment has its own text, in
which the distances of the nodes are numbers.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from behavgen.emit.coordinates import coordinate_names
from behavgen.emit.literals import real_literal
from behavgen.emit.quantity_text import (
    QuantityText,
    SurfaceFolder,
    exponential,
    fastest,
    left_polynomial,
)
from behavgen.emit.surface_text import FoldedSurface
from behavgen.emit.systemverilog_conditions import wrapped
from behavgen.model import DelayEffect
from behavgen.units import format_si

__all__ = ["DelayCurveText", "SegmentText", "delay_curve", "delay_quantities"]

_UNDO_CURVE = ("segment_known = '0;",)


@dataclass(frozen=True, slots=True, kw_only=True)
class SegmentText:
    """What gives the cubic between two nodes, as text.

    Parameters
    ----------
    number : int
        That of the node at its end.
    span : str
        Its overdrives, for people.
    width : str
        Distance of its nodes in ln(overdrive), a literal.
    lines : tuple of str
        Assignments of the delay at its first node, of the chords and of the slopes.
    """

    number: int
    span: str
    width: str
    lines: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class DelayCurveText:
    """The delay curve's parameters in s as expressions, and its segments."""

    tau_s: str
    node_s: tuple[str, ...]
    segments: tuple[SegmentText, ...]


def delay_quantities(effect: DelayEffect, folder: SurfaceFolder) -> tuple[QuantityText, ...]:
    """Return what follows the conditions."""
    if len(effect.nodes) > 1:
        return _curve(effect, folder)
    return (_logarithmic_delay(effect, folder),)


def delay_curve(effect: DelayEffect, folder: SurfaceFolder) -> DelayCurveText:
    """Return tau and the delays at the nodes as functions of what is known at a decision."""
    names = coordinate_names(effect.tau, folder.processes, folder.coordinates)
    common = "".join(name for axis, name in names.items() if axis.condition == "vcm_v")
    tau_s, *node_s = (
        exponential("$exp", left_polynomial(folded.coefficients, common))
        for folded in _curve_folds(effect, folder)
    )
    return DelayCurveText(
        tau_s=tau_s,
        node_s=tuple(node_s),
        segments=tuple(
            _segment(k, effect.node_overdrive_v, tau_s, node_s) for k in range(1, len(node_s))
        ),
    )


def _segment(
    k: int, overdrive_v: Sequence[float], tau_s: str, node_s: Sequence[str]
) -> SegmentText:
    """Return the segment that ends at node `k`; see `formulas.node_law` for the slopes."""
    width = [math.log(high / low) for low, high in pairwise(overdrive_v)]
    before, here = (width[k - 2] if k > 1 else 0.0), width[k - 1]
    after = width[k] if k < len(width) else 0.0
    lines = [f"begin_s = {node_s[k - 1]};", f"end_s = {node_s[k]};"]
    lines.append(f"chord = (end_s - begin_s) / {real_literal(here)};")
    neighbours = {"before": "chord", "after": "chord"}
    if before:
        neighbours["before"] = f"(begin_s - {node_s[k - 2]}) / {real_literal(before)}"
    if after:
        neighbours["after"] = f"({node_s[k + 1]} - end_s) / {real_literal(after)}"
    lines += [f"chord_{side} = {value};" for side, value in neighbours.items()]
    if before:
        lines.append(f"slope_first = {_mean(here / (before + here), 'chord_before', 'chord')};")
    else:
        lines.append(f"slope_first = -{tau_s};")
    if after:
        lines.append(f"slope_last = {_mean(after / (after + here), 'chord', 'chord_after')};")
    elif before:
        beyond = real_literal(here / (before + here))
        lines.append(f"slope_last = chord + {beyond} * (chord - chord_before);")
    else:
        lines.append("slope_last = 2.0 * chord - slope_first;")
    span = f"{format_si(overdrive_v[k - 1], 'V')} to {format_si(overdrive_v[k], 'V')}"
    return SegmentText(number=k, span=span, width=real_literal(here), lines=wrapped(lines))


def _mean(share: float, first: str, second: str) -> str:
    """Return the mean of two chords, the first with a share."""
    return f"{real_literal(share)} * {first} + {real_literal(1.0 - share)} * {second}"


def _logarithmic_delay(effect: DelayEffect, folder: SurfaceFolder) -> QuantityText:
    tau = folder("tau", effect.tau, target="tau_ln")
    node = folder("node", effect.nodes[0], target="node_ln")
    return QuantityText(
        comment="Delay: ln of the time constant and of the delay at the node, both in s",
        folded=(tau, node),
        finish={
            fastest((tau, node)): (
                f"tau_s = {exponential('$exp', tau.value)};",
                f"node_s = {exponential('$exp', node.value)};",
            )
        },
    )


def _curve(effect: DelayEffect, folder: SurfaceFolder) -> tuple[QuantityText, ...]:
    """Return tau and the nodes, and what a change of theirs undoes."""
    tau, *nodes = _curve_folds(effect, folder)
    lazily = any(axis.condition == "vcm_v" for axis in effect.tau.axes)
    undone = "vcm_v" if lazily else fastest((tau, *nodes))
    found = [
        QuantityText(comment="Delay: ln of the regeneration time constant in s", folded=(tau,)),
        QuantityText(comment="Delay: ln of the delay at each node in s", folded=tuple(nodes)),
        QuantityText(
            comment="Delay: the curve is to be evaluated anew", finish={undone: _UNDO_CURVE}
        ),
    ]
    return tuple(found if undone in ("vdd_v", "vcm_v") else found[:-1])


def _curve_folds(effect: DelayEffect, folder: SurfaceFolder) -> tuple[FoldedSurface, ...]:
    surfaces = {"tau": effect.tau} | {f"node{k}": node for k, node in enumerate(effect.nodes)}
    return tuple(
        folder(name, surface, target=f"{name}_ln", lazy="vcm_v")
        for name, surface in surfaces.items()
    )
