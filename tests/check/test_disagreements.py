"""Disagreements are told in words, with units and with both sides."""

import pytest

from behavgen.check.agreement import compare
from behavgen.check.disagreements import describe_disagreements
from behavgen.check.slices import PlayedRun
from behavgen.check.waveform import expect
from tests.check.hand_made import honest, record_of, run_with, three_decisions
from tests.example_models import full_model


def told(lie, tmp_path):
    run, stimulus = run_with(), three_decisions()
    expected = expect(full_model(), run, stimulus)
    record = record_of(honest(**lie), tmp_path)
    agreement = compare(expected, record)
    one = PlayedRun(run=run, stimulus=stimulus, expected=expected, agreement=agreement)
    return describe_disagreements(full_model(), one, record)


@pytest.mark.parametrize(
    ("lie", "expected", "got"),
    [
        (
            {"t150": "150 0100"},
            "outp=1 outn=0 unresolved=0",
            "outp=0 outn=1 unresolved=0",
        ),
        ({"t150": "160 1000"}, "50 fs (50 ticks)", "60 fs (60 ticks)"),
        (
            {"t350": "350 xx01"},
            "unresolved, outp=X outn=X unresolved=1 at the end of the phase",
            "outp=X outn=X unresolved=0",
        ),
        (
            {"t150": "", "t230": "200 xx11\n230 1110"},
            "resolved after 50 fs (50 ticks)",
            "unresolved, outp=X outn=X unresolved=1",
        ),
        (
            {"t230": "240 1100"},
            "outp=1 outn=1 unresolved=0 after 30 fs (30 ticks)",
            "outp=1 outn=0 unresolved=0, first change after 40 fs (40 ticks)",
        ),
        ({"t350": "350 xx12"}, "x_cause 1", "x_cause 2"),
        (
            {"t150": "150 1000\n170 0100\n171 1000"},
            "2 moments of change at most",
            "4 before the reset was over",
        ),
    ],
)
def test_both_sides_are_told(lie, expected, got, tmp_path):
    first = told(lie, tmp_path)[0]
    assert (first.expected, first.got) == (expected, got)


def test_where_and_under_which_conditions(tmp_path):
    (first,) = told({"t150": "150 0100"}, tmp_path)
    assert (first.run, first.decision, first.what) == ("by hand", 0, "bit")
    assert first.conditions == "process typ, supply 1.2 V, 27 degC, common mode 600.5 mV"
    assert first.time_s == pytest.approx(100e-15)
    assert first.overdrive_v == 1e-3


def test_agreement_has_nothing_to_tell(tmp_path):
    assert told({}, tmp_path) == ()
