"""The numbers people ask for first, with intervals."""

from __future__ import annotations

import numpy as np

from behavgen.fit.conditions import CONDITION_NAMES
from behavgen.fit.intervals import normal_quantile
from behavgen.fit.mismatch import MismatchFit
from behavgen.fit.noise import NoiseFit
from behavgen.fit.surfaces import Form, design
from behavgen.fit.wording import condition_words
from behavgen.model import (
    Box,
    ComparatorModel,
    Condition,
    Estimate,
    Parameter,
    Surface,
    significant,
)

__all__ = ["headline_parameters"]

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
        found.append(_of_surface("noise_sigma_v", "input-referred noise of one decision",
                                 model.noise.surface, "surface through the noise table"))  # fmt: skip
    if model.delay is not None:
        found.append(_of_surface("tau_s", "regeneration time constant", model.delay.tau,
                                 "surface through the delay and window tables"))  # fmt: skip
        for volts, node in zip(model.delay.node_overdrive_v, model.delay.nodes, strict=True):
            found.append(_of_surface("delay_s", f"delay at {volts * 1e3:.4g} mV overdrive", node,
                                     "surface through the delay and window tables"))  # fmt: skip
    if model.reset is not None:
        found.append(_of_surface("reset_delay_s", "reset edge to reset state",
                                 model.reset.surface, "reset table or project file"))  # fmt: skip
    return tuple(found)


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
    variant = surface.variants[0]
    row, words = _middle(surface, variant.box)
    value = float(row @ np.array(variant.coefficients))
    low = high = None
    if surface.covariance:
        half = normal_quantile(_LEVEL) * float(np.sqrt(row @ np.array(surface.covariance) @ row))
        low, high = value - half, value + half
    if surface.transform == "log":
        value, low, high = (None if v is None else float(np.exp(v)) for v in (value, low, high))
    assert value is not None
    return Parameter(
        name=name,
        estimate=Estimate(
            value=significant(value),
            low=None if low is None else significant(low, 6),
            high=None if high is None else significant(high, 6),
            level=_LEVEL,
        ),
        unit=surface.unit,
        low=0.0 if surface.transform == "log" else None,
        description=f"{what} at {words}",
        source=source,
    )


def _middle(surface: Surface, box: Box) -> tuple[np.ndarray, str]:  # type: ignore[type-arg]
    """Return the terms at the middle of a box, and the condition in words."""
    spans = {name: getattr(box, name) for name in CONDITION_NAMES}
    values = {name: None if span is None else span.middle for name, span in spans.items()}
    at = np.array([[np.nan if v is None else v for v in values.values()]])
    row = design(Form(axes=surface.axes, exponents=surface.exponents), at)[0]
    process = surface.variants[0].process if len(surface.variants) > 1 else ""
    return row, condition_words(Condition(process=process, **values))
