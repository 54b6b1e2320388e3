"""The data sheet: one HTML page that needs nothing else, with a calculator that runs in it."""

from __future__ import annotations

from dataclasses import dataclass

from markupsafe import Markup

from behavgen.bands import Bands
from behavgen.check.verdict import CheckReport
from behavgen.handoff.data_sheet_curves import Curves, Traffic, drawn_curves_of
from behavgen.handoff.data_sheet_parameters import ParameterRow, places, typical_rows
from behavgen.handoff.data_sheet_tool import LEVEL, Tool, calculator
from behavgen.handoff.disclosure import without_origins
from behavgen.handoff.ports import Port, ports
from behavgen.model import ComparatorModel
from behavgen.report.cautions import cautions, is_invented
from behavgen.report.conditions import condition_words, middle_condition
from behavgen.report.curves import curves
from behavgen.report.energy_figures import energy_law_words
from behavgen.report.findings import Findings, findings_of
from behavgen.report.html import csp_hash, html_environment, shipped_text
from behavgen.report.noise_figures import observed_sigmas
from behavgen.report.numbers import count_text
from behavgen.report.scope import Effect, effects
from behavgen.report.summary import fit_sentences
from behavgen.report.symbol import draw_symbol
from behavgen.report.timing import draw_timing, timing_words
from behavgen.report.validity import ValidityRow, validity_rows

__all__ = ["data_sheet"]

_SCRIPTS = ("normal", "model", "prediction", "text", "tool")
"""In the order in which one builds on the other."""
_FIRST_ASKED = ("Delay", "Regeneration", "Noise", "Mismatch")
_NOT_CHECKED = Findings(
    status="absent", headline="Not checked",
    sentence="The emitted text in its present state has not been compared with the reference.",
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class _Source:
    """A table that went into the model, without its name."""

    quantity: str
    rows: str
    sha256: str


@dataclass(frozen=True, slots=True, kw_only=True)
class _Content:
    """Everything the template prints."""

    model: ComparatorModel
    invented: bool
    caution_note: str
    pins: tuple[Port, ...]
    symbol: str
    timing: str
    timing_words: str
    validity: tuple[ValidityRow, ...]
    middle: str
    highlights: tuple[ParameterRow, ...]
    parameters: tuple[ParameterRow, ...]
    places: str
    tool: Tool | None
    curves: Curves
    energy_law: str
    effects: tuple[Effect, ...]
    findings: Findings
    fit_sentences: tuple[str, ...]
    excluded: tuple[str, ...]
    sources: tuple[_Source, ...]
    cautions: tuple[str, ...]


def data_sheet(model: ComparatorModel, check: CheckReport | None, *, caution_note: str = "") -> str:
    """Return the data sheet of a cell as one self-contained HTML page.

    Parameters
    ----------
    model : ComparatorModel
    check : CheckReport or None
        Of exactly this model; None: not checked, which the page says.
    caution_note : str
        A sentence that stands at the page's top and on each printed sheet.

    Returns
    -------
    str
        HTML with its own style, drawings and script; its content security policy allows
        these texts alone and lets the page load nothing. It names no file.
    """
    content = _content(without_origins(model), check, caution_note)
    style = "\n".join(
        (shipped_text("report/style.css"), shipped_text("handoff/data_sheet.css"),
         _running_heads(model.cell.name, caution_note))
    ).strip()  # fmt: skip
    script = _script() if content.tool else ""
    return html_environment().get_template("handoff/data_sheet.html").render(
        content=content, style=Markup(style), style_hash=csp_hash(style),
        script=Markup(script), script_hash=csp_hash(script) if script else "",
    )  # fmt: skip


def _content(model: ComparatorModel, check: CheckReport | None, note: str) -> _Content:
    bands, tool = Bands(model, LEVEL), calculator(model)
    parameters = typical_rows(model, bands)
    noise = curves(model, bands.reference, "noise")
    return _Content(
        model=model,
        invented=is_invented(model),
        caution_note=note,
        pins=ports(model.cell),
        symbol=draw_symbol(model.cell),
        timing=draw_timing(model.cell),
        timing_words=timing_words(model.cell),
        validity=validity_rows(model),
        middle=condition_words(middle_condition(model)),
        highlights=_highlights(parameters),
        parameters=parameters,
        places=count_text(len(places(model)) - 1),
        tool=tool,
        curves=drawn_curves_of(model, bands, _traffic(tool)),
        energy_law=energy_law_words(model.energy) if model.energy else "",
        effects=effects(model),
        findings=findings_of(check) if check else _NOT_CHECKED,
        fit_sentences=fit_sentences(model),
        excluded=_excluded(check),
        sources=tuple(
            _Source(quantity=s.quantity, rows=count_text(s.rows), sha256=s.sha256)
            for s in model.sources
        ),
        cautions=cautions(model, observed_sigmas(noise)),
    )


def _highlights(rows: tuple[ParameterRow, ...]) -> tuple[ParameterRow, ...]:
    """Return one row for each of the names that people ask for first; of delays a middle one."""
    named = {name: [row for row in rows if row.name == name] for name in _FIRST_ASKED}
    return tuple(found[len(found) // 2] for found in named.values() if found)


def _traffic(tool: Tool | None) -> Traffic | None:
    """Return what the calculator starts with."""
    if tool is None or not tool.times:
        return None
    _, clock = tool.times
    return Traffic(span_v=tool.span.value * tool.span.scale, clock_hz=clock.value * clock.scale)


def _excluded(check: CheckReport | None) -> tuple[str, ...]:
    """Say what a check cannot show."""
    left_out = (
        (f"{count_text(check.excluded)} decisions, in which the rounding of a time to one tick "
         "decides between two outcomes.",) if check and check.excluded else ()
    )  # fmt: skip
    return (
        *left_out,
        "Whether the tables are right: the check compares emitted text with a reference, and "
        "both with the tables, never with silicon.",
        "Operating points and stimuli outside the stated ranges.",
        "Other simulators and versions than the one named; the self-checking bench of the package "
        "repeats part of the comparison in yours.",
        "The Verilog-A files: the decisions counted here were played through SystemVerilog.",
    )


def _script() -> str:
    parts = (shipped_text(f"handoff/data_sheet_{name}.js") for name in _SCRIPTS)
    return '"use strict";\n' + "\n".join(parts)


def _running_heads(name: str, note: str) -> str:
    """Return the margins of printed pages: cell, page number and the note."""
    foot = f"{name} \N{EN DASH} comparator data sheet"
    return (
        "@page {\n"
        f"  @top-left {{ content: {_css_string(note)}; }}\n"
        f"  @bottom-left {{ content: {_css_string(foot)}; }}\n"
        '  @bottom-right { content: counter(page) " / " counter(pages); }\n'
        "}\n"
    )


def _css_string(text: str) -> str:
    """Write a CSS string in which nothing can end the string, the style or its element.

    W3C, CSS Syntax Level 3, 4.3.7: a backslash, the code point in hexadecimal and a space.
    """
    plain = (c if c.isalnum() or c in " .,;:" else f"\\{ord(c):x} " for c in text)
    return f'"{"".join(plain)}"'
