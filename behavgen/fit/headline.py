"""The numbers people ask for first, with intervals."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import CONDITION_NAMES
from behavgen.fit.intervals import normal_quantile, student_quantile
from behavgen.fit.mismatch import MismatchFit
from behavgen.fit.noise import NoiseFit
from behavgen.fit.surface_forms import Form, design
from behavgen.fit.wording import condition_words
from behavgen.formulas.node_law import node_law_basis
from behavgen.model import (
    Box,
    ComparatorModel,
    Condition,
    DelayEffect,
    EnergyEffect,
    Estimate,
    KickbackEffect,
    MemoryEffect,
    Parameter,
    Surface,
    significant,
)

__all__ = ["headline_parameters"]

Floats = npt.NDArray[np.float64]

_LEVEL = 0.95
_SHOWN_OVERDRIVES_V = (1e-5, 1e-3, 3e-2)


def headline_parameters(
    model: ComparatorModel, noise: NoiseFit | None, mismatch: MismatchFit | None
) -> tuple[Parameter, ...]:
    """Return the main numbers at the middle of each quantity's own range, default process."""
    found = []
    if model.offset is not None:
        found.append(_of_surface("offset_v", "nominal trip point", model.offset.surface,
                                 f"from {model.offset.source}"))  # fmt: skip
    if mismatch is not None and mismatch.statistics is not None:
        found.append(_mismatch(mismatch))
    if model.noise is not None and noise is not None:
        what, source = "input-referred noise of one decision", "surface through the noise table"
        found.append(_of_surface("noise_sigma_v", what, model.noise.surface, source))
    if model.delay is not None:
        found += _delays(model.delay)
    if model.reset is not None:
        found.append(_of_surface("reset_delay_s", "reset edge to reset state",
                                 model.reset.surface, "reset table or project file"))  # fmt: skip
    if model.memory is not None:
        found += _memory(model.memory)
    if model.aperture is not None:
        source = "aperture table"
        found.append(_of_surface("aperture_centre_s", "mean of the input's weight after the edge",
                                 model.aperture.centre, source))  # fmt: skip
        found.append(_of_surface("aperture_width_s", "fall of the input's weight, 90 % to 10 %",
                                 model.aperture.width, source))  # fmt: skip
    if model.energy is not None:
        found += _energy(model.energy)
    if model.kickback is not None:
        found += _kickback(model.kickback)
    return tuple(found)


def _memory(effect: MemoryEffect) -> list[Parameter]:
    what, source = "time constant in which memory fades", "surface through the memory table"
    found = [_of_surface("memory_tau_s", what, term.tau, source) for term in effect.terms]
    if effect.floor is not None:
        what = "memory that no reset time removes"
        found.append(_of_surface("memory_floor_v", what, effect.floor, source))
    return found


def _energy(effect: EnergyEffect) -> list[Parameter]:
    source = "surface through the energy table"
    if effect.rise is None:
        return [_of_surface("energy_j", "energy of a decision", effect.fixed, source)]
    fixed, name, growth = {
        "delay": (
            "energy of a decision but for its delay",
            "energy_power_w",
            "power while the cell decides",
        ),
        "overdrive": (
            "energy of a decision at the largest overdrive",
            "energy_rise_j",
            "energy with every factor e of smaller overdrive",
        ),
    }[effect.law]
    return [
        _of_surface("energy_fixed_j", fixed, effect.fixed, source),
        _of_surface(name, growth, effect.rise, source),
    ]


def _kickback(effect: KickbackEffect) -> list[Parameter]:
    source = "surface through the kickback table"
    parts = [
        ("kickback_common_c", "charge out of either input", effect.common),
        ("kickback_differential_c", "charge out of inp less inn, inputs alike",
         effect.differential),
        ("kickback_differential_c_per_v", "what a differential input adds to it",
         effect.differential_per_v),
    ]  # fmt: skip
    return [_of_surface(name, what, s, source) for name, what, s in parts if s is not None]


def _delays(effect: DelayEffect) -> list[Parameter]:
    """Return tau and the delay at a few overdrives in the middle of the box."""
    row, words = _middle(effect.tau, effect.tau.variants[0].box)
    surfaces = (effect.tau, *effect.nodes)
    parameters = np.exp([row @ np.array(s.variants[0].coefficients) for s in surfaces])
    log_node = np.log(effect.node_overdrive_v)
    highest = effect.node_overdrive_v[-1]
    shown = [v for v in _SHOWN_OVERDRIVES_V if v < highest] + [highest]
    gradients = [np.eye(len(parameters))[0] * parameters]
    gradients += list(node_law_basis(np.array(shown), log_node) * parameters)
    names = ["regeneration time constant", *(f"delay at {v * 1e3:.4g} mV overdrive" for v in shown)]
    return [
        _parameter(
            name="delay_s" if k else "tau_s",
            ends=_ends(float(gradient.sum()), _law_half_width(effect, row, gradient)),
            unit="s",
            description=f"{names[k]} at {words}",
            source="surface through the delay and window tables",
        )
        for k, gradient in enumerate(gradients)
    ]


def _law_half_width(effect: DelayEffect, row: Floats, gradient: Floats) -> float:
    """Return the half width of ln(value), for the value's derivatives by ln(parameters)."""
    share = gradient / gradient.sum()
    scatter = share @ np.array(effect.scatter) @ share * (row @ np.array(effect.leverage) @ row)
    lack_of_fit = share @ np.array(effect.lack_of_fit) @ share if effect.lack_of_fit else 0.0
    student = float(student_quantile(_LEVEL, max(effect.scatter_freedom, 1)))
    return float(np.hypot(student * scatter**0.5, normal_quantile(_LEVEL) * lack_of_fit**0.5))


def _ends(value: float, half: float) -> list[float]:
    return [value, value * float(np.exp(-half)), value * float(np.exp(half))]


def _mismatch(mismatch: MismatchFit) -> Parameter:
    found = mismatch.statistics
    assert found is not None
    return Parameter(
        name="mismatch_sigma_v",
        estimate=Estimate(
            value=significant(found.sigma_v),
            low=significant(found.sigma_low_v, 6),
            high=significant(found.sigma_high_v, 6),
            level=found.level,
        ),
        unit="V",
        low=0.0,
        description=f"offset spread between instances at {mismatch.where}",
        source=f"{found.instances} instances; chi-square interval",
    )


def _of_surface(name: str, what: str, surface: Surface, source: str) -> Parameter:
    """Return a surface's value in the middle of its own box."""
    variant = surface.variants[0]
    row, words = _middle(surface, variant.box)
    value = float(row @ np.array(variant.coefficients))
    ends = [value]
    if surface.covariance:
        variance = float(row @ np.array(surface.covariance) @ row)
        half = normal_quantile(_LEVEL) * variance**0.5
        ends += [value - half, value + half]
    if surface.transform == "log":
        ends = [float(np.exp(end)) for end in ends]
    description = f"{what} at {words}"
    return _parameter(
        name=name, ends=ends, unit=surface.unit, description=description, source=source,
        positive=surface.transform == "log",
    )  # fmt: skip


def _parameter(
    *, name: str, ends: list[float], unit: str, description: str, source: str, positive: bool = True
) -> Parameter:
    """Return a parameter from its value and, where known, the ends of its interval."""
    bounded = len(ends) > 1
    return Parameter(
        name=name,
        estimate=Estimate(
            value=significant(ends[0]),
            low=significant(ends[1], 6) if bounded else None,
            high=significant(ends[2], 6) if bounded else None,
            level=_LEVEL,
        ),
        unit=unit,
        low=0.0 if positive else None,
        description=description,
        source=source,
    )


def _middle(surface: Surface, box: Box) -> tuple[Floats, str]:
    """Return the terms at the middle of a box, and the condition in words."""
    spans = {name: getattr(box, name) for name in CONDITION_NAMES}
    values = {name: None if span is None else span.middle for name, span in spans.items()}
    at = np.array([[np.nan if v is None else v for v in values.values()]])
    row = design(Form(axes=surface.axes, exponents=surface.exponents), at)[0]
    process = surface.variants[0].process if len(surface.variants) > 1 else ""
    return row, condition_words(Condition(process=process, **values))
