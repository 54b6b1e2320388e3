"""How well the emitted model meets its tables, in sentences."""

from __future__ import annotations

import math
from collections.abc import Sequence

from behavgen.model import ComparatorModel, ConditionFit
from behavgen.report.conditions import condition_words
from behavgen.report.numbers import count_text, percent_text, probability_text

__all__ = ["fit_sentences"]


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
        smallest = probability_text(min(p_values))
        text += f"; the smallest p\N{NON-BREAKING HYPHEN}value of the goodness of fit is {smallest}"
    return text + "."


def _error_clause(fits: Sequence[ConditionFit]) -> str:
    known = [fit for fit in fits if fit.rms_relative is not None]
    if not known:
        return ""
    rows = max(sum(fit.rows for fit in known), 1)
    total = math.sqrt(sum(fit.rows * (fit.rms_relative or 0.0) ** 2 for fit in known) / rows)
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
