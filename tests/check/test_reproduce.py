"""One decision of a check again: the same finding, its likely term, and its waveforms."""

from __future__ import annotations

import re
from dataclasses import replace

import pytest

from behavgen.check.reproduce import reproduce
from behavgen.errors import ProjectError
from tests.check.checking import checked, emitted_text, shorten
from tests.example_models import complete_model

MODEL = complete_model()


def wrong_texts():
    """Return texts by the term that they have wrong."""
    text = emitted_text(MODEL)
    slow = {"typ": 3, "slow": 0}
    swapped = replace(
        MODEL, processes=tuple(replace(p, code=slow[p.name]) for p in MODEL.processes)
    )
    return {
        "as if without memory": emitted_text(replace(MODEL, memory=None)),
        "as if of the process": emitted_text(swapped),
        "as if without noise": emitted_text(replace(MODEL, noise=None)),
        "as if without OFFSET_SHIFT_V": re.sub(r"\+ OFFSET_SHIFT_V", "+ 0.0", text),
    }


@pytest.mark.slow
@pytest.mark.parametrize(
    "term",
    ["as if without memory", "as if of the process", "as if without noise",
     "as if without OFFSET_SHIFT_V"],
)  # fmt: skip
def test_the_likely_term_is_named(term, tmp_path, monkeypatch):
    shorten(monkeypatch)
    report = checked(MODEL, tmp_path, wrong_texts()[term])
    terms = [one.term for one in report.disagreements]
    assert any(found.startswith(term) for found in terms), terms


@pytest.mark.slow
def test_a_disagreement_is_reproduced_alone_with_its_waveforms(tmp_path, monkeypatch):
    text = wrong_texts()["as if without memory"]
    report = checked(MODEL, tmp_path, text)
    first = next(one for one in report.disagreements if one.what == "bit")
    assert re.fullmatch(r"--run '.+' --decision \d+", first.reproduce)
    vcd = tmp_path / "window.vcd"
    again = reproduce(MODEL, text, run=first.run, decision=first.decision, waveforms=vcd)
    assert again.disagreement == first
    waves = vcd.read_text()
    for name in ("clk", "inp", "outp", "energy_j"):
        assert re.search(rf"\$var \w+ +\d+ \S+ {name}\b", waves), name


def test_a_decision_that_agrees_says_so():
    found = reproduce(MODEL, emitted_text(MODEL), run="typ, noise on", decision=7)
    assert found.disagreement is None
    found = reproduce(MODEL, emitted_text(MODEL), run="without a rhythm 1", decision=7)
    assert found.disagreement is None


@pytest.mark.parametrize(
    ("run", "decision", "said"),
    [("nothing", 0, "no run 'nothing'"), ("typ, noise on", 10**6, "has no decision 1000000")],
)
def test_what_is_not_there_is_told(run, decision, said):
    with pytest.raises(ProjectError, match=re.escape(said)):
        reproduce(MODEL, emitted_text(MODEL), run=run, decision=decision)
