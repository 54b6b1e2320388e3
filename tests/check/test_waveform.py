"""Expectations by hand, and records as the harness writes them."""

import numpy as np
import pytest

from behavgen.check.waveform import ANY, expect, read_record
from tests.check.hand_made import record_of, run_with, three_decisions
from tests.example_models import full_model, renamed_pins_model

X = 2


def expected(mode=0, pins_of=full_model, **cell):
    return expect(pins_of(**cell), run_with(unresolved_mode=mode), three_decisions())


def states(found):
    """Outputs and flag of every decision before, shown, after and at rest."""
    return np.stack([found.before, found.shown, found.after, found.rest], axis=1)[:, :, :3].tolist()


def test_three_decisions_worked_out_by_hand():
    found = expected()
    assert states(found) == [
        [[1, 1, ANY], [1, 0, 0], [1, 0, 0], [1, 1, 0]],
        [[1, 1, 0], [1, 1, 0], [X, X, 1], [1, 1, 1]],
        [[1, 1, 1], [0, 1, 0], [0, 1, 0], [0, 1, 0]],
    ]
    assert found.ready.tolist() == [150, 350, 560]
    assert found.reset.tolist() == [230, 380, 620]
    assert found.returns.tolist() == [True, True, False]
    assert not found.excluded.any()


@pytest.mark.parametrize(
    ("mode", "outputs"), [(0, [X, X]), (1, [1, 0]), (2, [1, 1])], ids=["x", "coin", "hold"]
)
def test_unresolved_outputs_of_each_mode(mode, outputs):
    assert expected(mode).after[1, :3].tolist() == [*outputs, 1]


@pytest.mark.parametrize(
    ("in_reset", "rest"),
    [("high", [1, 1]), ("low", [0, 0]), ("mid", [X, X]), ("hold", [1, 0])],
)
def test_reset_states(in_reset, rest):
    assert expected(in_reset=in_reset).rest[0, :2].tolist() == rest


def test_a_holding_cell_keeps_x_through_the_reset_until_the_next_ready():
    found = expected(in_reset="hold")
    assert found.before[0, :2].tolist() == [X, X]
    assert found.rest[1, :2].tolist() == [X, X]
    assert found.before[2, :2].tolist() == [X, X]
    assert found.rest[1, 3] == ANY


def test_causes():
    found = expected()
    assert found.after[:, 3].tolist() == [0, 1, 0]
    assert found.rest[:, 3].tolist() == [0, 0, 0]


def test_pins_that_the_cell_does_not_have_are_not_judged():
    found = expected(pins_of=renamed_pins_model)
    assert set(found.shown[:, 1].tolist()) == {ANY}


def test_decisions_at_a_boundary_are_excluded_with_the_one_that_follows():
    stimulus = three_decisions()
    stimulus.trace.delay_ticks[0] = 99
    found = expect(full_model(), run_with(), stimulus)
    assert found.excluded.tolist() == [True, True, False]


def test_a_record_reads_back(tmp_path):
    record = record_of("700 xx05\n12345678901 10zx\n", tmp_path)
    assert record.time.tolist() == [0, 12345678201]
    assert record.state.tolist() == [[X, X, 0, 5], [1, 0, 3, ANY]]


def test_states_changes_and_first_changes_by_hand(tmp_path):
    record = record_of("0 xx05\n10 1100\n20 1000\n", tmp_path)
    assert record.at(np.array([0, 9, 10, 25])).tolist() == [
        [X, X, 0, 5], [X, X, 0, 5], [1, 1, 0, 0], [1, 0, 0, 0],
    ]  # fmt: skip
    after, until = np.array([0, 10, 20, 5]), np.array([9, 20, 30, 2])
    assert record.changes(after, until).tolist() == [0, 1, 0, 0]
    assert record.first_change(np.array([0, 10, 20])).tolist() == [10, 20, -1]


@pytest.mark.parametrize("raw", [b"", b"                   1xx05", b"1 xx05\n"])
def test_a_torn_record_is_refused(raw, tmp_path):
    path = tmp_path / "0.events"
    path.write_bytes(raw)
    with pytest.raises(ValueError, match=r"0\.events is not a whole record"):
        read_record(path)
