"""The reset delay in words: table against emitted model."""

from __future__ import annotations

import numpy as np

from behavgen.model import ComparatorModel, Range
from behavgen.reference import Reference
from behavgen.report.conditions import reference_keywords
from behavgen.report.numbers import percent_text, range_text, si_text

__all__ = ["reset_sentence"]


def reset_sentence(model: ComparatorModel, reference: Reference) -> str:
    """Say how long the reset takes and how well the model gives the table back."""
    if model.reset is None:
        return "No reset delay was characterised: the reset state returns with the reset edge."
    found = [p for p in model.points if p.quantity == "reset" and len(p.y) > 0]
    if not found:
        value = si_text(float(reference.reset_delay()), "s")
        return f"The reset state returns {value} after the reset edge; no table rows tell more."
    table = np.concatenate([p.y for p in found])
    emitted = [float(reference.reset_delay(**reference_keywords(p.condition))) for p in found]
    model_s = np.repeat(emitted, [len(p.y) for p in found])
    span = range_text(Range(low=float(table.min()), high=float(table.max())), "s")
    places = "1 condition" if len(found) == 1 else f"{len(found)} conditions"
    text = f"The table gives {span} from the reset edge to the reset state at {places}"
    positive = table > 0.0
    if not positive.any():
        return text + "."
    worst = float(np.max(np.abs(model_s[positive] / table[positive] - 1.0)))
    return f"{text}; the emitted model is within {percent_text(worst)} of every row."
