"""The plan of runs covers processes, temperatures, switches and modes."""

from collections import Counter

import pytest

from behavgen.check.runs import plan_batches, reference_of
from behavgen.formulas.random_stream import path_seed
from tests.example_models import full_model, minimal_model, renamed_pins_model

MODELS = [full_model(), minimal_model(), renamed_pins_model()]


def runs_of(model, **options):
    return [run for batch in plan_batches(model, **options) for run in batch.runs]


@pytest.mark.parametrize("model", MODELS, ids=lambda model: model.cell.name)
def test_names_and_indices_are_unique_and_all_decisions_planned(model):
    runs = runs_of(model)
    assert max(Counter(run.name for run in runs).values()) == 1
    assert [run.index for run in runs] == list(range(len(runs)))
    assert sum(run.decisions for run in runs) >= 20_000


def test_every_process_meets_both_ends_of_the_temperature_and_more():
    runs = runs_of(full_model())
    for process in ("typ", "slow"):
        met = {run.meant.temperature_c for run in runs if run.meant.process == process}
        assert {-40.0, 125.0} <= met
        assert len(met) >= 5
    met = {run.meant.temperature_c for run in runs}
    assert min(met) < -40.0
    assert max(met) > 125.0


def test_every_mode_and_switch_is_met():
    settings = [run.meant for run in runs_of(full_model())]
    assert {s.unresolved_mode for s in settings} == {0, 1, 2}
    for name in ("noise_on", "mismatch_on", "delay_on"):
        assert {getattr(s, name) for s in settings} == {True, False}
    assert {s.offset_shift_v > 0 for s in settings if s.offset_shift_v} == {True, False}


def test_the_command_line_changes_everything_that_it_can():
    changed = [run for run in runs_of(full_model()) if run.given != run.meant]
    first, second = changed
    for name in ("process", "temperature_c", "noise_on", "mismatch_on", "run_seed"):
        assert getattr(first.given, name) != getattr(first.meant, name)
    assert (second.given.noise_on, second.meant.noise_on) == (True, False)
    assert (second.given.mismatch_on, second.meant.mismatch_on) == (True, False)


def test_another_seed_gives_other_temperatures_and_the_same_seed_the_same_plan():
    model = full_model()
    assert plan_batches(model, seed=3) == plan_batches(model, seed=3)
    assert plan_batches(model, seed=3) != plan_batches(model, seed=4)


def test_seed_zero_means_the_instance_path():
    model = full_model()
    run = next(run for run in runs_of(model) if run.name == "seed from the path")
    named = reference_of(model, run)
    explicit = type(named)(model, seed=path_seed(run.path), mismatch=True)
    assert named.mismatch_v() == explicit.mismatch_v()
    assert run.path == f"check_top.run_{run.index}.dut"
