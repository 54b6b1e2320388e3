"""Modules of the user's own: what they lack is left out and told, the rest is exact."""

from __future__ import annotations

import re

import pytest

from behavgen.check.check import check
from behavgen.check.given import given_text, own_text, playable
from behavgen.check.runs import plan_batches
from behavgen.check.wishes import Wishes
from behavgen.emit.emitted_file import EmittedFile
from tests.check.by_hand import hand_model, hand_text
from tests.check.checking import emitted_text, failures
from tests.example_models import full_model, minimal_model, renamed_pins_model


def checked_given(model, text, folder, questions=("decisions",)):
    file = EmittedFile(path="mine.sv", text=text)
    return check(model, file, folder=folder, wishes=Wishes(questions=questions), given=True)


def without_flag(text: str) -> str:
    """Return the hand-written module without its unresolved pin."""
    text = text.replace(
        "  output logic outn,\n  output logic unresolved\n", "  output logic outn\n"
    )
    return re.sub(r"\s*unresolved = 1'b[01];", "", text)


@pytest.mark.slow
@pytest.mark.parametrize("change", [str, without_flag], ids=["with flag", "without flag"])
def test_a_hand_written_module_agrees(change, tmp_path):
    text = change(hand_text())
    report = checked_given(hand_model(), text, tmp_path)
    assert failures_of(report) == []
    assert report.passed
    assert report.decisions > 5000
    left_out = " ".join(report.left_out)
    assert "tosses another coin" in left_out
    assert "reads no +behavgen_seed" in left_out
    assert "disturbances, messages and insides" in left_out


def failures_of(report):
    return [words for words in failures(report) if not words.startswith("short")]


@pytest.mark.slow
def test_a_hand_written_module_that_is_wrong_is_told(tmp_path):
    text = hand_text().replace("TRIP_V = 0.003", "TRIP_V = 0.003001")
    report = checked_given(hand_model(), text, tmp_path)
    assert not report.passed
    assert report.disagreements[0].what in ("bit", "delay")


@pytest.mark.parametrize("model", [full_model(), minimal_model()], ids=lambda m: m.cell.name)
def test_an_emitted_module_lacks_nothing(model):
    given = given_text(model, emitted_text(model))
    assert not given.foreign
    assert given.parameters == own_text(model).parameters
    batches = plan_batches(model)
    assert playable(given, batches) == (batches, ())


def test_missing_pins_and_parameters_are_seen():
    model = renamed_pins_model()
    text = re.sub(r"\b(unresolved|FORCE_UNRESOLVED_EVERY|NOISE_ON)\b", "x", emitted_text(model))
    given = given_text(model, text)
    assert given.model.cell.pins.unresolved is None
    assert given.model.cell.pins.enable == "en"
    assert given.switchable.noise is None
    assert given.switchable.mismatch is not None
    _, left_out = playable(given, plan_batches(model))
    assert "run forced unresolved: the module has no parameter NOISE_ON" in left_out
    assert "run forced unresolved, delay off: the module has no parameter NOISE_ON" in left_out


@pytest.mark.slow
def test_other_noise_of_the_same_distribution_is_judged_by_it(tmp_path):
    """Another step of the stream: other numbers, decisions with noise off are still exact."""
    model = full_model()
    text = emitted_text(model).replace("9e37_79b9_7f4a_7c15", "9e37_79b9_7f4a_7c17")
    report = checked_given(model, text, tmp_path, ("decisions", "distribution"))
    assert failures_of(report) == []
    assert report.passed
    assert any("draws other random numbers" in words for words in report.left_out)
    assert len(report.distribution) > 20
