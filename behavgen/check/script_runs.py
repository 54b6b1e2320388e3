"""Runs that are played a script: which there are, and how one is prepared, played and judged."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from behavgen.check.directed import middle_c
from behavgen.check.irregular import kinds_of, make_sequence
from behavgen.check.runs import MODES, Run, Settings
from behavgen.check.script import Script, script_of
from behavgen.check.script_decisions import ScriptDecisions, decisions_of
from behavgen.check.script_waveform import Waveform, waveform_of
from behavgen.check.verdict import Stratum
from behavgen.formulas.random_stream import path_seed
from behavgen.model import ComparatorModel

__all__ = ["PreparedScript", "prepare_script", "script_runs", "script_strata"]

SCRIPTED = 800
"""Decisions of one run."""
REQUIRED = 12
"""Decisions of each kind in all runs together."""
_MOST_ROUNDS = 60
_AFTER_LAST_TICKS = 100_000
_NEAR_TICKS = 2


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PreparedScript:
    """What is played to a run and what it must show."""

    run: Run
    script: Script
    decisions: ScriptDecisions
    waveform: Waveform
    kinds: tuple[str, ...]


def script_runs(model: ComparatorModel, *, first_index: int, seed: int) -> tuple[Run, ...]:
    """Return one run for every mode and, after that, every process, noise on and off in turn."""
    count = max(len(MODES), len(model.processes))
    runs = []
    for n in range(count):
        process = model.processes[n % len(model.processes)].name
        settings = Settings(
            process=process, temperature_c=middle_c(model), noise_on=n % 2 == 0, mismatch_on=True,
            unresolved_mode=n % len(MODES), seed=path_seed(f"{seed} script {n}"),
        )  # fmt: skip
        name = f"without a rhythm {n + 1}"
        runs.append(Run(index=first_index + n, name=name, given=settings, meant=settings,
                        decisions=SCRIPTED, scripted=True))  # fmt: skip
    return tuple(runs)


def prepare_script(
    model: ComparatorModel, run: Run, *, seed: int, two_states: bool
) -> PreparedScript:
    """Return a script in which nothing hangs on a tick, and what must come of it.

    Parameters
    ----------
    model : ComparatorModel
    run : Run
    seed : int
    two_states : bool
        The simulator knows neither X nor Z.
    """
    sequence = make_sequence(model, run, seed=seed, two_states=two_states)
    script = script_of(sequence.changes, after_last=_AFTER_LAST_TICKS)
    for _ in range(_MOST_ROUNDS):
        decisions = decisions_of(model, run, script)
        waveform = waveform_of(model, run, script, decisions)
        hanging = _near(script, waveform, decisions)
        if not hanging.any():
            break
        later = (2 * _NEAR_TICKS + 1) * np.cumsum(hanging)
        script = replace(script, time=script.time + later, finish=script.finish + int(later[-1]))
    return PreparedScript(
        run=run, script=script, decisions=decisions, waveform=waveform, kinds=sequence.kinds
    )


def _near(script: Script, waveform: Waveform, decisions: ScriptDecisions) -> np.ndarray:
    """Return which changes come within the ticks by which something due may differ."""
    due = np.array(sorted(waveform.due), dtype=np.int64)
    sampled = decisions.edge + decisions.trace.aperture_ticks
    first = np.searchsorted(due, script.time - _NEAR_TICKS, side="left")
    last = np.searchsorted(due, script.time + _NEAR_TICKS, side="right")
    waits = decisions.trace.aperture_ticks > 0
    return (last > first) | np.isin(script.time, sampled[waits])


def script_strata(
    model: ComparatorModel, prepared: Sequence[PreparedScript], *, two_states: bool
) -> tuple[Stratum, ...]:
    """Count the decisions of each kind.

    Parameters
    ----------
    model : ComparatorModel
    prepared : sequence of PreparedScript
        Those that were compared.
    two_states : bool
        The simulator knows neither X nor Z.
    """
    names = list(kinds_of(model, two_states=two_states))
    met = [kind for one in prepared for kind in one.kinds]
    group, beside = "without a rhythm", len(met) if len(prepared) > 1 else 0
    return (
        Stratum(group=group, name="instances side by side", decisions=beside, required=SCRIPTED),
        *(
            Stratum(group=group, name=name, decisions=met.count(name), required=REQUIRED)
            for name in names
        ),
    )
