"""Whether the tables came back, and whether the random part is right, as tables of the page."""

from __future__ import annotations

from behavgen.check.verdict import CheckReport
from behavgen.report.numbers import ABSENT, count_text, percent_text, probability_text
from behavgen.report.tabulation import Column, Row, Table

__all__ = ["closure_table", "distribution_table", "left_out_table"]

_MOST_STATISTICS = 12


def closure_table(check: CheckReport) -> Table | None:
    """Return one row for each quantity that was characterised anew, with its worst table row."""
    if not check.closure:
        return None
    rows = tuple(
        Row(
            cells=(
                one.quantity.replace("_", " "), count_text(one.rows),
                ABSENT if one.rms_relative is None else percent_text(one.rms_relative),
                one.limit, *_worst(one.worst[0].point, one.worst[0].condition, one.worst[0].told),
                "✓ comes back" if one.passed else "✗ does not come back",
            ),
            mark="" if one.passed else "bad",
        )
        for one in check.closure
    )  # fmt: skip
    columns = (
        Column(title="quantity"), Column(title="table rows", numeric=True),
        Column(title="rms", numeric=True), Column(title="found and allowed"),
        Column(title="worst row"), Column(title="table and simulation"), Column(title="outcome"),
    )  # fmt: skip
    return Table(caption="Tables that came back from the simulated model",
                 columns=columns, rows=rows)  # fmt: skip


def _worst(point: int, condition: str, told: str) -> tuple[str, str]:
    place = f"{condition}, point {count_text(point)}" if point else condition
    return place, told


def distribution_table(check: CheckReport) -> Table | None:
    """Return the statistics of the random part that are least probable, the first first."""
    if not check.distribution:
        return None
    worst = sorted(check.distribution, key=lambda one: one.p_value)[:_MOST_STATISTICS]
    rows = tuple(
        Row(
            cells=(one.name, count_text(one.sample), one.told, probability_text(one.p_value),
                   probability_text(one.least_p), "✓ may well be" if one.passed else "✗ is not"),
            mark="" if one.passed else "bad",
        )
        for one in worst
    )  # fmt: skip
    columns = (
        Column(title="statistic"), Column(title="sample", numeric=True),
        Column(title="expected and found"),
        Column(title="p\N{NON-BREAKING HYPHEN}value", numeric=True),
        Column(title="at least", numeric=True), Column(title="outcome"),
    )  # fmt: skip
    shown = f"{count_text(len(worst))} of {count_text(len(check.distribution))}"
    return Table(caption=f"Random part, seeds of {check.seed}: least probable statistics, {shown}",
                 columns=columns, rows=rows)  # fmt: skip


def left_out_table(check: CheckReport) -> Table | None:
    """Return what could not be asked of this text or in this simulator."""
    if not check.left_out:
        return None
    rows = tuple(Row(cells=(words,)) for words in check.left_out)
    return Table(caption="Left out", columns=(Column(title="what and why"),), rows=rows)
