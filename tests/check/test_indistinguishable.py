"""Rules excuse exactly what makes no difference."""

import re

import pytest

from behavgen.check.mutation.indistinguishable import reason_for
from behavgen.check.mutation.inertness import inertness_of
from behavgen.check.mutation.mutants import mutants_of
from tests.check.checking import emitted_text
from tests.example_models import complete_model

MODEL = complete_model()
TEXT = emitted_text(MODEL)
INERTNESS = inertness_of(MODEL)
MUTANTS = mutants_of(TEXT, inputs=("inp", "inn"), outputs=("outp", "outn"))


def reasons(line, was, becomes):
    """Return why mutants of some lines are excused; "" for each that is not."""
    lines = TEXT.splitlines()
    found = [
        reason_for(mutant, TEXT, INERTNESS)
        for mutant in MUTANTS
        if re.search(line, lines[mutant.line - 1])
        and (mutant.was, mutant.becomes) == (was, becomes)
    ]
    assert found, "no such mutant: name its successor"
    return found


EXCUSED = [
    (r"clamped = vdd_v", ">", ">=", "at a tie"),
    (r"real tau_s = 0\.0", "0.0", "1.0", "overwritten"),
    (r"if \(!segment_known\[1\]\)", "(!segment_known[1])", "(1'b1)", "worked out again"),
    (r"return moment < ", "0.5", "0.505", "femtoseconds"),
    (r"magnitude_v >= 0\.03\b", ">=", ">", "continuous"),
    (r"if \(slope_last < 3\.0 \* chord\)", "(slope_last < 3.0 * chord)", "(1'b0)", "limit"),
]
KEPT = [
    (r"clamped = vdd_v", ">", "<="),
    (r"if \(!segment_known\[1\]\)", "(!segment_known[1])", "(1'b0)"),
    (r"real mismatch_v = 0\.0", "0.0", "1.0"),
    (r"int x_cause = 5", "5", "6"),
    (r"return moment < ", "<", ">="),
    (r"centred >= -0\.425", "<=", ">"),
    (r"magnitude_v >= 0\.03\b", "0.03", "0.0303"),
    (r"overdrive_v = \(", "-", "+"),
    (r"void_waits = void_waits \+ 1;$", "+", "-"),
    (r"localparam real CERTAIN_SIGMAS", "8.3", "8.217"),
    (r"GOLDEN = ", "64'h9e37_79b9_7f4a_7c15", "64'h9e3779b97f4a7c14"),
]


@pytest.mark.parametrize(("line", "was", "becomes", "words"), EXCUSED)
def test_what_makes_no_difference_is_excused(line, was, becomes, words):
    assert all(words in reason for reason in reasons(line, was, becomes))


@pytest.mark.parametrize(("line", "was", "becomes"), KEPT)
def test_what_makes_a_difference_is_not(line, was, becomes):
    assert "" in reasons(line, was, becomes)


def test_no_rule_excuses_a_coefficient_of_the_model():
    """Numbers that surfaces are made of stand in no line that a rule knows."""
    body = [m for m in MUTANTS if m.kind == "constant" and re.search(r"\d{6}", m.was)]
    fitted = [
        m
        for m in body
        if re.search(r"t0v0c0 = -?" + re.escape(m.was), TEXT.splitlines()[m.line - 1])
    ]
    assert len(fitted) > 10
    assert not [m for m in fitted if reason_for(m, TEXT, INERTNESS)]


def test_at_most_a_seventh_is_excused():
    excused = sum(bool(reason_for(mutant, TEXT, INERTNESS)) for mutant in MUTANTS)
    assert excused < len(MUTANTS) / 7
