"""The model of the comparator written by hand in ``models/latch_by_hand.sv``; invented numbers."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from behavgen.model import (
    ApertureEffect,
    ComparatorModel,
    EnergyEffect,
    MemoryEffect,
    MemoryTerm,
    OffsetEffect,
    ResetEffect,
)
from behavgen.surface import Surface
from tests.example_models import constant_surface, minimal_model

__all__ = ["hand_model", "hand_text"]


def fixed(unit: str, value: float) -> Surface:
    """Return a surface of exactly one value, without the rounding of an exponential."""
    return constant_surface(unit, "plain", value, "nominal")


def hand_model() -> ComparatorModel:
    """Return what the hand-written module does; it knows no coin."""
    model = minimal_model()
    assert model.delay is not None
    delay = replace(model.delay, tau=fixed("s", 1e-11), nodes=(fixed("s", 2.5e-11),))
    return replace(
        model,
        cell=replace(model.cell, name="latch_by_hand"),
        offset=OffsetEffect(surface=fixed("V", 3e-3)),
        delay=delay,
        reset=ResetEffect(surface=fixed("s", 3e-11)),
        memory=MemoryEffect(
            terms=(
                MemoryTerm(shift=fixed("V", 0.03), tau=fixed("s", 1.2e-11)),
                MemoryTerm(shift=fixed("V", 2e-3), tau=fixed("s", 9e-11)),
            ),
            floor=fixed("V", 2e-4), cap_v=0.02,
        ),
        aperture=ApertureEffect(
            centre=fixed("s", 7e-12),
            width=fixed("s", 1e-11),
        ),
        energy=EnergyEffect(
            law="delay", fixed=fixed("J", 4e-14), rise=fixed("W", 1e-4)
        ),
    )  # fmt: skip


def hand_text() -> str:
    """Return the hand-written module."""
    return (Path(__file__).parent / "models" / "latch_by_hand.sv").read_text(encoding="utf-8")
