"""The module decides as the reference does: whole blocks of decisions, played from files."""

# ruff: noqa: D103  the names are sentences

from __future__ import annotations

from functools import cache

import cocotb
import numpy as np
from cocotb.triggers import Combine, RisingEdge, Timer

from behavgen.check.agreement import FAULTS, Agreement
from behavgen.check.bench_files import compare_run, open_batch

BATCH = open_batch()
each_run = cocotb.parametrize(run=[run.index for run in BATCH.played])


@cache
def agreement(run: int) -> Agreement:
    """Return what the bench found in a run."""
    return compare_run(BATCH.folder, run)


def refuse(run: int, fault: str) -> None:
    """Fail when decisions of a run have a fault."""
    wrong = np.flatnonzero(agreement(run).fault == FAULTS.index(fault))
    if len(wrong):
        count = f"{len(wrong)} of {len(agreement(run).fault)} decisions"
        raise AssertionError(f"{fault} wrong in {count}, first in decision {wrong[0]}")


@cocotb.test()
async def every_block_is_played_to_its_end(top) -> None:
    """Play all blocks of the batch side by side."""
    units = [getattr(top, run.instance) for run in BATCH.played]
    await Timer(10, "step")
    for unit in units:
        unit.start.value = 1
    await Combine(*(RisingEdge(unit.done) for unit in units))
    await Timer(1, "step")


@cocotb.test()
@each_run
async def every_bit_is_that_of_the_reference(_top, run: int) -> None:
    refuse(run, "bit")


@cocotb.test()
@each_run
async def every_decision_resolves_when_it_should(_top, run: int) -> None:
    refuse(run, "unresolved")


@cocotb.test()
@each_run
async def every_delay_agrees_within_a_tick(_top, run: int) -> None:
    refuse(run, "delay")


@cocotb.test()
@each_run
async def delays_are_rounded_alike(_top, run: int) -> None:
    found = agreement(run)
    off = int((found.delay_error != 0).sum())
    assert found.rounds_alike, f"{off} of {int(found.timed.sum())} delays are off by a tick or more"


@cocotb.test()
@each_run
async def the_reset_state_returns_when_it_should(_top, run: int) -> None:
    refuse(run, "reset")


@cocotb.test()
@each_run
async def x_cause_names_the_cause(_top, run: int) -> None:
    refuse(run, "x_cause")


@cocotb.test()
@each_run
async def nothing_else_moves_the_outputs(_top, run: int) -> None:
    refuse(run, "stray change")
