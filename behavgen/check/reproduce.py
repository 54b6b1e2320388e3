"""Simulate just one decision again, with those before it, and leave its waveforms."""

from __future__ import annotations

import shutil
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np

from behavgen.check.agreement import compare
from behavgen.check.disagreements import describe
from behavgen.check.given import Given, given_text, own_text
from behavgen.check.harness import harness_macros, top_text, write_block
from behavgen.check.levels import Levels
from behavgen.check.preparation import plan_check
from behavgen.check.runs import Run
from behavgen.check.script import write_script
from behavgen.check.script_runs import prepare_script
from behavgen.check.scripts import judge_script
from behavgen.check.simulation import IcarusSimulation, play
from behavgen.check.slices import PlayedRun
from behavgen.check.stimulus import Stimulus, make_stimulus
from behavgen.check.verdict import Disagreement
from behavgen.check.waveform import expect, read_record
from behavgen.errors import Fault, ProjectError
from behavgen.model import ComparatorModel
from behavgen.simulators.icarus import find_icarus

__all__ = ["Reproduced", "reproduce"]

_AFTER_TICKS = 1000


@dataclass(frozen=True, slots=True, kw_only=True)
class Reproduced:
    """What came of it.

    Parameters
    ----------
    disagreement : Disagreement or None
        None where the decision agrees.
    waveforms : Path or None
        A VCD file of the window around it, where one was wanted.
    """

    disagreement: Disagreement | None
    waveforms: Path | None


def reproduce(
    model: ComparatorModel,
    text: str,
    *,
    run: str,
    decision: int,
    seed: int = 1,
    given: bool = False,
    waveforms: Path | None = None,
) -> Reproduced:
    """Simulate one decision of a check, and only as much before it as it needs.

    Parameters
    ----------
    model : ComparatorModel
    text : str
        The module under check.
    run : str
        Name of the run in the check.
    decision : int
        Its number in that run.
    seed : int
        Of the check.
    given : bool
        The text is the user's own.
    waveforms : Path or None
        Where to leave a VCD file.

    Raises
    ------
    ToolError
        When the simulator is missing or too old.
    ProjectError
        When there is no such run or decision.
    """
    known = given_text(model, text) if given else own_text(model)
    wanted = _run_named(known, run, decision, seed)
    with TemporaryDirectory(prefix="behavgen-decision-") as name:
        work = Path(name).resolve()
        simulation = IcarusSimulation(icarus=find_icarus(), work=work, logs=work)
        top, macros = top_text(known.model, [wanted]), harness_macros(known.model, text)
        compiled = simulation.compile(model.cell.name, text, top, macros)
        if compiled.code != 0:
            raise ProjectError(Fault(what=f"the text does not compile: {compiled.tail(4)}"))
        play_one = _scripted if wanted.scripted else _block
        found, window = play_one(simulation, known.model, wanted, decision, seed)
        if waveforms is not None:
            simulation.dump("window", *play(wanted.index, wanted.index), *_dumped(window))
            shutil.copyfile(work / "window.vcd", waveforms)
    return Reproduced(disagreement=found, waveforms=waveforms)


def _run_named(given: Given, name: str, decision: int, seed: int) -> Run:
    runs = {run.name: run for run in plan_check(given, seed=seed, jobs=1).played}
    if name not in runs:
        fault = Fault(what=f"no run {name!r} in this check", allowed=f"one of {sorted(runs)}")
        raise ProjectError(fault)
    if not 0 <= decision < runs[name].decisions:
        allowed = f"0 to {runs[name].decisions - 1}"
        raise ProjectError(Fault(what=f"run {name!r} has no decision {decision}", allowed=allowed))
    return runs[name]


def _dumped(window: tuple[int, int]) -> tuple[str, str]:
    return f"dump_from={max(window[0], 1)}", f"dump_to={window[1]}"


def _block(
    simulation: IcarusSimulation, model: ComparatorModel, run: Run, decision: int, seed: int
) -> tuple[Disagreement | None, tuple[int, int]]:
    stimulus = make_stimulus(model, run, seed=seed)
    last = min(decision + 2, run.decisions)
    _write_first(simulation.work, run, stimulus, last)
    simulation.simulate("decision", *play(run.index, run.index))
    record = read_record(simulation.work / f"{run.index}.events")
    expected = expect(model, run, stimulus)
    agreement = compare(expected, record)
    played = PlayedRun(run=run, stimulus=stimulus, expected=expected, agreement=agreement)
    wrong = agreement.fault[decision] != 0
    begin = int(stimulus.edge[max(decision - 1, 0)])
    window = (begin, int(stimulus.end[last - 1]) + _AFTER_TICKS)
    return (describe(model, played, record, decision) if wrong else None), window


def _write_first(folder: Path, run: Run, stimulus: Stimulus, count: int) -> None:
    """Write a block's first decisions."""
    following = np.append(stimulus.edge[1:], stimulus.finish)
    finish, levels = int(following[count - 1]), stimulus.levels
    before = levels.moment < finish
    write_block(
        folder, run, edge=stimulus.edge[:count], end=stimulus.end[:count], finish=finish,
        levels=Levels(moment=levels.moment[before], inp_v=levels.inp_v[before],
                      inn_v=levels.inn_v[before], vdd_v=levels.vdd_v[before]),
    )  # fmt: skip


def _scripted(
    simulation: IcarusSimulation, model: ComparatorModel, run: Run, decision: int, seed: int
) -> tuple[Disagreement | None, tuple[int, int]]:
    one = prepare_script(model, run, seed=seed, two_states=False)
    write_script(simulation.work, run, one.script)
    simulation.simulate("decision", *play(run.index, run.index))
    _, found = judge_script(simulation, model, one)
    edges = one.decisions.edge
    begin, last = int(edges[max(decision - 1, 0)]), min(decision + 2, len(edges) - 1)
    return found, (begin, int(edges[last]) + _AFTER_TICKS)
