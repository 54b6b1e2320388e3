"""What a reader must know before trusting a model, said with this model's own numbers."""

from __future__ import annotations

import math

from behavgen.model import ComparatorModel
from behavgen.reference import CERTAIN_SIGMAS
from behavgen.report.numbers import range_text, si_text

__all__ = ["cautions", "is_invented"]


def is_invented(model: ComparatorModel) -> bool:
    """Whether the cell's description says that its numbers are invented."""
    return "invented" in model.cell.description.lower()


def cautions(model: ComparatorModel, observed_sigmas: float | None) -> tuple[str, ...]:
    """Return the cautions as full sentences, the widest first.

    Parameters
    ----------
    model : ComparatorModel
    observed_sigmas : float or None
        How far from the trip point decisions of both kinds were counted.
    """
    invented = ("All numbers of this cell are invented for demonstration; they describe no real "
                "circuit.",) if is_invented(model) else ()  # fmt: skip
    return (*invented, *_RANGE, *_extrapolation(model, observed_sigmas), *_REST)


_RANGE = (
    "The model was fitted to the tables named under Sources and holds inside the ranges stated "
    "under Validity. Outside, conditions are clamped to the range, and what comes out predicts "
    "nothing.",
    "It replaces neither transistor-level simulation and extraction nor timing and reliability "
    "sign-off, nor the reader's own safety process. No integrity level is claimed. Where a "
    "decision touches safety, the codes that apply and qualified engineers have the last word.",
)

_REST = (
    "Intervals cover sampling error and lack of fit. They do not cover the accuracy of the "
    "process kit, parasitics, ageing, supply noise or jitter.",
    "Mismatch is drawn independently for each instance and carries no spatial correlation.",
    "What an unresolved decision shows, whether X, a coin or the old value, is a convention. Coin "
    "and hold can hide a synchroniser fault, and a two-state simulator shows only the flag.",
    "A passing check says that the emitted text does what the reference says and gives the tables "
    "back. It does not say that the tables are right.",
    "Seeds make a simulation repeatable. They are no basis for security.",
    "The model reveals performance that derives from a process kit: check the kit's licence "
    "before passing it on.",
)


def _extrapolation(model: ComparatorModel, observed_sigmas: float | None) -> tuple[str, ...]:
    """Say what rests on a law rather than on counts, and how far it is stretched."""
    sentences = []
    if model.noise is not None:
        sentences.append(_noise_tail(observed_sigmas))
    if model.delay is not None:
        sentences.append(_delay_tail(model))
    return tuple(sentences)


def _noise_tail(observed: float | None) -> str:
    used = f"the model uses the Gaussian law to {CERTAIN_SIGMAS:g} sigmas"
    if observed is None:
        return (
            f"No decision was counted for the noise here; {used}. Rates so rare are a law, not a "
            "count."
        )
    return (
        f"Errors were counted to {observed:.1f} sigmas from the trip point; {used}. Error rates "
        "far below what was counted rest on that law."
    )


def _delay_tail(model: ComparatorModel) -> str:
    law = "rest on exponential regeneration"
    span = model.box.overdrive_v
    if model.delay is None or span is None:
        return f"Delays and unresolved decisions at overdrives below the table {law}."
    floor = model.delay.floor_v
    decades = math.log10(span.low / floor)
    return (
        f"The tables reach overdrives of {range_text(span, 'V')}. Below, down to the floor "
        f"of {si_text(floor, 'V')} ({decades:.0f} decades), delays and the rates of unresolved "
        f"decisions {law}."
    )
