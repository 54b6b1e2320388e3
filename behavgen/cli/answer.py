"""The answer of ``predict`` for each case, in plain numbers, with what it rests on."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import isnan, log10
from typing import TYPE_CHECKING

from behavgen.cli.question import Case, Question, cases
from behavgen.model import ComparatorModel, Condition, Estimate, Range
from behavgen.units import ZERO_CELSIUS_K

if TYPE_CHECKING:
    import numpy as np
    import numpy.typing as npt

    from behavgen.applied_inputs import Levels, Uniform
    from behavgen.bands import Band
    from behavgen.evidence import Evidence, Outside
    from behavgen.prediction import Prediction

    Floats = npt.NDArray[np.float64]

__all__ = ["Answer", "Answers", "answer"]

_DEFAULT_OVERDRIVE_V = 1e-3


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """What is to be expected in one case; None where it was not asked or not characterised.

    Parameters
    ----------
    case : Case
    log10_noise_error, log10_unresolved, log10_error : Estimate or None
        Decimal logarithms of probabilities.
    log10_time_between_failures_s : Estimate or None
        Decimal logarithm of the mean time between unresolved decisions in s.
    delay_s : Estimate or None
    overdrive_v : float or None
        Where the delay is taken.
    sigmas : float or None
        How far out the Gaussian law is used.
    log10_half_window_v : float or None
        Decimal logarithm of the overdrive in V down to which the delay law is used.
    decades_beyond : float or None
        Decades of overdrive by which that lies below all that is tabulated.
    outside : tuple of Outside
        Conditions at which something was not characterised.
    """

    case: Case
    log10_noise_error: Estimate | None
    log10_unresolved: Estimate | None
    log10_error: Estimate | None
    log10_time_between_failures_s: Estimate | None
    delay_s: Estimate | None
    overdrive_v: float | None
    sigmas: float | None
    log10_half_window_v: float | None
    decades_beyond: float | None
    outside: tuple[Outside, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Answers:
    """All cases of one model, the question as completed, and how far the tables went."""

    question: Question
    cases: tuple[Answer, ...]
    evidence: Evidence


def answer(asked: Question, model: ComparatorModel) -> Answers:
    """Predict every case of a question.

    Raises
    ------
    ProjectError
        For a process that the model does not know, or too many cases.
    """
    from behavgen.evidence import evidence  # noqa: PLC0415  scipy
    from behavgen.prediction import predict  # noqa: PLC0415

    reached = evidence(model)
    question = _completed(asked, model, reached)
    settings = cases(question, model)
    prediction = predict(
        model,
        _inputs(question, settings),
        resolve_time_s=_column([case.resolve_time_s for case in settings]),
        clock_hz=_column([case.clock_hz for case in settings]),
        instances=question.instances,
        level=question.level,
        **_conditions(settings),
    )
    return Answers(
        question=question,
        cases=tuple(
            _answer(prediction, k, case, reached, _outside(model, case, question))
            for k, case in enumerate(settings)
        ),
        evidence=reached,
    )


def _completed(question: Question, model: ComparatorModel, reached: Evidence) -> Question:
    """Fill in what was left open: an overdrive; where nothing was asked at all, corners too."""
    if question.is_open:
        longest = () if reached.resolve_time_s is None else (reached.resolve_time_s,)
        question = replace(question, corners=True, resolve_time_s=longest)
    if question.kind:
        return question
    span = model.box.overdrive_v or Range(low=_DEFAULT_OVERDRIVE_V, high=_DEFAULT_OVERDRIVE_V)
    overdrive_v = min(max(_DEFAULT_OVERDRIVE_V, span.low), span.high)
    return replace(question, kind="overdrive", values_v=(overdrive_v,))


def _inputs(question: Question, settings: Sequence[Case]) -> Levels | Uniform:
    import numpy as np  # noqa: PLC0415

    from behavgen.applied_inputs import Levels, Uniform  # noqa: PLC0415

    if question.kind == "levels":
        levels = np.tile(question.values_v, (len(settings), 1))
        return Levels.of(levels, weight=question.weights or np.ones(levels.shape[1]))
    values = np.array([case.value_v for case in settings], dtype=float)
    if question.kind == "span":
        return Uniform(span_v=values)
    return Levels.of(
        values, right_bit=question.right_bit, from_trip_point=question.kind == "overdrive"
    )


def _conditions(settings: Sequence[Case]) -> dict[str, list[float] | list[str]]:
    """Return the conditions as keywords; what is not characterised is left out."""
    columns = {
        "vdd": _column([case.vdd_v for case in settings]),
        "temp_c": _column([case.temp_c for case in settings]),
        "vcm": _column([case.vcm_v for case in settings]),
    }
    known = {name: column for name, column in columns.items() if column is not None}
    return {**known, "process": [case.process for case in settings]}


def _column(values: Sequence[float | None]) -> list[float] | None:
    """Return values of all cases, None where they have none: either all have one or none."""
    known = [value for value in values if value is not None]
    return known or None


def _answer(
    found: Prediction, k: int, case: Case, reached: Evidence, outside: tuple[Outside, ...]
) -> Answer:
    def at(band: Band | None) -> Estimate | None:
        if band is None:
            return None
        value, *ends = (float(a[k]) for a in (band.value, band.low, band.high))
        low, high = (None if isnan(end) else end for end in ends)
        return Estimate(value=value, low=low, high=high, level=found.level)

    def one_of(values: Floats | None) -> float | None:
        return None if values is None else float(values[k])

    half_window = one_of(found.log10_half_window_v)
    return Answer(
        case=case,
        log10_noise_error=at(found.log10_noise_error),
        log10_unresolved=at(found.log10_unresolved),
        log10_error=at(found.log10_error),
        log10_time_between_failures_s=at(found.log10_time_between_failures_s),
        delay_s=at(found.delay_s),
        overdrive_v=one_of(found.overdrive_v),
        sigmas=one_of(found.sigmas),
        log10_half_window_v=half_window,
        decades_beyond=_decades_beyond(half_window, reached),
        outside=outside,
    )


def _outside(model: ComparatorModel, case: Case, question: Question) -> tuple[Outside, ...]:
    """Return what was not characterised at a case, of the quantities that the answer uses."""
    from behavgen.evidence import outside  # noqa: PLC0415

    used = {"delay", "noise"}
    used |= {"offset"} if question.kind in ("input", "levels") else set()
    used |= {"mismatch"} if question.instances != "nominal" else set()
    temperature_k = None if case.temp_c is None else case.temp_c + ZERO_CELSIUS_K
    condition = Condition(
        process=case.process, vdd_v=case.vdd_v, temperature_k=temperature_k, vcm_v=case.vcm_v
    )
    return tuple(one for one in outside(model, condition) if one.quantity in used)


def _decades_beyond(log10_half_window_v: float | None, reached: Evidence) -> float | None:
    if log10_half_window_v is None or reached.overdrive_v is None:
        return None
    return max(log10(reached.overdrive_v.low) - log10_half_window_v, 0.0)
