"""Mutants of the emitted text: each is caught, or nobody can tell it from the original.

Most are made mechanically. A few changes that no rule makes are made by hand:
in strings, in the tenth digit of a constant, of several places at once.
"""

import re

import pytest

from behavgen.check.mutation.indistinguishable import reason_for
from behavgen.check.mutation.inertness import inertness_of
from behavgen.check.mutation.mutants import mutants_of
from behavgen.check.mutation.mutation import try_mutants
from behavgen.check.probe.probe import prepare_probe, probe_text
from behavgen.simulators.icarus import find_icarus
from tests.check.checking import checked, emitted_text, failures, shorten
from tests.example_models import complete_model, full_model

pytestmark = pytest.mark.slow
MODEL = full_model()

SAMPLE = 40
EXCUSED = 12
"""Tried of each kind; `make mutants` tries all."""


def test_mutants_drawn_at_random_are_caught():
    model = complete_model()
    report = try_mutants(model, emitted_text(model), sample=SAMPLE, seed=5)
    assert [trial.mutant.words for trial in report.missed] == []
    assert len(report.trials) == SAMPLE
    assert sum(report.caught.values()) > SAMPLE // 2


def test_nothing_tells_excused_mutants_from_the_original(tmp_path):
    model = complete_model()
    text, inertness = emitted_text(model), inertness_of(model)
    (tmp_path / "stimulus").mkdir()
    probe = prepare_probe(model, tmp_path / "stimulus", seed=8)
    mutants = mutants_of(text, inputs=("inp", "inn"), outputs=("outp", "outn"))
    excused = [mutant for mutant in mutants if reason_for(mutant, text, inertness)]
    assert len(excused) < len(mutants) // 5
    for mutant in excused[:: len(excused) // EXCUSED]:
        seen = probe_text(find_icarus(), probe, mutant.applied_to(text), tmp_path / "work")
        assert seen == "", mutant.words


def swapped_edge(found):
    """Return a step of the clock with the other direction."""
    return f"2'b{found[2]}{found[1]}: begin"


EDITS = {
    "a factor of the mixing function": ("94d0_49bb_1331_11eb", "94d0_49bb_1331_11ed"),
    "a centre constant, tenth digit": (r"3\.3430575583588128105e4", "3.3430575593588128105e4"),
    "a flank constant, tenth digit": (r"2\.27238449892691845833e-2",
                                      "2.27238449992691845833e-2"),
    "a tail constant, ninth digit": (r"2\.65321895265761230930e-2", "2.65321896265761230930e-2"),
    "deciding edge": (r"2'b([01])([01]): begin", swapped_edge),
    "deciding on a step from X": (
        r"case \(\{clk_level, clk\}\)",
        "case ({clk_level === 1'b1, clk})",
    ),
    "a phase that is a tick too short": (
        r"\|\| is_due\(edge_time \+ delay_ticks\)",
        "|| is_due(edge_time + delay_ticks - 1.0)",
    ),
    "temperature from the command line": ("behavgen_temp_c=", "behavgen_temperature="),
    "seed from the command line": ("behavgen_seed=", "behavgen_sed="),
    "a warning in other words": ("common mode %g V is outside", "common mode %g V outside"),
    "decision count while off": (
        r"decision_count = decision_count \+ 64'd1",
        "if (is_on) decision_count = decision_count + 64'd1",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", EDITS)
def test_a_changed_text_is_caught(name, tmp_path, monkeypatch):
    pattern, replacement = EDITS[name]
    text, count = re.subn(pattern, replacement, emitted_text(MODEL))
    assert count > 0, f"the emitted text has no {pattern} any more: name its successor"
    shorten(monkeypatch)
    report = checked(MODEL, tmp_path, text)
    assert not report.passed
    assert "the text compiles" not in {bench.name for bench in report.benches}
    assert [words for words in failures(report) if not words.startswith("short")]


def test_the_unchanged_text_is_not_caught(tmp_path, monkeypatch):
    shorten(monkeypatch)
    report = checked(MODEL, tmp_path)
    assert [words for words in failures(report) if not words.startswith("short")] == []
