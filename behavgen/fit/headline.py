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
from behavgen.model import (
    Box,
    ComparatorModel,
    Condition,
    DelayEffect,
    Estimate,
    Parameter,
    Surface,
    significant,
)

__all__ = ["headline_parameters"]

Floats = npt.NDArray[np.float64]

_LEVEL = 0.95


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
    return tuple(found)


def _delays(effect: DelayEffect) -> list[Parameter]:
    source = "surface through the delay and window tables"
    what = ["regeneration time constant"]
    what += [f"delay at {volts * 1e3:.4g} mV overdrive" for volts in effect.node_overdrive_v]
    return [
        _of_surface("delay_s" if k else "tau_s", words, surface, source, _law_half_width(effect, k))
        for k, (words, surface) in enumerate(zip(what, (effect.tau, *effect.nodes), strict=True))
    ]


def _law_half_width(effect: DelayEffect, k: int) -> float:
    """Return the interval's half width of ln(parameter k) at the middle of the box."""
    row, _ = _middle(effect.tau, effect.tau.variants[0].box)
    scatter = effect.scatter[k][k] if effect.scatter else 0.0
    lack_of_fit = effect.lack_of_fit[k][k] if effect.lack_of_fit else 0.0
    scatter *= float(row @ np.array(effect.leverage) @ row)
    student = float(student_quantile(_LEVEL, max(effect.scatter_freedom, 1)))
    return float(np.hypot(student * scatter**0.5, normal_quantile(_LEVEL) * lack_of_fit**0.5))


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


def _of_surface(
    name: str, what: str, surface: Surface, source: str, half: float | None = None
) -> Parameter:
    variant = surface.variants[0]
    row, words = _middle(surface, variant.box)
    value = float(row @ np.array(variant.coefficients))
    if half is None and surface.covariance:
        variance = float(row @ np.array(surface.covariance) @ row)
        half = normal_quantile(_LEVEL) * float(np.sqrt(variance))
    ends = [value] if half is None else [value, value - half, value + half]
    if surface.transform == "log":
        ends = [float(np.exp(end)) for end in ends]
    return Parameter(
        name=name,
        estimate=Estimate(
            value=significant(ends[0]),
            low=None if half is None else significant(ends[1], 6),
            high=None if half is None else significant(ends[2], 6),
            level=_LEVEL,
        ),
        unit=surface.unit,
        low=0.0 if surface.transform == "log" else None,
        description=f"{what} at {words}",
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
