"""What the model carries, what it could not, and what absence means."""

from __future__ import annotations

from dataclasses import dataclass

from behavgen.model import ComparatorModel, DelayEffect
from behavgen.report.numbers import count_text, volts_text

__all__ = ["Effect", "effects"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Effect:
    """An effect and whether, and as what, the model carries it."""

    name: str
    modelled: bool
    words: str


def effects(model: ComparatorModel) -> tuple[Effect, ...]:
    """Return every effect the page speaks about, the absent ones with what absence means."""
    found = (
        ("offset", model.offset is not None, _offset_words(model), "the trip point is 0 V"),
        ("mismatch", model.mismatch is not None, _mismatch_words(model),
         "instances are alike; MISMATCH_ON does nothing"),
        ("noise", model.noise is not None, "Gaussian, one draw a decision",
         "decisions are free of noise; NOISE_ON does nothing"),
        ("delay", model.delay is not None, _delay_words(model),
         "outputs follow one unit of the time precision after the edge"),
        ("unresolved decisions", model.delay is not None,
         f"a decision slower than its phase; shown as {model.cell.when_unresolved}",
         "every decision resolves"),
        ("reset delay", model.reset is not None, "from the reset edge to the reset state",
         "the reset state returns with the edge"),
        ("memory of the previous decision", model.memory is not None, _memory_words(model),
         "every decision is alone; MEMORY_ON does nothing"),
        ("aperture", model.aperture is not None, "the input is sampled at its weight's mean",
         "the input is sampled at the edge"),
        ("energy", model.energy is not None, "of every decision, summed up in energy_j",
         "energy_j stays 0"),
        ("kickback", model.kickback is not None, "charge out of the inputs, in Verilog-A only",
         "no charge leaves the inputs"),
        ("supply failure", _has_off_level(model), _off_words(model), "the cell is always on"),
    )  # fmt: skip
    return tuple(
        Effect(name=name, modelled=there, words=what if there else f"not characterised: {absent}")
        for name, there, what, absent in found
    )


def _has_off_level(model: ComparatorModel) -> bool:
    return model.cell.supply_off_v is not None and model.cell.pins.vdd is not None


def _off_words(model: ComparatorModel) -> str:
    return f"off below {volts_text(model.cell.supply_off_v or 0.0)} of supply; outputs go X"


def _offset_words(model: ComparatorModel) -> str:
    source = model.offset.source if model.offset else ""
    return f"nominal trip point from {source}" if source else "nominal trip point"


def _mismatch_words(model: ComparatorModel) -> str:
    if model.mismatch is None:
        return ""
    number = len(model.mismatch.components)
    parts = "one component" if number == 1 else f"{number} components"
    measured = count_text(model.mismatch.instances)
    return f"Gaussian between instances, {parts}, from {measured} instances"


def _memory_words(model: ComparatorModel) -> str:
    if model.memory is None:
        return ""
    number = len(model.memory.terms)
    parts = {0: "", 1: "one exponential"}.get(number, f"{number} exponentials")
    floor = "a floor" if model.memory.floor else ""
    law = " and ".join(part for part in (parts, floor) if part)
    return f"the trip point moves in its favour: {law} over the reset time"


def _choice_words(effect: DelayEffect) -> str:
    """Return by how much the law and the next best one miss rows left out."""
    if effect.law_error is None:
        return ""
    words = f"{effect.law_error:.2%} rms at rows left out"
    if effect.runner_up and effect.runner_up_error is not None:
        words += f"; next best: {effect.runner_up}, {effect.runner_up_error:.2%}"
    return f" ({words})"


def _delay_words(model: ComparatorModel) -> str:
    if model.delay is None:
        return ""
    law = model.delay.law
    text = f"law: {law}{_choice_words(model.delay)}" if law else "over overdrive"
    return f"{text}; measured from {model.delay.measured}" if model.delay.measured else text
