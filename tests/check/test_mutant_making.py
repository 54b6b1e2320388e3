"""Mutants are complete, each is one change, and words stay as they are."""

import re

import pytest

from behavgen.check.mutation.mutants import mutants_of
from tests.check.checking import emitted_text
from tests.example_models import full_model

TOY = """\
// keep 1.5 and vdd < 2
module toy (
  input real inp
);
  localparam bit [1:0] IDLE = 2'd0;
  task select_process;
    case (process_code)
      0: begin  // typ
        x = 1.5;
      end
      3: ;  // slow
      default: $fatal(1, "unknown < 3 || worse");
    endcase
  endtask
  always @(posedge clk) begin
    if (inp - inn > 0.25) begin
      y = -half(inp) * 2.0 + x;
    end
    case (step)
      2'b01: decide;
    endcase
  end
endmodule
"""


def changes(text):
    return {
        (mutant.line, mutant.was, mutant.becomes)
        for mutant in mutants_of(text, inputs=("inp", "inn"), outputs=("outp", "outn"))
    }


WANTED = {
    (5, "2'd0", "2'd1"),
    (8, "0", "3"),
    (11, "3", "0"),
    (9, "1.5", "1.515"),
    (9, "1.5", "1.485"),
    (9, "x = 1.5;", ";"),
    (15, "posedge", "negedge"),
    (16, "-", "+"),
    (16, ">", ">="),
    (16, ">", "<="),
    (16, "(inp - inn > 0.25)", "(1'b1)"),
    (16, "(inp - inn > 0.25)", "(1'b0)"),
    (16, "inp", "inn"),
    (16, "inn", "inp"),
    (16, "0.25", "0.2525"),
    (17, "-", ""),
    (17, "*", "/"),
    (17, "+", "-"),
    (17, "y = -half(inp) * 2.0 + x;", ";"),
    (20, "2'b01", "2'b10"),
    (20, "decide;", ";"),
}


@pytest.mark.parametrize("change", sorted(WANTED), ids=str)
def test_a_change_is_made(change):
    assert change in changes(TOY)


def test_comments_strings_widths_and_other_names_stay():
    lines = {line for line, *_ in changes(TOY)}
    assert 1 not in lines
    assert not [change for change in changes(TOY) if change[0] == 12 and "unknown" in change[1]]
    assert (5, "1", "2") not in changes(TOY)


def test_each_mutant_is_one_change_of_its_own():
    text = emitted_text(full_model())
    mutants = mutants_of(text, inputs=("inp", "inn"), outputs=("outp", "outn"))
    assert len(mutants) > 500
    assert len({mutant.applied_to(text) for mutant in mutants}) == len(mutants)
    for mutant in mutants:
        changed = mutant.applied_to(text)
        assert changed != text
        assert changed[: mutant.start] == text[: mutant.start]
        assert text.endswith(changed[mutant.start + len(mutant.becomes) :])


def test_every_number_of_a_surface_is_changed_both_ways():
    text = emitted_text(full_model())
    mutants = mutants_of(text, inputs=("inp", "inn"), outputs=("outp", "outn"))
    changed = {mutant.start for mutant in mutants if mutant.kind == "constant"}
    body = text[text.index("task select_process") :]
    numbers = re.finditer(r"(?<![\w.'])\d+\.\d{6,}(?:e-?\d+)?", body)
    starts = {text.index(body) + number.start() for number in numbers}
    assert len(starts) > 30
    assert starts <= changed
