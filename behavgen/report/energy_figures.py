"""Energy of a decision over its overdrive: table and emitted model."""

from __future__ import annotations

from collections.abc import Sequence

from behavgen.model import ComparatorModel, Condition, EnergyEffect
from behavgen.reference import Reference
from behavgen.report.axes import PlotAxis, spanning
from behavgen.report.charts import Chart, draw_chart
from behavgen.report.conditions import shared_words
from behavgen.report.curves import Curve, curves, rms, worst
from behavgen.report.figure import Figure
from behavgen.report.numbers import percent_text, si_text
from behavgen.report.overlay import drawn_curves, overlay_legend, overlay_panels, spotlights

__all__ = ["energy_figure", "energy_law_words"]

_ENDS = ("takes most", "takes least")
_LAWS = {
    "constant": "The emitted energy is the same at every overdrive.",
    "delay": "The emitted energy is a fixed part and a power that is drawn while the cell decides.",
    "overdrive": "The emitted energy grows with the logarithm of a smaller overdrive, inside the "
    "tabulated ones.",
}


def energy_law_words(effect: EnergyEffect) -> str:
    """Say what law the energy follows, and to which clock period it belongs."""
    period = effect.cycle_time_s
    belongs = f" It belongs to a clock period of {si_text(period, 's')}." if period else ""
    return _LAWS[effect.law] + belongs


def energy_figure(model: ComparatorModel, reference: Reference, middle: Condition) -> Figure | None:
    """Return table and model over overdrive, errors under them; None without either."""
    members = curves(model, reference, "energy")
    if model.energy is None or not members:
        return None
    drawn = drawn_curves(members)
    chosen = spotlights(drawn, middle, [float(c.y.max()) for c in drawn], _ENDS)
    low, high = spanning(*(c.x for c in drawn), logarithmic=True)
    x = PlotAxis(label="Overdrive", unit="V", low=low, high=high, logarithmic=True, most_ticks=7)
    low, high = spanning(*(c.y for c in drawn), *(c.line_y for c in drawn))
    y = PlotAxis(label="Energy of a decision", unit="J", low=max(low, 0.0), high=high)
    chart = Chart(
        name="energy", title="Energy of a decision over overdrive",
        description=f"{len(drawn)} conditions: markers are table rows, lines the emitted model; "
        f"below, the model's error in per cent, at most {percent_text(worst(drawn))}.",
        panels=overlay_panels(drawn, chosen, x, y, "Model against table"),
    )  # fmt: skip
    return Figure(svg=draw_chart(chart), caption=_caption(members, drawn),
                  legend=overlay_legend(drawn, chosen))  # fmt: skip


def _caption(members: Sequence[Curve], drawn: Sequence[Curve]) -> str:
    text = (
        "Markers: table rows; lines: the emitted model. Below: model against table, "
        f"{percent_text(rms(members))} rms, {percent_text(worst(members))} at worst."
    )
    if len(drawn) < len(members):
        text += f" Of {len(members)} conditions the {len(drawn)} that fit worst are drawn."
    shared = shared_words([c.condition for c in members])
    return f"{text} All at {shared}." if shared else text
