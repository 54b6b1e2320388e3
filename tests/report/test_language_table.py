"""The languages side by side on the page."""

from __future__ import annotations

from dataclasses import replace

from behavgen.check.languages import (
    ComparedDecision,
    LanguageColumn,
    LanguageComparison,
    Outcome,
)
from behavgen.report.language_table import language_sentence, language_table
from behavgen.report.page import report_page
from tests.example_models import minimal_model

RESOLVED = ComparedDecision(
    words="overdrive", process="typ", vdd_v=1.2, temp_c=27.0, vcm_v=0.65, overdrive_v=-1e-3,
    bit=0, delay_s=250e-12,
)  # fmt: skip
BALANCED = replace(RESOLVED, words="balanced input", overdrive_v=1e-17, bit=-1, delay_s=0.0)
COLUMN = LanguageColumn(
    simulator="Icarus Verilog", language="SystemVerilog", tolerance="one unit of time",
    version="Icarus Verilog 99",
    outcomes=(Outcome(bit=0, delay_s=249.5e-12, agrees=True),
              Outcome(bit=-1, delay_s=0.0, agrees=True)),
)  # fmt: skip
ABSENT = LanguageColumn(
    simulator="VACASK", language="Verilog-A, continuous", tolerance="1 %", problem="not installed"
)
COMPARISON = LanguageComparison(
    cell="latch", model_sha256="0" * 64, decisions=(RESOLVED, BALANCED), columns=(COLUMN, ABSENT)
)


def test_each_decision_is_a_row_with_the_difference_to_the_reference():
    table = language_table(COMPARISON)
    first, second = table.rows
    assert first.cells[2:] == (
        "\N{MINUS SIGN}1\N{NO-BREAK SPACE}mV", "0 after 250.000 ps",
        "0 after 249.500 ps (\N{MINUS SIGN}0.5000)", "not installed",
    )  # fmt: skip
    assert second.cells[2:] == ("0", "unresolved", "unresolved", "not installed")
    assert [column.title for column in table.columns][-2:] == [
        "SystemVerilog, in Icarus Verilog 99", "Verilog-A, continuous, in VACASK",
    ]  # fmt: skip
    assert not any(row.mark for row in table.rows)


def test_disagreement_is_marked_and_said():
    wrong = replace(COLUMN, outcomes=(replace(COLUMN.outcomes[0], agrees=False),
                                      COLUMN.outcomes[1]))  # fmt: skip
    comparison = replace(COMPARISON, columns=(wrong, ABSENT))
    first, second = language_table(comparison).rows
    assert (first.mark, first.flag) == ("bad", "not in Icarus Verilog")
    assert second.mark == ""
    assert "do not all agree" in language_sentence(comparison)
    assert "agree with the reference" in language_sentence(COMPARISON)
    assert "Not installed: VACASK; see behavgen tools." in language_sentence(COMPARISON)


def test_the_page_shows_the_table_only_where_languages_were_compared():
    assert "Languages side by side" not in report_page(minimal_model(), None)
    page = report_page(minimal_model(), None, COMPARISON)
    assert "Languages side by side" in page
    assert "not installed" in page
