"""Strata count what they name; a slice that was not looked at is short."""

from dataclasses import fields, is_dataclass, replace

import numpy as np
import pytest

from behavgen.check.agreement import compare
from behavgen.check.runs import plan_batches
from behavgen.check.slices import PlayedRun
from behavgen.check.stimulus import make_stimulus
from behavgen.check.strata import count_strata
from behavgen.check.waveform import Record, expect
from behavgen.model import Process
from behavgen.surface import Surface
from tests.example_models import complete_model, full_model, minimal_model, renamed_pins_model

EMPTY = Record(
    time=np.array([0]), state=np.array([[2, 2, 0, 5]], dtype=np.int8), energy_j=np.array([0.0])
)
MODELS = [
    full_model(),
    complete_model(),
    complete_model(time_precision="1ps", in_reset="low"),
    full_model(time_precision="1ps", in_reset="hold"),
    minimal_model(),
    renamed_pins_model(in_reset="mid"),
]


def ideal(expected):
    """Return the record of a module that does everything right."""
    times = np.stack([expected.edge, expected.ready, expected.end, expected.reset], axis=1)
    states = np.stack([expected.before, expected.shown, expected.after, expected.rest], axis=1)
    states = np.maximum(states, 0).reshape(-1, 4)
    own = np.nan_to_num(expected.energy_j)
    energy = np.cumsum(np.stack([np.zeros_like(own), own,
                                 *np.zeros((2, len(expected.edge)))], axis=1))  # fmt: skip
    changed = np.append(True, np.any(states[1:] != states[:-1], axis=1) | (np.diff(energy) != 0.0))
    return Record(time=times.ravel()[changed], state=states[changed], energy_j=energy[changed])


def played(model, runs, record=ideal, seed=1):
    for run in runs:
        stimulus = make_stimulus(model, run, seed=seed)
        expected = expect(model, run, stimulus)
        agreement = compare(expected, record(expected))
        yield PlayedRun(run=run, stimulus=stimulus, expected=expected, agreement=agreement)


def runs_of(model, seed=1):
    return [run for batch in plan_batches(model, seed=seed) for run in batch.runs]


def in_processes(value, processes):
    """Return a model, or a part of it, whose first process is there several times."""
    if isinstance(value, Surface):
        first = value.variants[0]
        return replace(value, variants=tuple(replace(first, process=p.name) for p in processes))
    if isinstance(value, tuple):
        return tuple(in_processes(one, processes) for one in value)
    if is_dataclass(value):
        parts = {f.name: in_processes(getattr(value, f.name), processes) for f in fields(value)}
        return replace(value, **parts)
    return value


def in_twelve_processes(model):
    processes = tuple(Process(name=f"p{code}", code=code) for code in range(12))
    return replace(in_processes(model, processes), processes=processes)


@pytest.mark.parametrize("model", MODELS, ids=lambda m: f"{m.cell.name} {m.cell.in_reset}")
def test_a_whole_plan_leaves_no_stratum_short(model):
    strata = count_strata(model, played(model, runs_of(model)))
    assert [stratum for stratum in strata if stratum.short] == []
    assert sum(stratum.disagreements for stratum in strata) == 0


@pytest.mark.parametrize("seed", [2, 3])
@pytest.mark.parametrize(
    "model", [minimal_model(), complete_model(), in_twelve_processes(complete_model())],
    ids=["one process", "two", "twelve"],
)  # fmt: skip
def test_no_stratum_is_filled_by_luck(model, seed):
    for stratum in count_strata(model, played(model, runs_of(model, seed), seed=seed)):
        placed_one_by_one = stratum.name == "draws beyond 6.7 sigma"
        assert stratum.decisions >= stratum.required * (1.0 if placed_one_by_one else 1.15)


def test_a_run_left_out_leaves_strata_short():
    model = full_model()
    left = [run for run in runs_of(model) if run.name != "delay off"]
    short = {(s.group, s.name) for s in count_strata(model, played(model, left)) if s.short}
    assert ("switch", "DELAY_ON = 0") not in short  # another run has it as well
    left = [run for run in left if run.meant.delay_on]
    short = {(s.group, s.name) for s in count_strata(model, played(model, left)) if s.short}
    assert ("switch", "DELAY_ON = 0") in short


def test_a_process_left_out_is_short():
    model = full_model()
    left = [run for run in runs_of(model) if run.meant.process != "slow"]
    short = {(s.group, s.name) for s in count_strata(model, played(model, left)) if s.short}
    assert ("process", "slow") in short


def test_disagreements_fall_into_the_strata_of_their_decisions():
    model = full_model()
    runs = [run for run in runs_of(model) if run.meant.process == "slow"]
    strata = {
        (s.group, s.name): s for s in count_strata(model, played(model, runs, lambda _: EMPTY))
    }
    assert strata["process", "typ"].disagreements == 0
    slow = strata["process", "slow"]
    assert slow.disagreements > 0.9 * slow.decisions


def test_effects_that_are_absent_have_no_strata():
    groups = {s.group for s in count_strata(minimal_model(), ())}
    assert groups.isdisjoint({"noise on", "temperature", "supply", "common mode"})
    assert {"noise on", "temperature"} <= {s.group for s in count_strata(full_model(), ())}
