"""Everything that is fixed before the first simulation: runs, stimulus, expectations."""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path

from behavgen.check.bench_files import write_expectation, write_model
from behavgen.check.directed import BENCH_MODULES, directed_runs
from behavgen.check.fatal import fatal_run, fatal_stimulus
from behavgen.check.harness import write_stimulus
from behavgen.check.runs import Batch, Run, plan_batches
from behavgen.check.simulation import share_out
from behavgen.check.stimulus import Stimulus, make_stimulus
from behavgen.check.waveform import Expectation, expect
from behavgen.model import ComparatorModel

__all__ = ["Block", "Plan", "plan_check", "prepare_blocks"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """Everything that is simulated.

    Parameters
    ----------
    batches : tuple of Batch
    fatal : Run
        The instance that must end its simulation.
    """

    batches: tuple[Batch, ...]
    fatal: Run

    @property
    def runs(self) -> tuple[Run, ...]:
        """All instances, in the order of their indices."""
        runs = (run for batch in self.batches for run in batch.runs)
        return tuple(sorted((*runs, self.fatal), key=lambda run: run.index))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Block:
    """What is played to one run and what it must show."""

    run: Run
    stimulus: Stimulus
    expected: Expectation


def plan_check(model: ComparatorModel, *, seed: int, jobs: int) -> Plan:
    """Return the whole plan; the shortest batch takes the directed benches.

    Parameters
    ----------
    model : ComparatorModel
    seed : int
    jobs : int
        Simulations at the same time; one is kept for the short batches.
    """
    blocks, *others, last = plan_batches(model, seed=seed)
    used = len(blocks.runs) + len(others) + 1
    directed = directed_runs(model, first_index=used)
    last = replace(last, runs=last.runs + directed, benches=last.benches + BENCH_MODULES)
    return Plan(
        batches=(*share_out(blocks, jobs - 1), *others, last),
        fatal=fatal_run(model, index=used + len(directed)),
    )


def prepare_blocks(
    model: ComparatorModel, plan: Plan, folder: Path, *, seed: int
) -> tuple[Block, ...]:
    """Write all that the simulations read; return the blocks that benches compare.

    Parameters
    ----------
    model : ComparatorModel
    plan : Plan
    folder : Path
    seed : int
    """
    write_model(folder, model)
    write_stimulus(folder, plan.fatal, fatal_stimulus(model, plan.fatal))
    played = (run for run in plan.runs if run.decisions and run is not plan.fatal)
    return tuple(_prepared(model, run, folder, seed) for run in played)


def _prepared(model: ComparatorModel, run: Run, folder: Path, seed: int) -> Block:
    stimulus = make_stimulus(model, run, seed=seed)
    expected = expect(model, run, stimulus)
    write_stimulus(folder, run, stimulus)
    write_expectation(folder, run.index, expected)
    return Block(run=run, stimulus=stimulus, expected=expected)
