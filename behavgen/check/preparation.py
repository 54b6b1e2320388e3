"""Everything that is fixed before the first simulation: which runs, in which processes."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from itertools import count

from behavgen.check.blocks import share_out
from behavgen.check.directed import BENCH_MODULES, directed_runs
from behavgen.check.fatal import fatal_run
from behavgen.check.given import Given, playable
from behavgen.check.runs import Batch, Run, plan_batches
from behavgen.check.script_runs import script_runs

__all__ = ["Plan", "plan_check"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """Everything that is simulated.

    Parameters
    ----------
    blocks : tuple of Batch
        Runs to which blocks of decisions are played.
    scripted : tuple of Run
        Instances to which scripts are played.
    directed : Batch
        Instances that benches drive edge by edge.
    fatal : Run
        The instance that must end its simulation.
    left_out : tuple of str
        What a module of the user's own cannot be asked, and why.
    """

    blocks: tuple[Batch, ...]
    scripted: tuple[Run, ...]
    directed: Batch
    fatal: Run
    left_out: tuple[str, ...] = ()

    @property
    def decisions(self) -> int:
        """How many are planned."""
        blocks = sum(run.decisions for batch in self.blocks for run in batch.runs)
        return blocks + sum(run.decisions for run in self.scripted)

    @property
    def played(self) -> tuple[Run, ...]:
        """Instances to which files are played, in the order of their indices."""
        return (*(run for batch in self.blocks for run in batch.runs), *self.scripted)

    @property
    def runs(self) -> tuple[Run, ...]:
        """All instances, in the order of their indices."""
        return (*self.played, *self.directed.runs, self.fatal)


def plan_check(given: Given, *, seed: int, jobs: int) -> Plan:
    """Return the whole plan.

    Parameters
    ----------
    given : Given
        The module that shall play it.
    seed : int
    jobs : int
        Simulations at the same time.
    """
    model = given.model
    batches, left_out = playable(given, plan_batches(model, seed=seed))
    plain, *commanded = _numbered(batches)
    used = sum(len(batch.runs) for batch in batches)
    scripted = () if given.foreign else script_runs(model, first_index=used, seed=seed)
    directed = directed_runs(model, first_index=used + len(scripted))
    fatal = fatal_run(model, index=used + len(scripted) + len(directed))
    return Plan(
        blocks=(*share_out(plain, jobs + 1), *commanded),
        scripted=scripted,
        directed=Batch(name="directed", plusargs=(), runs=directed, benches=BENCH_MODULES),
        fatal=fatal,
        left_out=left_out + (_FOREIGN if given.foreign else ()),
    )


_FOREIGN = ("disturbances, messages and insides: they are those of emitted modules",)


def _numbered(batches: Sequence[Batch]) -> Iterator[Batch]:
    """Give all runs numbers in a row."""
    number = count()
    for batch in batches:
        yield replace(batch, runs=tuple(replace(r, index=next(number)) for r in batch.runs))
