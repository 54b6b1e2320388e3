"""Play scripts and judge what instances showed."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import isfinite

from behavgen.check.bench_results import Suite, ended
from behavgen.check.disagreements import condition_words, reproduce_options, state_words
from behavgen.check.runs import Run
from behavgen.check.script import write_script
from behavgen.check.script_agreement import Divergence, first_divergence
from behavgen.check.script_runs import PreparedScript, prepare_script, script_strata
from behavgen.check.simulation import Simulation, play
from behavgen.check.verdict import BenchResult, Disagreement, Stratum
from behavgen.check.waveform import read_record
from behavgen.model import ComparatorModel
from behavgen.simulators.process import Finished
from behavgen.units import format_si

__all__ = ["PlayedScripts", "judge_script", "play_scripts"]

SENTENCE = "without a rhythm nothing else is shown"


@dataclass(frozen=True, slots=True, kw_only=True)
class PlayedScripts:
    """What came of all scripts.

    Parameters
    ----------
    finished : Finished
    suites : tuple of Suite
    strata : tuple of Stratum
    disagreements : tuple of Disagreement
        Where each first parts from what it should be.
    decisions : int
        Decisions of those that were compared.
    """

    finished: Finished
    suites: tuple[Suite, ...]
    strata: tuple[Stratum, ...]
    disagreements: tuple[Disagreement, ...]
    decisions: int


def play_scripts(
    simulation: Simulation, model: ComparatorModel, runs: Sequence[Run], *, seed: int
) -> PlayedScripts | None:
    """Play scripts side by side in one simulation; None where there are none.

    Parameters
    ----------
    simulation : Simulation
    model : ComparatorModel
    runs : sequence of Run
        With neighbouring indices.
    seed : int
    """
    if not runs:
        return None
    two_states = simulation.two_states
    scripts = [prepare_script(model, run, seed=seed, two_states=two_states) for run in runs]
    for one in scripts:
        write_script(simulation.work, one.run, one.script)
    finished = simulation.simulate("scripts", *play(runs[0].index, runs[-1].index))
    judged = [judge_script(simulation, model, one) for one in scripts]
    results = (ended("scripts", finished), *(result for result, _ in judged))
    whole = [one for one, (result, found) in zip(scripts, judged, strict=True)
             if result.passed or found is not None]  # fmt: skip
    return PlayedScripts(
        finished=finished,
        suites=tuple(("scripts", result) for result in results),
        strata=script_strata(model, whole, two_states=two_states),
        disagreements=tuple(found for _, found in judged if found is not None),
        decisions=sum(len(one.decisions.edge) for one in whole),
    )


def judge_script(
    simulation: Simulation, model: ComparatorModel, one: PreparedScript
) -> tuple[BenchResult, Disagreement | None]:
    """Compare a script's record with what it must be; return where it first parts."""
    name = f"{SENTENCE}: {one.run.name}"
    try:
        record = read_record(simulation.work / f"{one.run.index}.events")
    except (OSError, ValueError) as error:
        return BenchResult(name=name, passed=False, message=str(error)), None
    found = first_divergence(
        one.waveform.moments, record, one.script.finish, two_states=simulation.two_states
    )
    if found is None:
        return BenchResult(name=name, passed=True), None
    told = _told(model, one, found)
    message = f"{found.what} at decision {found.decision}: {told.expected} expected, {told.got} got"
    return BenchResult(name=name, passed=False, message=message), told


def _told(model: ComparatorModel, one: PreparedScript, found: Divergence) -> Disagreement:
    n = max(found.decision, 0)
    script = one.script
    row = max(int(script.time.searchsorted(one.decisions.edge[n], side="right")) - 1, 0)
    kind = one.kinds[n] if n < len(one.kinds) else ""
    inp, inn = float(script.inp_v[row]), float(script.inn_v[row])
    return Disagreement(
        run=one.run.name,
        decision=found.decision,
        time_s=found.time / model.cell.ticks_per_second,
        conditions=condition_words(one.run.meant, float(script.vdd_v[row]), (inp + inn) * 0.5)
        + f"; {kind}",
        vdiff_v=inp - inn if isfinite(inp - inn) else 0.0,
        overdrive_v=float(one.decisions.trace.overdrive_v[n]),
        what=found.what,
        expected=state_words(found.expected),
        got=state_words(found.got),
        inputs=f"{format_si(inp, 'V', 9)} and {format_si(inn, 'V', 9)}",
        reproduce=reproduce_options(one.run.name, found.decision),
    )
