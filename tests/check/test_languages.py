"""The emitted languages side by side: what is compared, and what each simulator says of it."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from behavgen.check import languages
from behavgen.check.language_cases import language_cases
from behavgen.check.language_runs import RUNS, Found, Played
from behavgen.check.languages import compare_languages, load_languages
from behavgen.demo import copy_demo
from behavgen.errors import ModelFileError
from behavgen.fit.fit import fit
from behavgen.project import load_project
from behavgen.reference import Reference
from behavgen.tables.read import read_tables
from tests.example_models import complete_model, minimal_model, renamed_pins_model

LATCH_130N = Path(__file__).parents[1] / "data" / "latch_130n"


def parrot(late_s=0.0, flipped=False):
    """Return a runner that says what the reference says, or something near it."""

    def play(model, cases, folder):
        reference, found = Reference(model, noise=False), []
        for case in cases:
            trace = reference.trace(
                [phase.vdiff_v for phase in case.phases],
                [round(phase.length_s * 1e15) for phase in case.phases],
                [-1, *(round(phase.reset_s * 1e15) for phase in case.phases[1:])],
                **case.condition,
            )
            if trace.unresolved[-1]:
                found.append(Found(bit=-1, delay_s=0.0))
            else:
                delay_s = float(reference.delay(abs(trace.overdrive_v[-1]), **case.condition))
                bit = int(trace.leaning[-1]) ^ flipped
                found.append(Found(bit=bit, delay_s=delay_s + late_s))
        return Played(version="parrot 1", found=tuple(found))

    return play


@pytest.fixture
def parrots(monkeypatch):
    """Put a runner in the place of each simulator, all of them installed."""

    def put(**changes):
        for name in RUNS:
            monkeypatch.setitem(RUNS, name, changes.get(name.split()[0].lower(), parrot()))
        monkeypatch.setattr(languages, "_missing", lambda name: "")

    return put


def test_the_decisions_are_spread_over_the_range_and_over_what_can_happen():
    model = complete_model()
    cases = language_cases(model)
    assert cases == language_cases(model)
    assert 12 <= len(cases) <= 20
    assert {case.process for case in cases} == {"typ", "slow"}
    assert min(case.vdd_v for case in cases) == pytest.approx(1.08, abs=1e-6)
    assert max(case.temp_c for case in cases) == pytest.approx(125.0, abs=1e-2)
    assert {case.vcm_v for case in cases} > {0.5}
    words = [case.words for case in cases]
    for kind in ("balanced input", "memory of a one", "memory of a zero", "process"):
        assert kind in words
    assert len(language_cases(minimal_model())) < len(cases)


def test_all_agree_where_all_say_what_the_reference_says(parrots, tmp_path):
    parrots()
    comparison = compare_languages(complete_model(), folder=tmp_path)
    assert comparison.passed
    assert [column.simulator for column in comparison.columns] == list(RUNS)
    bits = [decision.bit for decision in comparison.decisions]
    assert set(bits) == {-1, 0, 1}
    assert load_languages(tmp_path, complete_model()) == comparison
    assert load_languages(tmp_path, minimal_model()) is None
    assert load_languages(tmp_path / "elsewhere", complete_model()) is None


@pytest.mark.parametrize(
    ("name", "wrong"),
    [
        ("icarus", {"late_s": 3e-15}), ("verilator", {"late_s": -3e-15}),
        ("vacask", {"late_s": 5e-12}), ("evas-sim", {"late_s": 0.02e-12}),
        ("icarus", {"flipped": True}), ("vacask", {"flipped": True}),
    ],
)  # fmt: skip
def test_a_language_that_says_something_else_is_caught(name, wrong, parrots):
    parrots(**{name: parrot(**wrong)})
    comparison = compare_languages(complete_model())
    assert not comparison.passed
    against = [c.simulator for c in comparison.columns if not all(o.agrees for o in c.outcomes)]
    assert [simulator.split()[0].lower() for simulator in against] == [name]


def test_what_is_not_installed_is_named_and_not_held_against_the_cell(parrots, monkeypatch):
    parrots()
    missing = {"VACASK": "not installed", "evas-sim": "not installed"}
    monkeypatch.setattr(languages, "_missing", lambda name: missing.get(name, ""))
    comparison = compare_languages(complete_model())
    assert comparison.passed
    told = {column.simulator: column.problem for column in comparison.columns}
    assert told == {"Icarus Verilog": "", "Verilator": "", **missing}


def test_a_broken_result_says_how_to_get_a_new_one(tmp_path):
    file = tmp_path / "check" / "languages.json"
    file.parent.mkdir()
    file.write_text("{}")
    with pytest.raises(ModelFileError, match="behavgen check --languages"):
        load_languages(tmp_path, complete_model())


# -- In the simulators ---------------------------------------------------------------------------


def only(monkeypatch, *names):
    """Say of all other simulators that they are not installed."""
    monkeypatch.setattr(
        languages, "_missing", lambda name: "" if name in names else "not installed"
    )


@pytest.mark.slow
@pytest.mark.parametrize(
    "model",
    [
        complete_model(in_reset="hold"), complete_model(in_reset="mid"),
        complete_model(in_reset="low", decides_on="falling"), minimal_model(),
        renamed_pins_model(), replace(minimal_model(), delay=None),
        complete_model(time_precision="1ps"),
    ],
    ids=["hold", "mid", "low falling", "minimal", "renamed", "nothing", "picoseconds"],
)  # fmt: skip
def test_every_form_of_a_cell_agrees(model, monkeypatch):
    only(monkeypatch, "Icarus Verilog", "VACASK", "evas-sim")
    comparison = compare_languages(model)
    assert [bool(column.outcomes) for column in comparison.columns] == [True, False, True, True]
    assert_agreement(comparison)


def assert_agreement(comparison):
    for column in comparison.columns:
        for decision, outcome in zip(comparison.decisions, column.outcomes, strict=False):
            assert outcome.agrees, (column.simulator, decision, outcome)


def assert_tolerances(comparison, tick_s):
    """Repeat by hand what each language is held to; delays of the reference are whole ticks."""
    icarus, verilator, vacask, event = comparison.columns
    for column in comparison.columns:
        assert len(column.outcomes) == len(comparison.decisions) >= 12, column.problem
    for number, decision in enumerate(comparison.decisions):
        bits = {column.outcomes[number].bit for column in comparison.columns}
        assert bits == {decision.bit}, decision
        late = [abs(column.outcomes[number].delay_s - decision.delay_s)
                for column in (icarus, verilator, vacask, event)]  # fmt: skip
        assert late[0] <= 1.01 * tick_s, decision
        assert late[1] <= 1.01 * tick_s, decision
        assert late[2] <= max(0.01 * decision.delay_s, 1e-12), decision
        assert late[3] <= 0.01e-12 + 0.51 * tick_s, decision
    assert_agreement(comparison)


@pytest.mark.slow
def test_all_simulators_agree_on_the_characterised_latch():
    project = load_project(LATCH_130N)
    model = fit(read_tables(project, "latch_130n"), project.cells[0])
    comparison = compare_languages(model)
    assert {decision.words for decision in comparison.decisions} >= {
        "overdrive", "condition", "process", "balanced input", "memory of a one",
    }  # fmt: skip
    assert_tolerances(comparison, 1e-15)


@pytest.mark.slow
@pytest.mark.parametrize("number", [0, 1])
def test_all_simulators_agree_on_the_demo(number, tmp_path):
    project = load_project(copy_demo(tmp_path))
    cell = project.cells[number]
    model = fit(read_tables(project, cell.name), cell)
    assert_tolerances(compare_languages(model), model.cell.time_unit_s)
