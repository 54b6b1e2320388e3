"""A module written by hand from the words: memory, aperture and energy agree, and lies are told.

It knows no X on its clock, no coin and no warnings; runs that toss a coin are left out here.
"""

from __future__ import annotations

import pytest

from behavgen.check import blocks as block_playing
from behavgen.check.block_results import merged_strata
from behavgen.check.blocks import play_batches
from behavgen.check.given import given_text
from behavgen.check.harness import harness_macros, top_text
from behavgen.check.runs import Batch, plan_batches
from behavgen.check.simulation import IcarusSimulation
from behavgen.simulators.icarus import find_icarus
from tests.check.by_hand import hand_model, hand_text

MODEL = hand_model()


def blocks_of(folder, text, decisions=12_000):
    """Play all runs without a coin to a text; return what came of them."""
    plain = plan_batches(MODEL, decisions=decisions)[0]
    runs = tuple(run for run in plain.runs if run.meant.unresolved_mode != 1)
    simulation = IcarusSimulation(icarus=find_icarus(), work=folder, logs=folder)
    compiled = simulation.compile(
        MODEL.cell.name, text, top_text(MODEL, plain.runs), harness_macros(MODEL, text)
    )
    assert compiled.code == 0, compiled.tail()
    batches = [Batch(name=str(run.index), plusargs=(), runs=(run,)) for run in runs]
    played = play_batches(simulation, given_text(MODEL, text), batches, seed=1, jobs=2)
    return [block for one in played for block in one.blocks]


def test_what_follows_the_words_agrees_to_the_last_place(tmp_path, monkeypatch):
    monkeypatch.setattr(block_playing, "LEAST_OVERDRIVE_V", 0.0)
    blocks = blocks_of(tmp_path, hand_text())
    assert [(b.run.name, b.problem, b.faults) for b in blocks if b.problem or b.faults] == []
    strata = {(s.group, s.name): s.decisions for s in merged_strata(b.strata for b in blocks)}
    for group, name in (
        ("memory", "decides the bit"),
        ("memory", "at its cap"),
        ("memory", "some of it too old to count"),
        ("input", "of the edge would decide otherwise"),
        ("decision phase", "ends at the sampling"),
        ("energy", "of unresolved decisions"),
    ):
        assert strata[group, name] > 50, (group, name)


LIES = {
    "memory against the previous decision": ("shift = last *", "shift = -last *", "bit"),
    "memory of an unresolved decision": ("      last = 0;\n", "", "bit"),
    "a cap one part in a thousand higher": ("MOST_V = 0.02;", "MOST_V = 0.02002;", "bit"),
    "a time constant one percent longer": ("FAST_S = 1.2e-11", "FAST_S = 1.212e-11", "bit"),
    "a floor one percent higher": ("LEFT_V = 2.0e-4", "LEFT_V = 2.02e-4", "bit"),
    "memory from the decision edge": ("reset_time = $realtime", "reset_time = edge_time", "bit"),
    "input taken at the edge": ("    #(aperture);\n", "", "bit"),
    "an aperture of half its length": ("APERTURE_S = 7.0e-12", "APERTURE_S = 3.5e-12", "bit"),
    "energy one part in a million higher": ("FIXED_J = 4.0e-14", "FIXED_J = 4.00001e-14", "energy"),
    "no energy for what does not resolve": (
        "      energy_j = energy_j + (FIXED_J + RISE_W * (($realtime - edge_time) / 1e15));\n",
        "", "energy",
    ),
}  # fmt: skip


@pytest.mark.slow
@pytest.mark.parametrize("name", LIES)
def test_a_lie_is_told_by_its_name(name, tmp_path):
    old, new, kind = LIES[name]
    text = hand_text()
    assert old in text
    blocks = blocks_of(tmp_path, text.replace(old, new, 1), decisions=1)
    assert kind in {found for block in blocks for found, _, _ in block.faults}
