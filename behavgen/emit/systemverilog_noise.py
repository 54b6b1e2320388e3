"""Noise as SystemVerilog text: known when a small overdrive asks for it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from behavgen.emit.literals import real_literal
from behavgen.emit.quantity_text import (
    QuantityText,
    SurfaceFolder,
    exponential,
    is_literal,
    last_folded,
)
from behavgen.formulas.polynomial import axis_coordinate
from behavgen.model import NoiseEffect, Surface

__all__ = ["NoiseText", "noise_quantity", "noise_text"]

_CERTAIN_SIGMAS = 8.3
_MARGIN = 1.01


@dataclass(frozen=True, slots=True, kw_only=True)
class NoiseText:
    """What a decision needs of the noise.

    Parameters
    ----------
    sigma_v : str
        An expression, or "" where sigma is known from the start.
    widest_v : str
        No overdrive from here on needs a draw, under any conditions; a literal.
    """

    sigma_v: str
    widest_v: str


def noise_text(effect: NoiseEffect, folder: SurfaceFolder) -> NoiseText:
    """Return what a decision needs of the noise."""
    _, sigma_ln, _ = last_folded(folder, "noise", effect.surface, target="noise_ln")
    widest_v = _MARGIN * _CERTAIN_SIGMAS * float(np.exp(_bound(effect.surface)))
    return NoiseText(
        sigma_v="" if is_literal(sigma_ln) else exponential("exact_exp", sigma_ln),
        widest_v=real_literal(float(f"{widest_v:.4g}")),
    )


def noise_quantity(effect: NoiseEffect, folder: SurfaceFolder) -> QuantityText:
    """Return what follows the conditions."""
    folded, sigma_ln, condition = last_folded(folder, "noise", effect.surface, target="noise_ln")
    finish: tuple[str, ...] = ("sigma_known = 1'b0;",)
    if is_literal(sigma_ln):
        finish = (
            f"sigma_v = {exponential('exact_exp', sigma_ln)};",
            "noise_reach_v = noise_on != 0 ? CERTAIN_SIGMAS * sigma_v : 0.0;",
        )
    return QuantityText(
        comment="Noise: ln of its sigma in V, found when a small overdrive needs it",
        folded=(folded,),
        finish={condition: finish},
    )


def _bound(surface: Surface) -> float:
    """Return a number that the polynomial exceeds nowhere: the sum of its terms' largest values."""
    bounds = []
    for variant in surface.variants:
        largest = []
        for axis in surface.axes:
            span = getattr(variant.box, axis.condition)
            ends = np.array([span.low, span.high])
            x = axis_coordinate(ends, axis.shape, axis.centre, axis.half_range)
            largest.append(float(np.abs(x).max()))
        bound = 0.0
        for powers, value in zip(surface.exponents, variant.coefficients, strict=True):
            size = float(np.prod([x**p for x, p in zip(largest, powers, strict=True)]))
            bound += abs(value) * size if any(powers) else value
        bounds.append(bound)
    return max(bounds)
