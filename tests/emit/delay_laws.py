"""Delay laws that try what an emitted node law can do."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from behavgen.model import ComparatorModel, DelayEffect
from tests.example_models import constant_surface, minimal_model

TAU_S = 20e-12

LAWS = {
    "two nodes": ((1e-3, 0.3), (250e-12, 60e-12)),
    "three nodes, steep at their end": ((1e-3, 0.1, 0.3), (250e-12, 100e-12, 40e-12)),
    "flat between two nodes": ((1e-4, 1e-3, 1e-2, 0.3), (250e-12, 160e-12, 159e-12, 60e-12)),
    "eleven nodes": (
        tuple(np.geomspace(1e-4, 0.3, 11).tolist()),
        tuple(np.linspace(300e-12, 50e-12, 11).tolist()),
    ),
    "shorter than tau": ((1e-3, 0.3), (80e-12, 10e-12)),
}
"""Overdrives of the nodes in V, and delays there in s."""


def model_with(law: str) -> ComparatorModel:
    """Return a model with nothing but one of the laws."""
    overdrives, delays = LAWS[law]
    effect = DelayEffect(
        tau=constant_surface("s", "log", float(np.log(TAU_S)), "nominal"),
        node_overdrive_v=overdrives,
        nodes=tuple(constant_surface("s", "log", float(np.log(d)), "nominal") for d in delays),
    )
    return replace(minimal_model(), delay=effect)
