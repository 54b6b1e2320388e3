"""Blocks are shared out among processes, and a block that was not played is told."""

import pytest

from behavgen.check.block_results import block_results, merged_strata
from behavgen.check.blocks import BlockOutcome, PlayedBatch, share_out
from behavgen.check.given import own_text
from behavgen.check.runs import Batch, Run, Settings
from behavgen.check.verdict import Stratum
from behavgen.simulators.process import Finished
from tests.example_models import complete_model, full_model

SETTINGS = Settings(process="typ", temperature_c=27.0)
RUNS = tuple(
    Run(index=n, name=f"run {n}", given=SETTINGS, meant=SETTINGS, decisions=10) for n in range(7)
)


@pytest.mark.parametrize("parts", [1, 2, 3, 7, 20])
def test_sharing_out_keeps_every_run_and_neighbours_together(parts):
    shares = share_out(Batch(name="all", plusargs=(), runs=RUNS), parts)
    assert [run.index for share in shares for run in share.runs] == list(range(7))
    assert len(shares) == min(parts, 7)
    sizes = [len(share.runs) for share in shares]
    assert max(sizes) - min(sizes) <= 1
    assert len({share.name for share in shares}) == len(shares)


def played(tmp_path, said, **outcome):
    log = tmp_path / "one.log"
    log.write_text(said)
    batch = Batch(name="one", plusargs=(), runs=RUNS[:1])
    block = BlockOutcome(run=RUNS[0], **outcome)
    return PlayedBatch(batch=batch, finished=Finished(code=0, log=log), blocks=(block,))


def failed(model, one):
    return {r.name: r.message for r in block_results(own_text(model), [one]) if not r.passed}


def test_a_block_that_agrees(tmp_path):
    assert failed(full_model(), played(tmp_path, "[block] 0 played\n", compared=10)) == {}


def test_a_block_that_does_not_end_is_told(tmp_path):
    assert failed(full_model(), played(tmp_path, "", compared=10)) == {
        "every block is played to its end: run 0": "one.log does not say so"
    }


def test_a_block_without_a_record_fails_every_sentence(tmp_path):
    found = failed(complete_model(), played(tmp_path, "", problem="0.events is missing"))
    assert set(found.values()) == {"0.events is missing"}
    assert "every decision takes its energy: run 0" in found


def test_a_fault_is_told_with_its_first_decision(tmp_path):
    one = played(tmp_path, "[block] 0 played\n", faults=(("bit", 3, 5),), compared=10)
    assert failed(full_model(), one) == {
        "every bit is that of the reference: run 0":
            "bit wrong in 3 of 10 decisions, first in decision 5"
    }  # fmt: skip


def test_strata_of_runs_add_up():
    one = Stratum(group="g", name="a", required=5, decisions=3, disagreements=1)
    other = Stratum(group="g", name="b", required=1, decisions=1)
    found = merged_strata([(one, other), (one,)])
    assert found == (
        Stratum(group="g", name="a", required=5, decisions=6, disagreements=2), other
    )  # fmt: skip
