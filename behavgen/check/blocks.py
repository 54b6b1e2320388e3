"""Play blocks of decisions without benches: the simulator runs a block, Python compares it.

Stimulus and expectation are made just before a block is played and dropped
after it was compared, so that any number of decisions fits into memory, and
one block is compared while another is simulated.
"""

from __future__ import annotations

from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from functools import partial

import numpy as np
import numpy.typing as npt

from behavgen.check.agreement import FAULTS, Agreement, compare
from behavgen.check.disagreements import describe_disagreements
from behavgen.check.given import LEAST_OVERDRIVE_V, Given
from behavgen.check.harness import write_stimulus
from behavgen.check.power import BlockPower, block_power
from behavgen.check.runs import Batch, Run
from behavgen.check.simulation import Simulation, play
from behavgen.check.slices import PlayedRun
from behavgen.check.stimulus import Stimulus, make_stimulus
from behavgen.check.strata import count_strata
from behavgen.check.verdict import Disagreement, Stratum
from behavgen.check.waveform import Expectation, expect, read_record, seen_in_two_states
from behavgen.model import ComparatorModel
from behavgen.simulators.process import Finished

__all__ = ["BlockOutcome", "PlayedBatch", "play_batches", "share_out"]


@dataclass(frozen=True, slots=True, kw_only=True)
class BlockOutcome:
    """What came of a run's block.

    Parameters
    ----------
    run : Run
    problem : str
        Why it could not be compared; "" when it was.
    faults : tuple of (str, int, int)
        Kind of fault, decisions that have it, the first of them.
    compared, excluded, timed, off : int
        Decisions; those with a visible ready; those of which that is off by a tick or more.
    worst_delay_ticks : int
    rounds_alike : bool
        Whether hardly any delay is off.
    strata : tuple of Stratum
    disagreements : tuple of Disagreement
        The first ones in words.
    power : BlockPower or None
        What errors it sees.
    """

    run: Run
    problem: str = ""
    faults: tuple[tuple[str, int, int], ...] = ()
    compared: int = 0
    excluded: int = 0
    timed: int = 0
    off: int = 0
    worst_delay_ticks: int = 0
    rounds_alike: bool = True
    strata: tuple[Stratum, ...] = ()
    disagreements: tuple[Disagreement, ...] = ()
    power: BlockPower | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class PlayedBatch:
    """One simulator process without benches and what came of its blocks."""

    batch: Batch
    finished: Finished
    blocks: tuple[BlockOutcome, ...]


def share_out(batch: Batch, parts: int) -> tuple[Batch, ...]:
    """Split a batch into several, each of neighbouring runs and about as many decisions."""
    total = np.cumsum([run.decisions for run in batch.runs])
    part = np.minimum((total - 1) * parts // max(int(total[-1]), 1), parts - 1)
    shares = [tuple(np.flatnonzero(part == k).tolist()) for k in range(parts)]
    return tuple(
        replace(batch, name=f"{batch.name}_{number}", runs=tuple(batch.runs[i] for i in share))
        for number, share in enumerate((share for share in shares if share), start=1)
    )


def play_batches(
    simulation: Simulation,
    given: Given,
    batches: Sequence[Batch],
    *,
    seed: int,
    jobs: int,
) -> tuple[PlayedBatch, ...]:
    """Play batches on several processors; outcomes in the order of the batches.

    Parameters
    ----------
    simulation : Simulation
    given : Given
        What is known of the module.
    batches : sequence of Batch
        Each of runs with neighbouring indices.
    seed : int
        Of the stimulus.
    jobs : int
    """
    with ThreadPoolExecutor(max_workers=max(jobs, 1)) as pool:
        return tuple(pool.map(partial(_played, simulation, given, seed), batches))


def _played(simulation: Simulation, given: Given, seed: int, batch: Batch) -> PlayedBatch:
    prepared = [_prepared(simulation, given, seed, run) for run in batch.runs]
    first, last = batch.runs[0].index, batch.runs[-1].index
    name = batch.name.replace(",", "").replace(" ", "_")
    finished = simulation.simulate(name, *play(first, last), *batch.plusargs)
    blocks = tuple(_compared(simulation, given.model, block) for block in prepared)
    return PlayedBatch(batch=batch, finished=finished, blocks=blocks)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Block:
    """What is played to a run and what it must show."""

    run: Run
    stimulus: Stimulus
    expected: Expectation


def _prepared(simulation: Simulation, given: Given, seed: int, run: Run) -> _Block:
    stimulus = make_stimulus(given.model, run, seed=seed)
    write_stimulus(simulation.work, run, stimulus)
    expected = expect(given.model, run, stimulus)
    if given.foreign:
        expected = replace(expected, excluded=expected.excluded | _hanging(stimulus))
    if simulation.two_states:
        expected = seen_in_two_states(expected)
    return _Block(run=run, stimulus=stimulus, expected=expected)


def _hanging(stimulus: Stimulus) -> npt.NDArray[np.bool_]:
    """Return decisions that the last place decides, and those that remember how these went."""
    tiny = np.abs(stimulus.trace.overdrive_v) < LEAST_OVERDRIVE_V
    memory = np.abs(stimulus.trace.memory_v)
    hanging, passed_on = tiny.copy(), False
    for n in range(len(tiny)):
        hanging[n] |= passed_on and memory[n] > 0.0
        turns = np.abs(stimulus.trace.overdrive_v[n]) <= 2.0 * memory[n]
        passed_on = bool(tiny[n] or (hanging[n] and turns))
    return hanging


def _compared(simulation: Simulation, model: ComparatorModel, block: _Block) -> BlockOutcome:
    path = simulation.work / f"{block.run.index}.events"
    try:
        record = read_record(path)
    except (OSError, ValueError) as error:
        return BlockOutcome(run=block.run, problem=str(error))
    path.unlink()
    agreement = compare(block.expected, record)
    played = PlayedRun(
        run=block.run, stimulus=block.stimulus, expected=block.expected, agreement=agreement
    )
    return replace(
        _counted(block.run, agreement),
        strata=count_strata(model, [played]),
        disagreements=describe_disagreements(model, played, record),
        power=block_power(model, played),
    )


def _counted(run: Run, agreement: Agreement) -> BlockOutcome:
    faults = []
    for code, kind in enumerate(FAULTS[1:], start=1):
        wrong = np.flatnonzero(agreement.fault == code)
        if len(wrong):
            faults.append((kind, len(wrong), int(wrong[0])))
    return BlockOutcome(
        run=run,
        faults=tuple(faults),
        compared=int(agreement.compared.sum()),
        excluded=int((~agreement.compared).sum()),
        timed=int(agreement.timed.sum()),
        off=int((agreement.delay_error != 0).sum()),
        worst_delay_ticks=int(np.abs(agreement.delay_error).max(initial=0)),
        rounds_alike=agreement.rounds_alike,
    )
