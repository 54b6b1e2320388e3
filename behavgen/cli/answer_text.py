"""The answers of ``predict`` for people: values with interval, unit and what they rest on."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from behavgen.cli.answer import Answer, Answers
from behavgen.cli.answer_numbers import chance_texts, delay_texts, volts_text, wait_texts
from behavgen.cli.question_text import condition_text, field_text, field_title, varying_fields
from behavgen.cli.wording import range_text
from behavgen.model import Estimate
from behavgen.units import format_si

__all__ = ["case_rows", "extreme_rows"]

Row = tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Quantity:
    """How one number is called, found in an answer, written, and what it rests on."""

    label: str
    find: Callable[[Answer], Estimate | None]
    write: Callable[[Estimate], tuple[str, str]]
    basis: Callable[[Answer, Answers], str]


def case_rows(answers: Answers) -> list[Row]:
    """Return a row a number and case, behind a head where cases differ."""
    fields = varying_fields([found.case for found in answers.cases])
    rows = []
    for quantity in _present(answers):
        for found in answers.cases:
            label = quantity.label if found is answers.cases[0] else ""
            where = (field_text(found.case, name) for name in fields)
            rows.append((label, *where, *_texts(quantity, found, answers)))
    if not fields:
        return rows
    titles = (field_title(name, answers.question) for name in fields)
    return [("", *titles, "value", "interval", "rests on"), *rows]


def extreme_rows(answers: Answers) -> list[Row]:
    """Return of each number the first case and the ones among the others with least and most."""
    rows: list[Row] = []
    first, *others = answers.cases
    for quantity in _present(answers):
        ranked = _ranked(quantity, others)
        for label, name, found in (
            (quantity.label, "middle", first),
            ("", "least", ranked[0]),
            ("", "most", ranked[-1]),
        ):
            texts = _texts(quantity, found, answers)
            rows.append((label, name, *texts, f"at {condition_text(found.case)}"))
    return rows


def _present(answers: Answers) -> list[_Quantity]:
    """Return the numbers that there are: each in all cases or in none."""
    return [q for q in _QUANTITIES if q.find(answers.cases[0]) is not None]


def _ranked(quantity: _Quantity, among: Sequence[Answer]) -> list[Answer]:
    return sorted(among, key=lambda found: _estimate(quantity, found).value)


def _estimate(quantity: _Quantity, found: Answer) -> Estimate:
    estimate = quantity.find(found)
    assert estimate is not None
    return estimate


def _texts(quantity: _Quantity, found: Answer, answers: Answers) -> tuple[str, str, str]:
    value, interval = quantity.write(_estimate(quantity, found))
    return value, interval, quantity.basis(found, answers)


def _noise_basis(found: Answer, answers: Answers) -> str:
    counted = answers.evidence.sigmas
    known = "none counted" if counted is None else f"{counted:.1f} counted"
    return f"{found.sigmas:.1f} sigmas used, {known}"


def _window_basis(found: Answer, answers: Answers) -> str:
    used, tabulated = found.log10_half_window_v, answers.evidence.overdrive_v
    assert used is not None
    if math.isinf(used):
        return "no tabulated overdrive resolves so soon"
    text = f"{volts_text(used)} used"
    if tabulated is None:
        return text
    known = f"{text}, {format_si(tabulated.low, 'V')} tabulated"
    beyond = f"{found.decades_beyond or 0.0:.1f}"
    return known if beyond == "0.0" else f"{known}, {beyond} decades beyond"


def _wait_basis(found: Answer, answers: Answers) -> str:
    used = format_si(found.case.resolve_time_s or 0.0, "s")
    tabulated = answers.evidence.resolve_time_s
    known = "" if tabulated is None else f", {format_si(tabulated, 's')} tabulated"
    return f"{used} used{known}"


def _delay_basis(found: Answer, answers: Answers) -> str:
    used = format_si(found.overdrive_v or 0.0, "V")
    return f"{used} used, {range_text(answers.evidence.overdrive_v, 'V')} tabulated"


_QUANTITIES = (
    _Quantity(label="wrong by noise", find=lambda found: found.log10_noise_error,
              write=chance_texts, basis=_noise_basis),
    _Quantity(label="unresolved", find=lambda found: found.log10_unresolved,
              write=chance_texts, basis=_window_basis),
    _Quantity(label="wrong or unresolved", find=lambda found: found.log10_error,
              write=chance_texts, basis=lambda _found, _answers: "as the two above"),
    _Quantity(label="MTBF (unresolved)", find=lambda found: found.log10_time_between_failures_s,
              write=wait_texts, basis=_wait_basis),
    _Quantity(label="delay", find=lambda found: found.delay_s,
              write=delay_texts, basis=_delay_basis),
)  # fmt: skip
