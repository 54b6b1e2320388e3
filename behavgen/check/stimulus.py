"""Stimulus of one run: inputs, supply and clock edges of a block of decisions.

Inputs are aimed: the reference says where the trip point of each decision
lies, and the input is set at a chosen distance from it.

    sweep      every decade of overdrive from 0.1 uV to beyond the largest one
    small      below 10 uV with noise off: every coefficient of the offset decides bits
    noisy      within 10 sigma with noise on
    balanced   the input takes back the noise of its own decision up to a rest far
               below 1 uV: every constant of the random stream decides bits
    zero       an overdrive of exactly nothing

What a decision leaves behind does not change what is aimed at: inputs follow
the memory, so that it decides bits wherever they are small.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.check.aims import Aimed
from behavgen.check.levels import Levels, applied_levels
from behavgen.check.moves import Away, Moves, draw_away
from behavgen.check.phases import decision_ticks, reset_ticks
from behavgen.check.runs import Run, reference_of
from behavgen.formulas.random_stream import path_seed
from behavgen.model import ComparatorModel
from behavgen.reference import Reference
from behavgen.trace import Trace

__all__ = ["Stimulus", "make_stimulus"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

_START_TICKS = 40
_AFTER_LAST_TICKS = 40
_MOST_ROUNDS = 8


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Stimulus:
    """What is played to one instance; times in ticks from the start of the block.

    Parameters
    ----------
    inp_v, inn_v, vdd_v : ndarray, shape (N,)
        At each decision edge.
    sampled_v : ndarray, shape (N,)
        Differential input when it is sampled.
    levels : Levels
        All levels that are applied.
    edge, end : ndarray of int, shape (N,)
        Decision edge and end of the decision phase.
    finish : int
        When nothing more can happen.
    aim : ndarray of int, shape (N,)
        `SWEEP`, `SMALL`, ...
    trace : Trace
        What the reference makes of it.
    """

    inp_v: Floats
    inn_v: Floats
    vdd_v: Floats
    sampled_v: Floats
    levels: Levels
    edge: Integers
    end: Integers
    finish: int
    aim: Integers
    trace: Trace

    @property
    def vcm_v(self) -> Floats:
        """Common mode at each decision edge, V."""
        return (self.inp_v + self.inn_v) * 0.5

    @property
    def gap(self) -> Integers:
        """Ticks from the end of each decision phase to the next edge or the finish."""
        return np.append(self.edge[1:], self.finish) - self.end

    @property
    def reset(self) -> Integers:
        """Ticks of reset before each decision; -1 before the first."""
        return np.append(-1, self.gap[:-1])


def make_stimulus(model: ComparatorModel, run: Run, *, seed: int) -> Stimulus:
    """Return the stimulus of a run; the same arguments give the same stimulus.

    Parameters
    ----------
    model : ComparatorModel
    run : Run
    seed : int
    """
    rng = np.random.default_rng([seed, path_seed(run.name)])
    reference = reference_of(model, run)
    aimed = Aimed(model, run, reference, rng)
    endless = np.full(run.decisions, np.iinfo(np.int64).max)
    still = np.repeat(aimed.level_v()[:, None], 3, axis=1)
    ideal = aimed.trace(still, endless, None)
    phase = 2 * ideal.delay_ticks if run.balanced else decision_ticks(ideal, rng)
    gap = reset_ticks(reference, ideal, rng, **aimed.conditions)
    away = draw_away(model, aimed.aim, ideal.aperture_ticks, rng)
    reset = np.append(-1, gap[:-1])
    memory = _memory(reference, aimed, ideal, phase, reset)
    moves, phase, trace = _settled(aimed, away, phase, reset, memory, run.meant.delay_on)
    level = moves.level_v
    edge = _START_TICKS + np.cumsum(np.append(0, (phase + gap)[:-1]))
    return Stimulus(
        inp_v=level[:, 0, 0], inn_v=level[:, 0, 1], vdd_v=level[:, 0, 2],
        sampled_v=level[:, 1, 0] - level[:, 1, 1],
        levels=applied_levels(moves, edge, edge + phase, trace.aperture_ticks, rng),
        edge=edge, end=edge + phase,
        finish=int(edge[-1] + phase[-1] + trace.reset_ticks[-1]) + _AFTER_LAST_TICKS,
        aim=aimed.aim, trace=trace,
    )  # fmt: skip


def _settled(
    aimed: Aimed, away: Away, phase: Integers, reset: Integers, memory: Floats, delay_on: bool
) -> tuple[Moves, Integers, Trace]:
    """Let the inputs follow the memory; lengthen the few phases that then hang on a tick."""
    for _ in range(_MOST_ROUNDS):
        moves = away.moves(aimed.level_v(memory), phase)
        trace = aimed.trace(moves.level_v, phase, reset)
        hanging = delay_on & (np.abs(phase - trace.delay_ticks) <= 1)
        if not hanging.any():
            break
        memory, phase = trace.memory_v, phase + 4 * hanging
    return moves, phase, trace


def _memory(
    reference: Reference, aimed: Aimed, ideal: Trace, phase: Integers, reset: Integers
) -> Floats:
    """Return the memory that each decision will find if those before meet their aims, V."""
    if not reference.memory:
        return np.zeros(len(phase))
    number, every = 1 + np.arange(len(phase)), reference.force_unresolved_every
    unresolved = reference.delay_on & (ideal.delay_ticks > phase)
    if every > 0:
        unresolved = unresolved | (number % every == 0)
    sign = np.append(0, np.where(unresolved, 0, 2 * ideal.leaning - 1)[:-1])
    reset_s = np.maximum(reset, 0) / reference.model.cell.ticks_per_second
    return -(sign * reference.memory_shift(reset_s, **aimed.conditions))
