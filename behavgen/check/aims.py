"""Inputs aimed at the trip point of each decision, from a chosen distance."""

from __future__ import annotations

from typing import Any

import numpy as np
import numpy.typing as npt

from behavgen.check.conditions import spread_conditions
from behavgen.check.runs import Run
from behavgen.formulas import random_stream
from behavgen.formulas.random_stream import path_seed
from behavgen.model import ComparatorModel
from behavgen.reference import Reference
from behavgen.trace import Trace

__all__ = ["BALANCED", "LEAST_SWEPT_V", "NOISY", "SMALL", "SWEEP", "ZERO", "Aimed"]

Floats = npt.NDArray[np.float64]
Integers = npt.NDArray[np.int64]

SWEEP, SMALL, NOISY, BALANCED, ZERO = range(5)

LEAST_SWEPT_V = 1e-7
NOISY_SIGMAS = 10.0
_LARGEST_V = 0.5
_REST_V = 1e-13
"""What a balanced run's input leaves of its noise."""


class Aimed:
    """Conditions of a block's decisions and how far from their trip points inputs shall lie.

    Parameters
    ----------
    model : ComparatorModel
    run : Run
    reference : Reference
        Of the run.
    rng : Generator

    Notes
    -----
    Arrays have the shape (N,): `aim`, one of `SWEEP` and the like; `vdd_v`; `vcm_v`;
    `vdiff_v`, the differential input of decisions that remember nothing.
    """

    def __init__(
        self, model: ComparatorModel, run: Run, reference: Reference, rng: np.random.Generator
    ) -> None:
        self._reference = reference
        self._run = run
        start = int(rng.integers(1 << 20))
        self.vdd_v, self.vcm_v = spread_conditions(model, run.decisions, start=start)
        self.aim = _aims(run, reference, rng)
        self._centre_zeros()
        self.vdiff_v = self._trip(self.conditions) + self._distance(model, rng)

    @property
    def conditions(self) -> dict[str, Any]:
        """Conditions of the decisions as the reference takes them."""
        meant = self._run.meant
        return {
            "vdd": self.vdd_v, "vcm": self.vcm_v, "temp_c": meant.temperature_c,
            "process": meant.process,
        }  # fmt: skip

    def level_v(self, memory_v: Floats | float = 0.0) -> Floats:
        """Return inp, inn and vdd in V that meet the aims of decisions with a memory, (N, 3)."""
        vdiff, zero = self.vdiff_v + memory_v, self.aim == ZERO
        inp, inn = self.vcm_v + 0.5 * vdiff, self.vcm_v - 0.5 * vdiff
        return np.stack([np.where(zero, vdiff, inp), np.where(zero, 0.0, inn), self.vdd_v], axis=1)

    def trace(self, level_v: Floats, phase_ticks: Integers, reset_ticks: Integers | None) -> Trace:
        """Return what the reference makes of levels at and after the edges, (N, 3, 3)."""
        edge, sampled = level_v[:, 0], level_v[:, 1]
        given = self.conditions | {"vcm": (edge[:, 0] + edge[:, 1]) * 0.5, "vdd": edge[:, 2]}
        return self._reference.trace(
            sampled[:, 0] - sampled[:, 1], phase_ticks, reset_ticks, **given
        )

    def _centre_zeros(self) -> None:
        """Let the common mode be half the trip point, so that inn is exactly 0."""
        zero = self.aim == ZERO
        conditions = self.conditions | {"vdd": self.vdd_v[zero]}
        for _ in range(5):
            self.vcm_v[zero] = 0.5 * self._trip(conditions | {"vcm": self.vcm_v[zero]})

    def _trip(self, conditions: dict[str, Any]) -> Floats:
        shifted = self._reference.offset(**conditions) + self._run.meant.offset_shift_v
        return shifted + self._reference.mismatch_v(**conditions)

    def _distance(self, model: ComparatorModel, rng: np.random.Generator) -> Floats:
        """Return the signed distance of the input from the trip point, V."""
        count = len(self.aim)
        largest = _LARGEST_V if model.box.overdrive_v is None else 1.5 * model.box.overdrive_v.high
        sign = rng.choice([-1.0, 1.0], size=count)
        sigma = self._reference.noise_sigma(**self.conditions)
        noise = self._noise() if (self.aim == BALANCED).any() else np.zeros(count)
        rest = _REST_V if self._run.balanced else sign * _log_uniform(1e-15, 1e-8, count, rng)
        choices = (
            sign * _log_uniform(LEAST_SWEPT_V, largest, count, rng),
            sign * _log_uniform(1e-9, 1e-5, count, rng),
            sigma * rng.uniform(-NOISY_SIGMAS, NOISY_SIGMAS, count),
            rest - noise,
            np.zeros(count),
        )
        return np.choose(self.aim, choices)

    def _noise(self) -> Floats:
        """Return the noise of every decision, V: what the reference adds to an overdrive of 0."""
        meant = self._run.meant
        seed = meant.seed or path_seed(self._run.path)
        key = random_stream.stream_key(seed, meant.run_seed, random_stream.NOISE)
        drawn = random_stream.random_bits(key, np.arange(len(self.aim)))
        sigma = self._reference.noise_sigma(**self.conditions)
        noise: Floats = sigma * random_stream.standard_normal(drawn)
        return noise


def _aims(run: Run, reference: Reference, rng: np.random.Generator) -> Integers:
    if run.balanced:
        return np.full(run.decisions, BALANCED)
    if reference.noise:
        return rng.choice([SWEEP, NOISY, BALANCED], size=run.decisions, p=[0.3, 0.4, 0.3])
    exact = 0.0 if reference.mismatch else 0.04
    return rng.choice([SWEEP, SMALL, ZERO], size=run.decisions, p=[0.42, 0.58 - exact, exact])


def _log_uniform(low: float, high: float, count: int, rng: np.random.Generator) -> Floats:
    return np.exp(rng.uniform(np.log(low), np.log(high), count))
