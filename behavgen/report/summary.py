"""What an engineer asks first: how good is it, and what are its numbers."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from behavgen.model import ComparatorModel, Condition, ConditionFit, Parameter
from behavgen.reference import Reference
from behavgen.report.conditions import condition_words
from behavgen.report.numbers import (
    count_text,
    estimate_text,
    interval_text,
    percent_text,
    probability_text,
    si_text,
)
from behavgen.report.offset_figures import mismatch_sigma

__all__ = ["Effect", "KeyNumber", "effects", "fit_sentences", "key_numbers", "middle_numbers"]

NOT_CARRIED = ("memory of the previous decision", "aperture", "energy", "kickback")
"""What tables may hold but this version of the model does not carry."""


@dataclass(frozen=True, slots=True, kw_only=True)
class KeyNumber:
    """One number in large type, with what it is and how well it is known."""

    name: str
    value: str
    interval: str
    meaning: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Effect:
    """An effect and whether, and as what, the model carries it."""

    name: str
    modelled: bool
    words: str


def fit_sentences(model: ComparatorModel) -> tuple[str, ...]:
    """Return one sentence a quantity about how the emitted model meets its tables."""
    quantities = dict.fromkeys(fit.quantity for fit in model.fits)
    return tuple(_fit_sentence(q, [f for f in model.fits if f.quantity == q]) for q in quantities)


def _fit_sentence(quantity: str, fits: Sequence[ConditionFit]) -> str:
    rows = sum(fit.rows for fit in fits)
    places = "1 condition" if len(fits) == 1 else f"{len(fits)} conditions"
    text = f"{quantity.capitalize()}: {count_text(rows)} table rows at {places}"
    text += _error_clause(fits) + _held_out_clause(fits)
    p_values = [fit.goodness for fit in fits if fit.goodness is not None]
    if p_values:
        text += f"; the smallest p\N{NON-BREAKING HYPHEN}value of the goodness of fit is {probability_text(min(p_values))}"
    return text + "."


def _error_clause(fits: Sequence[ConditionFit]) -> str:
    known = [fit for fit in fits if fit.rms_relative is not None]
    if not known:
        return ""
    rows = sum(fit.rows for fit in known)
    total = math.sqrt(sum(fit.rows * (fit.rms_relative or 0.0) ** 2 for fit in known) / max(rows, 1))
    text = f" are met within {percent_text(total)} rms"
    erring = [fit for fit in known if fit.worst_relative is not None]
    if erring:
        worst = max(erring, key=lambda fit: fit.worst_relative or 0.0)
        where = condition_words(worst.condition)
        text += f", {percent_text(worst.worst_relative or 0.0)} at worst"
        text += f" (at {where})" if where and len(fits) > 1 else ""
    return text


def _held_out_clause(fits: Sequence[ConditionFit]) -> str:
    known = [f for f in fits if f.held_out_rms_relative is not None]
    if not known:
        return ""
    worst = max(f.held_out_rms_relative or 0.0 for f in known)
    return f"; a condition left out of the fit is met within {percent_text(worst)} rms or better"


def key_numbers(parameters: Sequence[Parameter]) -> tuple[KeyNumber, ...]:
    """Return the parameters people ask for first; a name given many times is a curve, not one."""
    names = [p.name for p in parameters]
    return tuple(
        KeyNumber(
            name=p.name, value=estimate_text(p.estimate, p.unit), interval=_interval_words(p),
            meaning=p.description,
        )
        for p in parameters
        if names.count(p.name) == 1
    )  # fmt: skip


def _interval_words(parameter: Parameter) -> str:
    text = interval_text(parameter.estimate, parameter.unit)
    known = parameter.estimate.low is not None and parameter.estimate.high is not None
    return f"{percent_text(parameter.estimate.level)}: {text}" if known else text


def middle_numbers(
    model: ComparatorModel, reference: Reference, middle: Condition
) -> tuple[KeyNumber, ...]:
    """Return what the emitted model gives at the middle of the range."""
    numbers: list[tuple[str, float, str]] = []
    if model.delay is not None:
        numbers.append(("regeneration time constant", _tail_tau_s(model, reference), "s"))
        numbers += [
            (f"delay at {si_text(v, 'V')}", float(reference.delay(v)), "s")
            for v in _decades_inside(model)
        ]
    if model.offset is not None:
        numbers.append(("nominal offset", float(reference.offset()), "V"))
    spread = mismatch_sigma(model, middle)
    if spread is not None:
        numbers.append(("mismatch sigma", spread, "V"))
    if model.noise is not None:
        numbers.append(("noise sigma", float(reference.noise_sigma()), "V"))
    if model.reset is not None:
        numbers.append(("reset delay", float(reference.reset_delay()), "s"))
    return tuple(
        KeyNumber(name=name, value=si_text(value, unit), interval="", meaning="")
        for name, value, unit in numbers
    )


def _tail_tau_s(model: ComparatorModel, reference: Reference) -> float:
    """Return the slope of the delay over ln(overdrive) below the first node, which is tau."""
    if model.delay is None:
        raise ValueError("the model has no delay")
    first = model.delay.node_overdrive_v[0]
    slow, fast = reference.delay([first * math.exp(-2.0), first * math.exp(-1.0)])
    return float(slow - fast)


def _decades_inside(model: ComparatorModel) -> tuple[float, ...]:
    """Return whole decades of overdrive that the table covers, at most five of them."""
    span = model.box.overdrive_v
    decades = (1e-7, 1e-6, 1e-5, 1e-4, 1e-3, 1e-2, 1e-1)
    if span is None:
        return (1e-3,)
    inside = [v for v in decades if span.low * 0.999 <= v <= span.high * 1.001]
    return tuple(inside[-5:])


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
        ("supply failure", _has_off_level(model), _off_words(model), "the cell is always on"),
    )  # fmt: skip
    known = tuple(
        Effect(name=name, modelled=there, words=what if there else f"not characterised: {absent}")
        for name, there, what, absent in found
    )
    never = tuple(Effect(name=name, modelled=False, words="not modelled") for name in NOT_CARRIED)
    return known + never


def _has_off_level(model: ComparatorModel) -> bool:
    return model.cell.supply_off_v is not None and model.cell.pins.vdd is not None


def _off_words(model: ComparatorModel) -> str:
    return f"off below {si_text(model.cell.supply_off_v or 0.0, 'V')} of supply; outputs go X"


def _offset_words(model: ComparatorModel) -> str:
    source = model.offset.source if model.offset else ""
    return f"nominal trip point from {source}" if source else "nominal trip point"


def _mismatch_words(model: ComparatorModel) -> str:
    if model.mismatch is None:
        return ""
    number = len(model.mismatch.components)
    parts = "one component" if number == 1 else f"{number} components"
    return f"Gaussian between instances, {parts}, from {count_text(model.mismatch.instances)} instances"


def _delay_words(model: ComparatorModel) -> str:
    if model.delay is None:
        return ""
    text = f"law: {model.delay.law}" if model.delay.law else "over overdrive"
    return f"{text}; measured from {model.delay.measured}" if model.delay.measured else text
