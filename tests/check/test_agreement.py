"""An honest record agrees; every kind of lie is told by its name."""

import pytest

from behavgen.check.agreement import FAULTS, compare
from behavgen.check.waveform import expect
from tests.check.hand_made import honest, record_of, run_with, three_decisions
from tests.example_models import full_model


def compared(lines, tmp_path):
    expected = expect(full_model(), run_with(), three_decisions())
    return compare(expected, record_of(lines, tmp_path))


def faults(lines, tmp_path):
    return [FAULTS[code] for code in compared(lines, tmp_path).fault]


def test_an_honest_record_agrees(tmp_path):
    found = compared(honest(), tmp_path)
    assert not found.fault.any()
    assert found.compared.all()
    assert found.timed.tolist() == [True, False, True]
    assert not found.delay_error.any()


@pytest.mark.parametrize("moment", [149, 151])
def test_a_tick_is_tolerated_and_counted(moment, tmp_path):
    found = compared(honest(t150=f"{moment} 1000"), tmp_path)
    assert not found.fault.any()
    assert found.delay_error.tolist() == [moment - 150, 0, 0]
    assert found.rounds_alike


def test_more_than_a_few_ticks_are_another_rounding(tmp_path):
    found = compared(honest(t150="151 1000", t560="561 0100"), tmp_path)
    assert not found.fault.any()
    assert not found.rounds_alike


@pytest.mark.parametrize(
    ("lie", "fault", "decision"),
    [
        ({"t150": "150 0100"}, "bit", 0),
        ({"t150": "150 0000"}, "bit", 0),
        ({"t150": "152 1000"}, "delay", 0),
        ({"t150": "148 1000"}, "delay", 0),
        ({"t150": "150 1010"}, "unresolved", 0),
        ({"t150": "150 1002"}, "x_cause", 0),
        ({"t230": "232 1100"}, "reset", 0),
        ({"t230": "228 1100"}, "reset", 0),
        ({"t230": "230 0000"}, "reset", 0),
        ({"t150": "", "t230": "200 xx11\n230 1110"}, "unresolved", 0),
        ({"t350": "330 1000\n350 xx11"}, "unresolved", 1),
        ({"t350": "350 xx01"}, "unresolved", 1),
        ({"t350": "351 xx11"}, "unresolved", 1),
        ({"t350": "350 1011"}, "unresolved", 1),
        ({"t350": "350 xx12"}, "x_cause", 1),
        ({"t380": "380 1101"}, "reset", 1),
        ({"t150": "120 1010\n121 1100\n150 1000"}, "stray change", 0),
        ({"t150": "150 1000\n170 0100\n171 1000"}, "stray change", 0),
        ({"t230": "210 1100\n211 1000\n230 1100"}, "stray change", 0),
        ({"t560": "560 0100\n610 1100"}, "reset", 2),
    ],
)
def test_a_lie_is_told_by_its_name(lie, fault, decision, tmp_path):
    found = faults(honest(**lie), tmp_path)
    assert found[decision] == fault
    assert not any(found[:decision])


def test_a_module_that_does_nothing_is_wrong_everywhere(tmp_path):
    assert all(faults("0 xx05\n", tmp_path))
