"""The first question: whether the module equals the reference, decision by decision."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass

from behavgen.check.bench_files import write_model
from behavgen.check.bench_results import Suite, bench_results, ended, message_results
from behavgen.check.block_results import block_results, merged_strata
from behavgen.check.blocks import BlockOutcome, PlayedBatch, play_batches
from behavgen.check.fatal import fatal_results, fatal_stimulus
from behavgen.check.given import Given, own_text
from behavgen.check.harness import harness_macros, top_text, write_stimulus
from behavgen.check.preparation import Plan, plan_check
from behavgen.check.probe.probe import probe_result
from behavgen.check.scripts import PlayedScripts, play_scripts
from behavgen.check.simulation import BatchOutcome, IcarusSimulation, Simulation
from behavgen.check.verdict import BenchResult, Disagreement, Stratum
from behavgen.simulators.process import Finished

__all__ = ["Compared", "compare_decisions"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Compared:
    """Everything that came of it.

    Parameters
    ----------
    compiled : bool
        Whether the text compiles; nothing else is known if it does not.
    suites : tuple of Suite
    blocks : tuple of BlockOutcome
    scripts : PlayedScripts or None
    left_out : tuple of str
        What could not be asked, and why.
    """

    compiled: bool
    suites: tuple[Suite, ...]
    blocks: tuple[BlockOutcome, ...] = ()
    scripts: PlayedScripts | None = None
    left_out: tuple[str, ...] = ()

    @property
    def strata(self) -> tuple[Stratum, ...]:
        """What was exercised, and how often."""
        blocks = merged_strata(block.strata for block in self.blocks)
        return blocks + (self.scripts.strata if self.scripts else ())

    @property
    def disagreements(self) -> tuple[Disagreement, ...]:
        """The first ones of each run."""
        blocks = tuple(one for block in self.blocks for one in block.disagreements)
        return blocks + (self.scripts.disagreements if self.scripts else ())

    @property
    def wrong(self) -> int:
        """How many decisions are wrong; of a script where it first parts."""
        counted = sum(count for block in self.blocks for _, count, _ in block.faults)
        return counted + (len(self.scripts.disagreements) if self.scripts else 0)

    @property
    def decisions(self) -> int:
        """How many were compared."""
        counted = sum(block.compared for block in self.blocks)
        return counted + (self.scripts.decisions if self.scripts else 0)


def compare_decisions(
    simulation: Simulation,
    given: Given,
    text: str,
    *,
    seed: int,
    jobs: int,
    tell: Callable[[str], None],
    only_compile: bool = False,
) -> Compared:
    """Simulate blocks, scripts and, where X is known, the directed benches.

    Parameters
    ----------
    simulation : Simulation
    given : Given
        What is known of the module.
    text : str
        The module itself.
    seed : int
        Of the stimulus.
    jobs : int
        Simulations at the same time.
    tell : callable
        Is told in words what happens now.
    only_compile : bool
        Nothing is simulated.
    """
    model, plan = given.model, plan_check(given, seed=seed, jobs=jobs)
    tell("compiling")
    runs = plan.played if simulation.two_states else plan.runs
    top, macros = top_text(model, runs), harness_macros(model, text)
    compiled = simulation.compile(model.cell.name, text, top, macros)
    if compiled.code != 0:
        refused = BenchResult(name="the text compiles", passed=False, message=_complaints(compiled))
        return Compared(compiled=False, suites=(("compile", refused),))
    if only_compile:
        return Compared(compiled=True, suites=())
    tell(f"simulating {plan.decisions} decisions")
    with ThreadPoolExecutor(max_workers=1) as beside:
        directed = beside.submit(_driven, simulation, given, plan)
        probed = beside.submit(_probed, simulation, given, text, seed)
        played = play_batches(simulation, given, plan.blocks, seed=seed, jobs=jobs)
        scripts = play_scripts(simulation, model, plan.scripted, seed=seed)
        benches = directed.result()
        inside = probed.result()
    return Compared(
        compiled=True,
        suites=(
            *_suites(simulation, given, plan, played, benches),
            *(("insides", result) for result in inside),
            *(scripts.suites if scripts else ()),
        ),
        blocks=tuple(block for one in played for block in one.blocks),
        scripts=scripts,
        left_out=plan.left_out + (_TWO_STATES if simulation.two_states else ()),
    )


_TWO_STATES = ("X, and supplies that are no numbers: not in this simulator",)


def _driven(simulation: Simulation, given: Given, plan: Plan) -> BatchOutcome | None:
    """Run the directed benches on emitted modules, where X is known."""
    if given.foreign or not isinstance(simulation, IcarusSimulation):
        return None
    write_model(simulation.work, given.model)
    return simulation.run_benches(plan.directed)


def _probed(simulation: Simulation, given: Given, text: str, seed: int) -> tuple[BenchResult, ...]:
    """Look inside emitted modules at every decision of a short play."""
    whole = given == own_text(given.model)
    if not whole or not isinstance(simulation, IcarusSimulation):
        return ()
    return (probe_result(simulation.icarus, given.model, text, simulation.work, seed=seed),)


def _suites(
    simulation: Simulation,
    given: Given,
    plan: Plan,
    played: Sequence[PlayedBatch],
    benches: BatchOutcome | None,
) -> tuple[Suite, ...]:
    model = given.model
    suites: list[Suite] = [("simulation", ended(p.batch.name, p.finished)) for p in played]
    suites += [("blocks", result) for result in block_results(given, played)]
    if benches is not None:
        logs = [one.finished for one in played]
        write_stimulus(simulation.work, plan.fatal, fatal_stimulus(model, plan.fatal))
        suites += bench_results(benches)
        suites += [("messages", result) for result in message_results(model, benches, logs)]
        suites += [("fatal", result) for result in fatal_results(simulation, model, plan.fatal)]
    return tuple(suites)


def _complaints(compiled: Finished) -> str:
    """Return what a compiler refused, without its warnings."""
    lines = [line for line in compiled.text.splitlines() if "warning" not in line]
    return "compile.log says:\n" + "\n".join(lines[:8] or [compiled.tail()])
