"""The check's outcome in words and tables."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from behavgen.check.mutation.summary import MutationSummary
from behavgen.check.power_words import power_words
from behavgen.check.verdict import CheckReport, Disagreement, Stratum
from behavgen.files import sha256_of_text
from behavgen.model import ComparatorModel
from behavgen.model_file import dump_model
from behavgen.report.closure_tables import (
    closure_table,
    distribution_table,
    left_out_table,
)
from behavgen.report.numbers import ABSENT, count_text, si_text
from behavgen.report.tabulation import Column, Row, Table

__all__ = ["Findings", "findings", "findings_of"]

_MOST_SHOWN = 24


@dataclass(frozen=True, slots=True, kw_only=True)
class Findings:
    """What the page says about the check.

    Parameters
    ----------
    status : str
        ``"passed"``, ``"failed"``, ``"stale"`` or ``"absent"``.
    headline, sentence : str
        The verdict in three words and in full.
    tables : tuple of Table
    hashes : tuple of (str, str)
        What was checked, and its SHA-256.
    """

    status: str
    headline: str
    sentence: str
    tables: tuple[Table, ...] = ()
    hashes: tuple[tuple[str, str], ...] = ()


def findings(
    model: ComparatorModel, check: CheckReport | None, mutants: MutationSummary | None = None
) -> Findings:
    """Return the outcome; a check of another model file does not speak for this one.

    Parameters
    ----------
    model : ComparatorModel
    check : CheckReport or None
    mutants : MutationSummary or None
        Of the emitted text.
    """
    if check is None:
        return Findings(
            status="absent", headline="Not checked yet",
            sentence="No emitted text of this model has been compared with the reference in a "
            "simulator yet. Next: behavgen check.",
        )  # fmt: skip
    if check.model_sha256 != sha256_of_text(dump_model(model)):
        return Findings(
            status="stale", headline="Check is out of date", tables=_tables(check),
            hashes=_hashes(check),
            sentence="The last check was made with another version of this model file, so that its "
            f"result ({_outcome(check)}) says nothing about this one. Next: behavgen check.",
        )  # fmt: skip
    return findings_of(check, mutants)


def findings_of(check: CheckReport, mutants: MutationSummary | None = None) -> Findings:
    """Return the outcome of a check that is known to speak for the model at hand."""
    tried = "" if mutants is None else f" {_capital(mutants.words)}."
    return Findings(status=_outcome(check), headline=f"Check {_outcome(check)}",
                    sentence=_sentence(check) + tried, tables=_tables(check),
                    hashes=_hashes(check))  # fmt: skip


def _hashes(check: CheckReport) -> tuple[tuple[str, str], ...]:
    return (("model file", check.model_sha256), ("emitted text", check.emitted_sha256))


def _outcome(check: CheckReport) -> str:
    return "passed" if check.passed else "failed"


def _sentence(check: CheckReport) -> str:
    compared = f"{count_text(check.decisions)} decisions of the emitted text in {check.simulator}"
    if check.passed:
        return (
            f"{compared} agree with the reference; the largest delay difference is "
            f"{check.worst_delay_ticks} units of the time precision. "
            f"{_count(len(check.benches), 'bench', 'benches')} passed and every stratum of the "
            "stimulus was exercised as often as required." + _answers(check)
        )
    faults = [
        _count(sum(not b.passed for b in check.benches), "bench failed", "benches failed"),
        _count(check.disagreement_count, "decision disagrees", "decisions disagree"),
        _count(sum(map(_short, check.strata)), "stratum is too thin", "strata are too thin"),
    ]
    real = [fault for fault in faults if not fault.startswith("0 ")]
    return f"{compared} were compared with the reference: {', '.join(real) or 'it did not pass'}."


def _answers(check: CheckReport) -> str:
    """Return what else was asked, of a check that passed."""
    words = ""
    if check.closure:
        rows = _count(sum(one.rows for one in check.closure), "table row", "table rows")
        words += f" Characterised anew in simulation, the model gives {rows} back."
    if check.distribution:
        statistics = _count(len(check.distribution), "statistic", "statistics")
        words += f" {statistics} of its random part are as they must be."
    return words + "".join(f" {_capital(one)}." for one in power_words(check))


def _capital(words: str) -> str:
    return words[:1].upper() + words[1:]


def _count(number: int, one: str, many: str) -> str:
    return f"{count_text(number)} {one if number == 1 else many}"


def _short(stratum: Stratum) -> bool:
    return stratum.decisions < stratum.required


def _tables(check: CheckReport) -> tuple[Table, ...]:
    candidates = (
        _disagreement_table(check),
        closure_table(check),
        distribution_table(check),
        left_out_table(check),
        _bench_table(check),
        *(_stratum_table(group, [s for s in check.strata if s.group == group])
          for group in dict.fromkeys(s.group for s in check.strata)),
    )  # fmt: skip
    return tuple(table for table in candidates if table is not None)


def _bench_table(check: CheckReport) -> Table | None:
    if not check.benches:
        return None
    rows = tuple(
        Row(
            cells=(bench.name, "✓ passed" if bench.passed else "✗ failed", bench.message or ABSENT),
            mark="" if bench.passed else "bad",
        )
        for bench in check.benches
    )
    columns = (Column(title="bench"), Column(title="outcome"), Column(title="message"))
    return Table(caption="Benches", columns=columns, rows=rows)


def _stratum_table(group: str, strata: Sequence[Stratum]) -> Table:
    columns = (Column(title=group), Column(title="decisions", numeric=True),
               Column(title="required", numeric=True), Column(title="disagree", numeric=True),
               Column(title="outcome"))  # fmt: skip
    return Table(caption=f"Decisions by {group}", columns=columns,
                 rows=tuple(map(_stratum_row, strata)))  # fmt: skip


def _stratum_row(stratum: Stratum) -> Row:
    faults = (["✗ too few"] if _short(stratum) else []) + (
        ["✗ disagrees"] if stratum.disagreements else []
    )
    return Row(
        cells=(stratum.name, count_text(stratum.decisions), count_text(stratum.required),
               count_text(stratum.disagreements), ", ".join(faults) or "✓ enough, all agree"),
        mark="bad" if faults else "",
    )  # fmt: skip


def _disagreement_table(check: CheckReport) -> Table | None:
    if not check.disagreements:
        return None
    shown = check.disagreements[:_MOST_SHOWN]
    titles = (("run", False), ("decision", True), ("time", True), ("conditions", False),
              ("input", True), ("overdrive", True), ("what", False), ("expected", False),
              ("got", False))  # fmt: skip
    total = max(check.disagreement_count, len(check.disagreements))
    return Table(
        caption=f"Disagreements, {count_text(len(shown))} of {count_text(total)}",
        columns=tuple(Column(title=t, numeric=n) for t, n in titles),
        rows=tuple(Row(cells=_disagreement_cells(d), mark="bad") for d in shown),
    )


def _disagreement_cells(found: Disagreement) -> tuple[str, ...]:
    return (
        found.run, count_text(found.decision), si_text(found.time_s, "s", 6), found.conditions,
        si_text(found.vdiff_v, "V", 4), si_text(found.overdrive_v, "V", 4), found.what,
        found.expected, found.got,
    )  # fmt: skip
