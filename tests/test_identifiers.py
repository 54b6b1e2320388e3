"""Keyword lists against an independent SystemVerilog parser, and the names users may choose."""

from __future__ import annotations

import pyslang
import pytest

from behavgen.identifiers import (
    SYSTEMVERILOG_KEYWORDS,
    VERILOG_A_KEYWORDS,
    identifier_fault,
    pin_fault,
)


def slang_accepts(pin: str) -> bool:
    tree = pyslang.syntax.SyntaxTree.fromText(f"module m(input logic {pin}); endmodule")
    return not list(tree.diagnostics)


def test_slang_refuses_every_listed_systemverilog_keyword():
    assert [word for word in SYSTEMVERILOG_KEYWORDS if slang_accepts(word)] == []


def test_no_systemverilog_keyword_of_slang_is_missing():
    kinds = [name for name in dir(pyslang.parsing.TokenKind) if name.endswith("Keyword")]
    spelled = {word.replace("_", "") for word in SYSTEMVERILOG_KEYWORDS}
    missing = [kind for kind in kinds if kind.removesuffix("Keyword").lower() not in spelled]
    assert missing == []
    assert len(SYSTEMVERILOG_KEYWORDS) == 248  # IEEE 1800-2017, Annex B


@pytest.mark.parametrize("name", ["transition", "above", "ground", "ln", "wreal", "branch", "idt"])
def test_words_of_verilog_a_alone_are_refused(name):
    assert slang_accepts(name)
    assert name in VERILOG_A_KEYWORDS
    assert "Verilog-A keyword" in identifier_fault(name)


@pytest.mark.parametrize("name", ["latch_130n", "vip", "CK", "_x", "a1"])
def test_plain_names_are_accepted(name):
    assert identifier_fault(name) == ""
    assert pin_fault(name) == ""


@pytest.mark.parametrize("name", ["", "1a", "a-b", "a b", "a.b", "a\n", "\u00e4", "x" * 300])
def test_what_is_no_identifier_is_refused(name):
    assert identifier_fault(name)


@pytest.mark.parametrize("name", ["SEED", "x_cause", "decision_count", "electrical"])
def test_names_that_emitted_modules_use_are_no_pins(name):
    assert "taken" in pin_fault(name)
