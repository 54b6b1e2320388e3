"""The report page: one HTML file that needs nothing else and runs no script."""

from __future__ import annotations

from dataclasses import dataclass

from markupsafe import Markup

from behavgen.bands import Bands
from behavgen.check.languages import LanguageComparison
from behavgen.check.mutation.summary import MutationSummary
from behavgen.check.verdict import CheckReport
from behavgen.model import ComparatorModel
from behavgen.reference import Reference
from behavgen.report.aperture_figures import aperture_figure
from behavgen.report.cautions import cautions, is_invented
from behavgen.report.conditions import condition_words, middle_condition
from behavgen.report.curves import Curve, curves
from behavgen.report.delay_figures import delay_alone, delay_multiples, delay_overview
from behavgen.report.energy_figures import energy_figure, energy_law_words
from behavgen.report.figure import Figure, Multiples
from behavgen.report.findings import Findings, findings
from behavgen.report.html import csp_hash, html_environment, shipped_text
from behavgen.report.key_numbers import KeyNumber, key_numbers, middle_numbers
from behavgen.report.language_table import language_sentence, language_table
from behavgen.report.memory_figures import memory_figure
from behavgen.report.noise_figures import (
    observed_sigmas,
    s_curve_multiples,
    standardised_s_curves,
)
from behavgen.report.offset_figures import offset_multiples
from behavgen.report.reset_words import reset_sentence
from behavgen.report.scope import Effect, effects
from behavgen.report.summary import fit_sentences
from behavgen.report.symbol import draw_symbol
from behavgen.report.tabulation import (
    Table,
    fit_tables,
    kickback_table,
    parameter_table,
    source_table,
)
from behavgen.report.timing import draw_timing, timing_words
from behavgen.report.validity import ValidityRow, validity_rows
from behavgen.report.window_figures import window_figure, window_from_delay

__all__ = ["report_page"]


@dataclass(frozen=True, slots=True, kw_only=True)
class _Drawings:
    """Figures of the page; None where there is nothing to draw."""

    symbol: str
    timing: str
    timing_words: str
    delay: Figure | None
    delay_small: Multiples | None
    window: Figure | None
    noise: Figure | None
    noise_small: Multiples | None
    offset: Multiples | None
    memory: Figure | None
    aperture: Figure | None
    energy: Figure | None


@dataclass(frozen=True, slots=True, kw_only=True)
class _Content:
    """Everything the template prints."""

    model: ComparatorModel
    invented: bool
    findings: Findings
    fit_sentences: tuple[str, ...]
    key_numbers: tuple[KeyNumber, ...]
    middle_numbers: tuple[KeyNumber, ...]
    middle: str
    drawings: _Drawings
    reset: str
    energy_law: str
    kickback: Table | None
    fit_tables: tuple[Table, ...]
    parameters: Table | None
    validity: tuple[ValidityRow, ...]
    sources: Table | None
    effects: tuple[Effect, ...]
    cautions: tuple[str, ...]
    languages: Table | None
    languages_agree: str


def report_page(
    model: ComparatorModel,
    check: CheckReport | None,
    languages: LanguageComparison | None = None,
    mutants: MutationSummary | None = None,
) -> str:
    """Return the report of a cell as one self-contained HTML page.

    Parameters
    ----------
    model : ComparatorModel
    check : CheckReport or None
        None: not checked yet, which the page says.
    languages : LanguageComparison or None
        None: the languages were not compared.
    mutants : MutationSummary or None
        None: no mutants of the emitted text were tried.

    Returns
    -------
    str
        HTML with its own style and drawings; no script, and a content security
        policy that lets the page load nothing.
    """
    style = shipped_text("report/style.css").strip()
    template = html_environment().get_template("report/page.html")
    return template.render(
        content=_content(model, check, languages, mutants), style=Markup(style),
        style_hash=csp_hash(style),
    )  # fmt: skip


def _content(
    model: ComparatorModel,
    check: CheckReport | None,
    languages: LanguageComparison | None,
    mutants: MutationSummary | None,
) -> _Content:
    reference = Reference(model)
    middle = middle_condition(model)
    return _Content(
        model=model,
        invented=is_invented(model),
        findings=findings(model, check, mutants),
        fit_sentences=fit_sentences(model),
        key_numbers=key_numbers(model.parameters),
        middle_numbers=middle_numbers(model, Bands(model), middle),
        middle=condition_words(middle),
        drawings=_drawings(model, reference),
        reset=reset_sentence(model, reference),
        energy_law=energy_law_words(model.energy) if model.energy else "",
        kickback=kickback_table(model),
        fit_tables=fit_tables(model),
        parameters=parameter_table(model.parameters),
        validity=validity_rows(model),
        sources=source_table(model.sources),
        effects=effects(model),
        cautions=cautions(model, observed_sigmas(curves(model, reference, "noise"))),
        languages=language_table(languages) if languages else None,
        languages_agree=language_sentence(languages) if languages else "",
    )


def _drawings(model: ComparatorModel, reference: Reference) -> _Drawings:
    delays = curves(model, reference, "delay") if model.delay else ()
    noise = curves(model, reference, "noise") if model.noise else ()
    return _Drawings(
        symbol=draw_symbol(model.cell),
        timing=draw_timing(model.cell),
        timing_words=timing_words(model.cell),
        delay=_delay(model, reference, delays),
        delay_small=delay_multiples(delays) if delays else None,
        window=_window(model, reference),
        noise=standardised_s_curves(noise, reference),
        noise_small=s_curve_multiples(noise, reference, Bands(model)),
        offset=offset_multiples(model),
        memory=memory_figure(model, reference, middle_condition(model)),
        aperture=aperture_figure(model),
        energy=energy_figure(model, reference, middle_condition(model)),
    )


def _delay(
    model: ComparatorModel, reference: Reference, delays: tuple[Curve, ...]
) -> Figure | None:
    if model.delay is None:
        return None
    middle = middle_condition(model)
    return delay_overview(delays, middle) if delays else delay_alone(model, reference, middle)


def _window(model: ComparatorModel, reference: Reference) -> Figure | None:
    if model.delay is None:
        return None
    middle = middle_condition(model)
    windows = curves(model, reference, "window")
    if windows:
        return window_figure(windows, middle)
    return window_from_delay(model, reference, middle)
