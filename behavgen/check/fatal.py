"""Two simulations that must end themselves: an unknown process, and a warning made fatal."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import replace

import numpy as np

from behavgen.check.runs import Run, Settings
from behavgen.check.simulation import Simulation, play
from behavgen.check.stimulus import Stimulus, make_stimulus
from behavgen.check.verdict import BenchResult
from behavgen.model import ComparatorModel
from behavgen.simulators.process import Finished

__all__ = ["fatal_results", "fatal_run", "fatal_stimulus"]

_MESSAGE = "[behavgen]"


def fatal_run(model: ComparatorModel, *, index: int) -> Run:
    """Return an instance whose warnings are fatal."""
    settings = Settings(process=model.processes[0].name, temperature_c=27.0, warnings=2)
    return Run(index=index, name="warnings are fatal", given=settings, meant=settings, decisions=4)


def fatal_stimulus(model: ComparatorModel, run: Run) -> Stimulus:
    """Return a block whose inputs are not numbers."""
    stimulus = make_stimulus(model, run, seed=0)
    never = np.full(len(stimulus.levels.moment), np.nan)
    return replace(stimulus, levels=replace(stimulus.levels, inp_v=never))


def fatal_results(
    simulation: Simulation, model: ComparatorModel, run: Run
) -> tuple[BenchResult, ...]:
    """Run both simulations and judge how they ended."""
    unknown = max(process.code for process in model.processes) + 17
    process = simulation.simulate("unknown_process", f"behavgen_process={unknown}")
    warning = simulation.simulate("fatal_warning", *play(run.index, run.index))
    return (
        _judged("an unknown process code is fatal and names the known ones", process,
                lambda line: _names_all(model, line)),
        _judged("a warning is fatal where it shall be", warning, lambda line: run.path in line),
    )  # fmt: skip


def _judged(name: str, finished: Finished, fits: Callable[[str], bool]) -> BenchResult:
    message = ""
    if finished.code == 0:
        message = "the simulation ended as if nothing had happened"
    elif finished.code is None:
        message = "the simulation did not end"
    elif not any(_MESSAGE in line and fits(line) for line in finished.text.splitlines()):
        message = f"no fitting message; {finished.log.name} ends with: {finished.tail(3)}"
    return BenchResult(name=name, passed=not message, message=message)


def _names_all(model: ComparatorModel, line: str) -> bool:
    return all(
        re.search(rf"\b({process.code}|{re.escape(process.name)})\b", line)
        for process in model.processes
    )
