"""Stimulus of one run: inputs, supply and clock edges of a block of decisions.

Inputs are aimed: the reference says where the trip point of each decision
lies, and the input is set at a chosen distance from it.

    sweep      every decade of overdrive from 0.1 uV to beyond the largest one
    small      below 10 uV with noise off: every coefficient of the offset decides bits
    noisy      within 10 sigma with noise on
    balanced   the input takes back the noise of its own decision up to a rest far
               below 1 uV: every constant of the random stream decides bits
    zero       an overdrive of exactly nothing
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
import numpy.typing as npt

from behavgen.check.conditions import spread_conditions
from behavgen.check.runs import Run, reference_of
from behavgen.formulas.random_stream import path_seed
from behavgen.model import ComparatorModel
from behavgen.reference import Reference, Trace

__all__ = [
    "BALANCED",
    "LEAST_CUT_TICKS",
    "LEAST_SWEPT_V",
    "NOISY",
    "SMALL",
    "SWEEP",
    "ZERO",
    "Stimulus",
    "make_stimulus",
]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

SWEEP, SMALL, NOISY, BALANCED, ZERO = range(5)

LEAST_SWEPT_V = 1e-7
NOISY_SIGMAS = 10.0
LEAST_CUT_TICKS = 6
"""Shorter resets cannot be cut off without a tick deciding."""
_START_TICKS = 40
_AFTER_LAST_TICKS = 40


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Stimulus:
    """What is played to one instance; times in ticks from the start of the block.

    Parameters
    ----------
    inp_v, inn_v, vdd_v : ndarray, shape (N,)
        At each decision edge.
    moment : ndarray of int, shape (N,)
        When these levels are applied.
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
    moment: Integers
    edge: Integers
    end: Integers
    finish: int
    aim: Integers
    trace: Trace

    @property
    def vdiff_v(self) -> Floats:
        """Differential input as an emitted model subtracts it, V."""
        return self.inp_v - self.inn_v

    @property
    def vcm_v(self) -> Floats:
        """Common mode, V."""
        return (self.inp_v + self.inn_v) * 0.5

    @property
    def gap(self) -> Integers:
        """Ticks from the end of each decision phase to the next edge or the finish."""
        return np.append(self.edge[1:], self.finish) - self.end


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
    inputs = _Inputs(model, run, reference, rng)
    endless = np.full(run.decisions, np.iinfo(np.int64).max)
    ideal = inputs.trace(endless)
    phase = 2 * ideal.delay_ticks if run.balanced else _phase_ticks(ideal.delay_ticks, rng)
    trace = inputs.trace(phase)
    gap = _gap_ticks(trace, rng)
    edge = _START_TICKS + np.cumsum(np.append(0, (phase + gap)[:-1]))
    end = edge + phase
    return Stimulus(
        inp_v=inputs.inp_v, inn_v=inputs.inn_v, vdd_v=inputs.vdd_v,
        moment=_moments(edge, end, rng), edge=edge, end=end,
        finish=int(end[-1] + trace.reset_ticks[-1]) + _AFTER_LAST_TICKS,
        aim=inputs.aim, trace=trace,
    )  # fmt: skip


class _Inputs:
    """Aimed input levels of a block."""

    def __init__(
        self, model: ComparatorModel, run: Run, reference: Reference, rng: np.random.Generator
    ) -> None:
        count = run.decisions
        self._reference = reference
        self._run = run
        self.vdd_v, vcm = spread_conditions(model, count, start=int(rng.integers(1 << 20)))
        self.aim = _aims(run, reference, rng)
        zero = self.aim == ZERO
        vcm[zero] = 0.5 * self._trip(vcm)[zero]
        for _ in range(4):  # the trip point at half of itself: inn then is exactly 0
            vcm[zero] = 0.5 * self._trip(vcm)[zero]
        vdiff = self._trip(vcm) + self._distance(model, vcm, rng)
        self.inp_v, self.inn_v = vcm + 0.5 * vdiff, vcm - 0.5 * vdiff
        self.inp_v[zero], self.inn_v[zero] = vdiff[zero], 0.0

    def trace(self, phase_ticks: Integers) -> Trace:
        """Return what the reference makes of these inputs."""
        vcm = (self.inp_v + self.inn_v) * 0.5
        return self._traced(self.inp_v - self.inn_v, vcm, phase_ticks)

    def _traced(self, vdiff: Floats, vcm: Floats, phase_ticks: Integers) -> Trace:
        return self._reference.trace(vdiff, phase_ticks, vcm=vcm, **self._fixed())

    def _fixed(self) -> dict[str, Any]:
        meant = self._run.meant
        return {"vdd": self.vdd_v, "temp_c": meant.temperature_c, "process": meant.process}

    def _trip(self, vcm: Floats) -> Floats:
        shifted = self._reference.offset(vcm=vcm, **self._fixed()) + self._run.meant.offset_shift_v
        return shifted + self._reference.mismatch_v(vcm=vcm, **self._fixed())

    def _distance(self, model: ComparatorModel, vcm: Floats, rng: np.random.Generator) -> Floats:
        """Return the signed distance of the input from the trip point, V."""
        count = len(vcm)
        largest = 0.5 if model.box.overdrive_v is None else 1.5 * model.box.overdrive_v.high
        sign = rng.choice([-1.0, 1.0], size=count)
        sigma = self._reference.noise_sigma(vcm=vcm, **self._fixed())
        noise = self._traced(self._trip(vcm), vcm, np.ones(count, dtype=np.int64)).overdrive_v
        rest = sign * _log_uniform(1e-15, 1e-8, count, rng)
        choices = (
            sign * _log_uniform(LEAST_SWEPT_V, largest, count, rng),
            sign * _log_uniform(1e-9, 1e-5, count, rng),
            sigma * rng.uniform(-NOISY_SIGMAS, NOISY_SIGMAS, count),
            (1e-13 if self._run.balanced else rest) - noise,
            np.zeros(count),
        )
        return np.choose(self.aim, choices)


def _aims(run: Run, reference: Reference, rng: np.random.Generator) -> Integers:
    if run.balanced:
        return np.full(run.decisions, BALANCED)
    if reference.noise:
        return rng.choice([SWEEP, NOISY, BALANCED], size=run.decisions, p=[0.3, 0.4, 0.3])
    exact = 0.0 if reference.mismatch else 0.04
    return rng.choice([SWEEP, SMALL, ZERO], size=run.decisions, p=[0.42, 0.58 - exact, exact])


def _log_uniform(low: float, high: float, count: int, rng: np.random.Generator) -> Floats:
    return np.exp(rng.uniform(np.log(low), np.log(high), count))


def _phase_ticks(delay: Integers, rng: np.random.Generator) -> Integers:
    """Return lengths of decision phases: most long enough, some too short, some just so."""
    count = len(delay)
    stretched = delay * rng.uniform(1.05, 3.0, count)
    shortened = delay * rng.uniform(0.02, 0.98, count)
    close = delay + rng.choice([-1.0, 1.0], size=count) * rng.integers(3, 60, count)
    kind = rng.choice(3, size=count, p=[0.74, 0.18, 0.08])
    ticks = np.floor(np.choose(kind, (stretched, shortened, close))).astype(np.int64)
    boundary = np.abs(ticks - delay) <= 1
    return np.maximum(np.where(boundary, delay + 3, ticks), 4)


def _gap_ticks(trace: Trace, rng: np.random.Generator) -> Integers:
    """Return lengths of reset phases: most long enough, some cut off by the next edge."""
    count = len(trace.reset_ticks)
    reset = np.maximum(trace.reset_ticks, 1)
    cut = (rng.random(count) < 0.15) & (reset >= LEAST_CUT_TICKS)
    longer = np.floor(reset * rng.uniform(1.02, 3.0, count)).astype(np.int64) + 8
    shorter = 3 + np.floor((reset - 5) * rng.random(count)).astype(np.int64)
    return np.where(cut, shorter, longer)


def _moments(edge: Integers, end: Integers, rng: np.random.Generator) -> Integers:
    """Return when inputs change: between two edges, at least a tick away from any clock edge."""
    before = np.append(0, edge[:-1])
    moment = np.floor(before + (edge - before) * rng.uniform(0.05, 0.95, len(edge)))
    moment = np.clip(moment.astype(np.int64), before + 2, edge - 2)
    previous_end = np.append(0, end[:-1])
    moment = np.where(np.abs(moment - previous_end) <= 1, previous_end + 2, moment)
    moment[0] = 0
    return moment
