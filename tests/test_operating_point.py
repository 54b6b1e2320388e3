"""Whatever is kept or folded once changes no bit."""

from __future__ import annotations

import numpy as np
import pytest

from behavgen.reference import Reference
from tests.example_models import complete_model

MODEL = complete_model()
COUNT = 20_000
OVERDRIVE_V = np.geomspace(1e-9, 1.0, COUNT)
VDD = np.linspace(0.7, 1.3, COUNT)
PROCESS = MODEL.processes[-1].name


def test_a_condition_given_once_means_the_same_as_one_given_for_each():
    once = Reference(MODEL).delay(OVERDRIVE_V, vdd=VDD, temp_c=85.0, process=PROCESS)
    each = Reference(MODEL).delay(
        OVERDRIVE_V, vdd=VDD, temp_c=np.full(COUNT, 85.0), process=np.full(COUNT, PROCESS)
    )
    assert np.array_equal(once, each)


def test_delays_asked_one_by_one_are_those_asked_together():
    together = Reference(MODEL).delay(OVERDRIVE_V, vdd=VDD)
    for n in (0, 1, 8191, 8192, 12_000, COUNT - 1):
        assert Reference(MODEL).delay(OVERDRIVE_V[n], vdd=VDD[n]) == together[n]


def test_what_was_asked_before_changes_nothing():
    asked, fresh = Reference(MODEL), Reference(MODEL)
    for small in (OVERDRIVE_V * 1e-6, OVERDRIVE_V[::-1]):
        asked.delay(small, vdd=VDD)
    assert np.array_equal(asked.delay(OVERDRIVE_V, vdd=VDD), fresh.delay(OVERDRIVE_V, vdd=VDD))


def test_a_condition_changed_in_place_is_noticed():
    reference, vdd = Reference(MODEL), VDD.copy()
    reference.delay(OVERDRIVE_V, vdd=vdd)
    vdd[7] = 0.9
    expected = Reference(MODEL).delay(OVERDRIVE_V, vdd=vdd)
    assert np.array_equal(reference.delay(OVERDRIVE_V, vdd=vdd), expected)


def test_what_is_kept_cannot_be_written_to():
    with pytest.raises(ValueError, match="read-only"):
        Reference(MODEL).offset(vdd=VDD)[0] = 1.0
