"""Tables of the page as rows of text; the template only prints them."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from behavgen.model import ComparatorModel, ConditionFit, Parameter, Source
from behavgen.report.conditions import FIELD_TITLES, field_text, shared_words, varying_fields
from behavgen.report.numbers import (
    ABSENT,
    count_text,
    estimate_text,
    interval_text,
    percent_text,
    probability_text,
)

__all__ = [
    "Column",
    "Row",
    "Table",
    "fit_tables",
    "kickback_table",
    "parameter_table",
    "source_table",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """A column's heading; numbers are set to the right."""

    title: str
    numeric: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """Cells of one row, the first heads the row.

    Parameters
    ----------
    cells : tuple of str
    mark : str
        How the row looks: ``""``, ``"notable"`` or ``"bad"``.
    flag : str
        Why it is marked, in a word or two.
    """

    cells: tuple[str, ...]
    mark: str = ""
    flag: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A table with its caption."""

    caption: str
    columns: tuple[Column, ...]
    rows: tuple[Row, ...]


def parameter_table(parameters: Sequence[Parameter]) -> Table | None:
    """Return all parameters with intervals and sources; None without any."""
    if not parameters:
        return None
    titles = (("parameter", False), ("value", True), ("interval", True), ("confidence", True),
              ("meaning", False), ("source", False))  # fmt: skip
    return Table(
        caption="All parameters",
        columns=tuple(Column(title=t, numeric=n) for t, n in titles),
        rows=tuple(Row(cells=_parameter_cells(p)) for p in parameters),
    )


def _parameter_cells(parameter: Parameter) -> tuple[str, ...]:
    estimate, unit = parameter.estimate, parameter.unit
    known = estimate.low is not None and estimate.high is not None
    return (
        parameter.name,
        estimate_text(estimate, unit),
        interval_text(estimate, unit) if known else ABSENT,
        percent_text(estimate.level) if known else ABSENT,
        parameter.description or ABSENT,
        parameter.source or ABSENT,
    )


def source_table(sources: Sequence[Source]) -> Table | None:
    """Return the table files; None without any."""
    if not sources:
        return None
    titles = (("quantity", False), ("file", False), ("rows", True), ("failed runs", True),
              ("SHA-256", False))  # fmt: skip
    return Table(
        caption="Tables that went into the model",
        columns=tuple(Column(title=t, numeric=n) for t, n in titles),
        rows=tuple(
            Row(cells=(s.quantity, s.file, count_text(s.rows), count_text(s.failed_rows), s.sha256))
            for s in sources
        ),
    )


def fit_tables(model: ComparatorModel) -> tuple[Table, ...]:
    """Return one table a quantity but kickback: how well each tabulated condition is met."""
    quantities = dict.fromkeys(fit.quantity for fit in model.fits if fit.quantity != "kickback")
    return tuple(_fit_table(q, [f for f in model.fits if f.quantity == q]) for q in quantities)


def kickback_table(model: ComparatorModel) -> Table | None:
    """Return the charges at every tabulated condition; None without any."""
    fits = [fit for fit in model.fits if fit.quantity == "kickback"]
    return _fit_table("kickback", fits) if fits else None


def _fit_table(quantity: str, fits: Sequence[ConditionFit]) -> Table:
    names = varying_fields([fit.condition for fit in fits])
    measures = [m for m in _MEASURES if any(m[1](fit) for fit in fits)]
    estimates = list(dict.fromkeys(p.name for fit in fits for p in fit.parameters))
    worst, flag = _worst_fit(fits)
    columns = (
        *(Column(title=FIELD_TITLES[name], numeric=name != "process") for name in names),
        *(Column(title=title, numeric=True) for title, _ in measures),
        Column(title="rows", numeric=True),
        *(Column(title=name, numeric=True) for name in estimates),
    )
    rows = tuple(
        Row(
            cells=(
                *(field_text(fit.condition, name) for name in names),
                *(text(fit) or ABSENT for _, text in measures),
                count_text(fit.rows),
                *(_estimate_cell(fit, name) for name in estimates),
            ),
            mark="notable" if fit is worst else "",
            flag=flag if fit is worst else "",
        )
        for fit in fits
    )
    return Table(caption=_fit_caption(quantity, fits), columns=columns, rows=rows)


def _fit_caption(quantity: str, fits: Sequence[ConditionFit]) -> str:
    shared = shared_words([fit.condition for fit in fits])
    if len(fits) == 1:
        return f"{quantity.capitalize()} at {shared or 'all conditions'}"
    all_at = f", all at {shared}" if shared else ""
    return f"{quantity.capitalize()}, {len(fits)} conditions{all_at}"


def _percent(value: float | None) -> str:
    return "" if value is None else percent_text(value)


def _p_value(value: float | None) -> str:
    return "" if value is None else probability_text(value)


_Measure = tuple[str, Callable[[ConditionFit], str]]
_MEASURES: tuple[_Measure, ...] = (
    ("rms", lambda fit: _percent(fit.rms_relative)),
    ("worst", lambda fit: _percent(fit.worst_relative)),
    ("left out", lambda fit: _percent(fit.held_out_rms_relative)),
    ("p\N{NON-BREAKING HYPHEN}value", lambda fit: _p_value(fit.goodness)),
)
"""Column title and its text for a fit; empty where it is not known."""


def _estimate_cell(fit: ConditionFit, name: str) -> str:
    found = [p for p in fit.parameters if p.name == name]
    if not found:
        return ABSENT
    estimate, unit = found[0].estimate, found[0].unit
    if estimate.low is None or estimate.high is None:
        return estimate_text(estimate, unit)
    return f"{estimate_text(estimate, unit)} ({interval_text(estimate, unit)})"


def _worst_fit(fits: Sequence[ConditionFit]) -> tuple[ConditionFit | None, str]:
    """Return the fit with the largest error, else with the smallest p-value, and which it is."""
    erring = [fit for fit in fits if fit.worst_relative is not None]
    if len(erring) > 1:
        return max(erring, key=lambda fit: fit.worst_relative or 0.0), "worst"
    tested = [fit for fit in fits if fit.goodness is not None]
    if len(tested) > 1:
        return min(tested, key=lambda fit: fit.goodness or 0.0), "lowest p"
    return None, ""
