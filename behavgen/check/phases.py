"""Lengths of decision and reset phases in a block.

decision   long enough, too short, just so; ended around the sampling instant
reset      long enough for the reset state, cut off by the next edge; with a
           memory from one tick to beyond all that it remembers
"""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt

from behavgen.formulas.memory import LONGEST_RESET_TAUS
from behavgen.model import ComparatorModel
from behavgen.operating_point import evaluate
from behavgen.reference import Reference
from behavgen.trace import Trace

__all__ = ["LEAST_CUT_TICKS", "decision_ticks", "memory_taus_s", "reset_ticks"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

LEAST_CUT_TICKS = 6
"""Shorter resets cannot be cut off without a tick deciding."""
_LEAST_TICKS = 4
_FADED_TAUS = 8.0


def decision_ticks(trace: Trace, rng: np.random.Generator) -> Integers:
    """Return lengths of decision phases, none that hangs on a tick.

    Parameters
    ----------
    trace : Trace
        Of decisions that have all the time they need.
    rng : Generator
    """
    delay, count = trace.delay_ticks, len(trace.delay_ticks)
    stretched = delay * rng.uniform(1.05, 3.0, count)
    shortened = delay * rng.uniform(0.02, 0.98, count)
    close = delay + rng.choice([-1.0, 1.0], size=count) * rng.integers(3, 60, count)
    around = (trace.aperture_ticks + rng.integers(-1, 2, count)).astype(float)
    samples = trace.aperture_ticks > _LEAST_TICKS
    kind = rng.choice(4, size=count, p=[0.72, 0.17, 0.07, 0.04])
    kind = np.where((kind == 3) & ~samples, 0, kind)
    ticks = np.floor(np.choose(kind, (stretched, shortened, close, around))).astype(np.int64)
    boundary = np.abs(ticks - delay) <= 1
    return np.maximum(np.where(boundary, delay + 3, ticks), _LEAST_TICKS)


def reset_ticks(
    reference: Reference, trace: Trace, rng: np.random.Generator, **condition: Any
) -> Integers:
    """Return lengths of reset phases, none that hangs on a tick.

    Parameters
    ----------
    reference : Reference
    trace : Trace
        Of the decisions before each reset.
    rng : Generator
    **condition
        Of the decisions.
    """
    count = len(trace.reset_ticks)
    reset = np.maximum(trace.reset_ticks, 1)
    cut = (rng.random(count) < 0.15) & (reset >= LEAST_CUT_TICKS)
    longer = np.floor(reset * rng.uniform(1.02, 3.0, count)).astype(np.int64) + 8
    shorter = 3 + np.floor((reset - 5) * rng.random(count)).astype(np.int64)
    ticks = np.where(cut, shorter, longer)
    if reference.memory:
        remembered = _remembered_ticks(reference, rng, **condition)
        ticks = np.where(rng.random(count) < 0.7, remembered, ticks)
        hangs = np.abs(ticks - reset) <= 1
        ticks = np.where(hangs, np.where(reset >= LEAST_CUT_TICKS, reset - 3, reset + 3), ticks)
    return ticks


def memory_taus_s(model: ComparatorModel, reference: Reference, **condition: Any) -> Floats:
    """Return the memory's time constants at some conditions in s, shape (K, N)."""
    terms = () if model.memory is None else model.memory.terms
    point = reference.point((), condition)
    return np.array([evaluate(term.tau, point) for term in terms]).reshape(len(terms), -1)


def _remembered_ticks(reference: Reference, rng: np.random.Generator, **condition: Any) -> Integers:
    """Return resets of one tick, of every share of the time constants, and of far more."""
    taus = memory_taus_s(reference.model, reference, **condition)
    if not len(taus):
        taus = np.full((1, len(condition["vdd"])), 1e-10)
    count, ticks_per_s = taus.shape[1], reference.model.cell.ticks_per_second
    shortest, longest = taus.min(axis=0) * ticks_per_s, taus.max(axis=0) * ticks_per_s
    fading = np.exp(rng.uniform(np.log(0.03 * shortest), np.log(_FADED_TAUS * longest)))
    beyond = rng.choice(np.array([shortest, longest]), axis=0) * rng.uniform(
        0.97 * LONGEST_RESET_TAUS, 1.06 * LONGEST_RESET_TAUS, count
    )
    kind = rng.choice(3, size=count, p=[0.08, 0.84, 0.08])
    few = rng.integers(1, 5, count).astype(float)
    return np.maximum(np.floor(np.choose(kind, (few, fading, beyond))), 1.0).astype(np.int64)
