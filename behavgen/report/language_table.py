"""The emitted languages side by side: each on the same decisions, beside the reference."""

from __future__ import annotations

from behavgen.check.languages import ComparedDecision, LanguageColumn, LanguageComparison, Outcome
from behavgen.report.numbers import si_text, temperature_text, volts_text
from behavgen.report.tabulation import Column, Row, Table
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["language_sentence", "language_table"]

_UNRESOLVED = "unresolved"
_MINUS = "\N{MINUS SIGN}"
_BALANCED_V = 1e-15
"""Below it an overdrive is what rounding leaves of none."""


def language_sentence(comparison: LanguageComparison) -> str:
    """Say in a sentence what the table shows."""
    run = [column for column in comparison.columns if column.outcomes]
    absent = [column.simulator for column in comparison.columns if not column.outcomes]
    if not run:
        return "No simulator for any of the languages is installed: see behavgen tools."
    verdict = "agree with the reference" if comparison.passed else "do not all agree"
    missing = f" Not installed: {', '.join(absent)}; see behavgen tools." if absent else ""
    return (
        f"{len(run)} simulators {verdict} in {len(comparison.decisions)} decisions, noise off, "
        "each within its tolerance: "
        + "; ".join(f"{one.simulator} {one.tolerance}" for one in run)
        + f".{missing}"
    )


def language_table(comparison: LanguageComparison) -> Table:
    """Return one row a decision: the reference, then what each language says."""
    named = (("decision", False), ("condition", False), ("overdrive", True), ("reference", True))
    columns = (
        *(Column(title=title, numeric=numeric) for title, numeric in named),
        *(Column(title=_title(column), numeric=True) for column in comparison.columns),
    )
    rows = tuple(
        _row(decision, number, comparison) for number, decision in enumerate(comparison.decisions)
    )
    return Table(caption="The emitted languages side by side", columns=columns, rows=rows)


def _title(column: LanguageColumn) -> str:
    return f"{column.language}, in {column.version or column.simulator}"


def _row(decision: ComparedDecision, number: int, comparison: LanguageComparison) -> Row:
    against = [
        column.simulator
        for column in comparison.columns
        if column.outcomes and not column.outcomes[number].agrees
    ]
    return Row(
        cells=(
            decision.words,
            _condition(decision),
            si_text(decision.overdrive_v, "V") if abs(decision.overdrive_v) > _BALANCED_V else "0",
            _decided(decision.bit, decision.delay_s),
            *(_cell(column, number, decision) for column in comparison.columns),
        ),
        mark="bad" if against else "",
        flag=f"not in {', '.join(against)}" if against else "",
    )


def _condition(decision: ComparedDecision) -> str:
    temperature = temperature_text(decision.temp_c + ZERO_CELSIUS_K)
    supply, common = volts_text(decision.vdd_v), volts_text(decision.vcm_v)
    return f"{decision.process}, {supply}, {temperature}, common mode {common}"


def _cell(column: LanguageColumn, number: int, decision: ComparedDecision) -> str:
    if not column.outcomes:
        return column.problem
    outcome: Outcome = column.outcomes[number]
    text = _decided(outcome.bit, outcome.delay_s)
    if outcome.bit < 0 or decision.bit < 0:
        return text
    difference = f"{(outcome.delay_s - decision.delay_s) * 1e12:+.4f}"
    return f"{text} ({difference.replace('-', _MINUS)})"


def _decided(bit: int, delay_s: float) -> str:
    return _UNRESOLVED if bit < 0 else f"{bit} after {delay_s * 1e12:.3f} ps"
