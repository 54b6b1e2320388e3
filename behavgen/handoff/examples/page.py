"""The page of the converter examples, and each figure as an SVG file of its own."""

from __future__ import annotations

from collections.abc import Sequence

from markupsafe import Markup

from behavgen.handoff.examples.experiment import FALSE_ALARM, SIGMAS, Experiment
from behavgen.model import ComparatorModel
from behavgen.report.axes import PlotAxis, spanning
from behavgen.report.cautions import cautions, is_invented
from behavgen.report.charts import Chart, Dots, Line, Panel, draw_chart, swatch
from behavgen.report.figure import Figure, LegendEntry
from behavgen.report.html import csp_hash, html_environment, shipped_text

__all__ = ["examples_page", "experiment_figure"]

_HEIGHT = 260.0


def experiment_figure(experiment: Experiment) -> Figure:
    """Return the figure of an experiment: the closed form, and what was counted."""
    x = PlotAxis(
        label=experiment.x_label, unit=experiment.x_unit,
        low=spanning(experiment.law_x, experiment.x)[0],
        high=spanning(experiment.law_x, experiment.x)[1],
    )  # fmt: skip
    shown = (experiment.law_y, experiment.low, experiment.high)
    low, high = spanning(*shown, logarithmic=experiment.logarithmic)
    y = PlotAxis(
        label=experiment.y_label, unit=experiment.y_unit, low=low, high=high,
        logarithmic=experiment.logarithmic,
    )  # fmt: skip
    layers = (
        Line(x=experiment.law_x, y=experiment.law_y, style="s0", title="closed form"),
        Dots(x=experiment.x, y=experiment.measured, low=experiment.low, high=experiment.high,
             marker="square", style="s1", title="simulated"),
    )  # fmt: skip
    chart = Chart(
        name=experiment.name, title=experiment.title,
        description="The line is the closed form, squares with bars are the simulated converter.",
        panels=(Panel(x=x, y=y, layers=layers, height=_HEIGHT),),
    )  # fmt: skip
    legend = (
        LegendEntry(sample=swatch("s0"), text=f"closed form: {experiment.law}"),
        LegendEntry(sample=swatch("s1", "square", line=False),
                    text=f"simulated: {experiment.trials}; bars {SIGMAS:g} standard errors"),
    )  # fmt: skip
    verdict = "agrees with" if experiment.agrees else "DISAGREES with"
    caption = f"{experiment.title}: the simulated converter {verdict} its closed form."
    return Figure(svg=draw_chart(chart), caption=caption, legend=legend)


def examples_page(model: ComparatorModel, experiments: Sequence[Experiment]) -> str:
    """Return a self-contained page of all experiments."""
    style = shipped_text("report/style.css")
    against = [one.title for one in experiments if not one.agrees]
    return html_environment().get_template("handoff/examples/page.html").render(
        name=model.cell.name,
        description=model.cell.description,
        invented=is_invented(model),
        status="failed" if against else "passed",
        headline="A converter disagrees with its closed form" if against
        else "Every converter agrees with its closed form",
        false_alarm=f"{FALSE_ALARM:g}",
        figures=[experiment_figure(one) for one in experiments],
        cautions=cautions(model, None),
        style=Markup(style),
        style_hash=csp_hash(style),
    )  # fmt: skip
