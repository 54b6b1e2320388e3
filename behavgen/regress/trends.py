"""What the history keeps of a model, and the page that shows it over runs."""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Mapping, Sequence
from typing import TYPE_CHECKING

from behavgen.model import ComparatorModel
from behavgen.regress.comparison import Comparison
from behavgen.regress.past import PastValue, Trend

if TYPE_CHECKING:
    from behavgen.report.trends_page import RunTrend

__all__ = ["past_values", "trends_html"]

_QUANTITIES = {
    "offset_v": "offset",
    "mismatch_sigma_v": "mismatch",
    "noise_sigma_v": "noise",
    "tau_s": "tau",
    "delay_s": "delay",
    "reset_delay_s": "reset_delay",
}
"""Parameters of a model to the quantities whose drift is judged."""


def past_values(
    cell: str, model: ComparatorModel, comparison: Comparison | None
) -> Iterator[PastValue]:
    """Yield the model's headline, each number under a name of its own, with what was said of it."""
    states = {q.of: q.state for q in comparison.quantities} if comparison else {}
    names = [parameter.name for parameter in model.parameters]
    for parameter in model.parameters:
        alone = names.count(parameter.name) == 1
        name = parameter.name if alone else f"{parameter.name}, {parameter.description}"
        yield PastValue(
            cell=cell,
            parameter=name,
            unit=parameter.unit,
            value=parameter.estimate.value,
            low=parameter.estimate.low,
            high=parameter.estimate.high,
            verdict=states.get(_QUANTITIES.get(parameter.name, ""), ""),
        )


def trends_html(
    trends: Mapping[str, Sequence[Trend]], *, title: str, cautions: Iterable[str]
) -> str:
    """Return the page of all cells' trends.

    Parameters
    ----------
    trends : mapping
        Cell to its parameters over runs.
    title : str
    cautions : iterable of str
        Full sentences.
    """
    from behavgen.report.trends_page import CellTrends, trends_page  # noqa: PLC0415  numpy

    cells = [
        CellTrends(name=name, trends=tuple(map(_trend, found)))
        for name, found in trends.items()
        if found
    ]
    return trends_page(cells, title=title, overview="overview.html", cautions=tuple(cautions))


def _trend(trend: Trend) -> RunTrend:
    from behavgen.report.trends_page import RunTrend  # noqa: PLC0415  numpy

    def column(name: str) -> tuple[float, ...]:
        values = (getattr(point, name) for point in trend.points)
        return tuple(math.nan if value is None else value for value in values)

    return RunTrend(
        name=trend.parameter,
        unit=trend.unit,
        runs=tuple(point.run for point in trend.points),
        value=column("value"),
        low=column("low"),
        high=column("high"),
    )
