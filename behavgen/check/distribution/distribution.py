"""Noise, mismatch and coins of many simulated instances against their distributions.

    S-curves        ones at five inputs against the Gaussian, counts exactly
    mismatch        trip points of many instances: mean and variance
    independence    noise between decisions, between instances; mismatch between
                    instances and from noise; coins from each other and from noise

Seeds are drawn from one number: fixed, so that a right model never alarms, or
fresh, with the family's rate of false alarms as stated.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
import numpy.typing as npt

from behavgen.check.closure.places import Place, place_of
from behavgen.check.closure.searches import narrowed
from behavgen.check.closure.shots import Bench, Shots, joined, shots
from behavgen.check.distribution.statistics import (
    binomial_p,
    correlation_p,
    normal_p,
    product_p,
    variance_p,
)
from behavgen.check.runs import Settings
from behavgen.check.simulation import Simulation
from behavgen.check.verdict import BenchResult, DistributionResult
from behavgen.formulas.random_stream import path_seed
from behavgen.model import ComparatorModel, Condition
from behavgen.operating_point import OperatingPoint, evaluate
from behavgen.reference import Reference
from behavgen.units import format_si

__all__ = ["FAMILY_RATE", "distribution", "distribution_results"]

FAMILY_RATE = 1e-3
"""How often all statistics together alarm on a right model, seeds being fresh."""
INSTANCES = 40
"""Shared out among processes; a quarter takes its seed from its path."""
FEWEST_INSTANCES = 12
"""Of a process."""
LEVELS_SIGMA = (-1.575, -0.5, 0.5, 1.575)
"""Of the S-curves; 1.575 tells most about sigma (Fisher information of a probit)."""
AT_LEVEL = 90
"""Decisions of an instance at each of these inputs."""
BALANCED = 200
"""Decisions of an instance at its trip point."""
COINS = 4
"""Instances that toss a coin at every second decision."""
COIN_TOSSES = 600
_LAGS = (1, 2, 3)
_BALANCED = len(LEVELS_SIGMA) * AT_LEVEL
_SPAN_SIGMAS = 8.0

Integers = npt.NDArray[np.int64]
Floats = npt.NDArray[np.float64]
_Finding = tuple[str, int, float, str]
"""Name, sample, p-value and words of a statistic."""


def distribution(
    simulation: Simulation, model: ComparatorModel, text: str, *, seed: int
) -> tuple[DistributionResult, ...]:
    """Return every statistic of the random part; none where nothing is random.

    Parameters
    ----------
    simulation : Simulation
        With a working folder of its own.
    model : ComparatorModel
    text : str
        The module under check.
    seed : int
        From which the seeds of all instances follow.
    """
    if model.noise is None and model.mismatch is None:
        return ()
    found = list(_Sample(simulation, model, text, seed).findings())
    return tuple(
        DistributionResult(
            name=name, sample=sample, p_value=p, least_p=FAMILY_RATE / len(found), told=told
        )
        for name, sample, p, told in found
    )


def distribution_results(found: tuple[DistributionResult, ...]) -> tuple[BenchResult, ...]:
    """Return one result for each statistic."""
    return tuple(
        BenchResult(
            name=f"the random part is distributed as it must be: {one.name}",
            passed=one.passed,
            message="" if one.passed else f"{one.told}; p-value {one.p_value:.2g}",
        )
        for one in found
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Kind:
    """Instances of one process and what the reference says there."""

    place: Place
    first: int
    trip_v: float
    sigma_v: float
    mismatch_sigma_v: float


class _Sample:
    """Instances with seeds of their own, and what they showed."""

    def __init__(
        self, simulation: Simulation, model: ComparatorModel, text: str, seed: int
    ) -> None:
        self.model = model
        self.each = max(INSTANCES // len(model.processes), FEWEST_INSTANCES)
        places = [place_of(model, Condition(process=one.name)) for one in model.processes]
        self.kinds = [_kind(model, p, first=n * self.each) for n, p in enumerate(places)]
        noisy = [_settings(kind.place, seed, n) for kind in self.kinds for n in range(self.each)]
        tossing = [
            replace(one, unresolved_mode=1, force_unresolved_every=2) for one in noisy[:COINS]
        ]
        drawn = [replace(one, noise_on=False, mismatch_on=True) for one in noisy]
        self.tossing, self.drawn = len(noisy), len(noisy) + len(tossing)
        settings = [*noisy, *tossing, *drawn]
        self.bench = Bench(simulation, model, text, settings, f"behavgen_seed={seed}")
        self.phase = _phase_ticks(model)

    def findings(self) -> Iterator[_Finding]:
        """Return every statistic."""
        bits, tosses = self._noise() if self.model.noise is not None else ({}, None)
        offsets = self._offsets() if self.model.mismatch is not None else {}
        for kind in self.kinds:
            own, drawn = bits.get(kind.place), offsets.get(kind.place)
            if own is not None:
                yield from _s_curve(kind, own)
                yield from _noise_independence(kind, 2 * own[:, _BALANCED:] - 1)
            if drawn is not None:
                yield from _mismatch(kind, drawn)
            if own is not None and drawn is not None:
                p = correlation_p(drawn, own[:, _BALANCED:].mean(axis=1))
                yield f"mismatch and noise, {kind.place.process}", self.each, p, "uncorrelated"
        if tosses is not None:
            yield from _coins(tosses)

    def _noise(self) -> tuple[dict[Place, Integers], Integers]:
        """Return every instance's bits at the levels and at the trip point, and the tosses."""
        level = np.append(np.repeat(LEVELS_SIGMA, AT_LEVEL), np.zeros(BALANCED))
        parts = [
            self._shots(kind, kind.first + np.arange(self.each),
                        np.tile(kind.trip_v + kind.sigma_v * level, (self.each, 1)))
            for kind in self.kinds
        ]  # fmt: skip
        at_trip = np.full((COINS, 2 * COIN_TOSSES), self.kinds[0].trip_v)
        tossed = self._shots(self.kinds[0], self.tossing + np.arange(COINS), at_trip)
        seen = self.bench.measure(joined([*parts, tossed]))
        shown = np.where(seen.bit >= 0, seen.bit, seen.after)
        size = self.each * len(level)
        bits = {
            kind.place: shown[n * size : (n + 1) * size].reshape(self.each, -1)
            for n, kind in enumerate(self.kinds)
        }
        return bits, shown[len(self.kinds) * size :].reshape(COINS, -1)

    def _offsets(self) -> dict[Place, Floats]:
        """Search the trip point of every instance with its mismatch, noise off."""
        middle = np.repeat([kind.trip_v for kind in self.kinds], self.each)
        span = _SPAN_SIGMAS * np.repeat([kind.mismatch_sigma_v for kind in self.kinds], self.each)

        def ones(vdiff: Floats) -> npt.NDArray[np.bool_]:
            parts = [
                self._shots(kind, self.drawn + kind.first + np.arange(self.each),
                            vdiff[kind.first : kind.first + self.each])
                for kind in self.kinds
            ]  # fmt: skip
            return (self.bench.measure(joined(parts)).bit == 1).reshape(vdiff.shape)

        found = narrowed(middle - span, middle + span, ones, rounds=3, points=24)
        return {kind.place: found[kind.first : kind.first + self.each] for kind in self.kinds}

    def _shots(self, kind: _Kind, instance: Integers, vdiff: Floats) -> Shots:
        return shots(
            instance[:, None], vdd_v=kind.place.vdd_v, vcm_v=kind.place.vcm_v, vdiff_v=vdiff,
            phase_ticks=self.phase,
        )  # fmt: skip


def _coins(shown: Integers) -> Iterator[_Finding]:
    """Judge instances that toss at every second decision and decide by noise at the others."""
    noise, coin = 2 * shown[:, 0::2] - 1, 2 * shown[:, 1::2] - 1
    heads = int((coin == 1).sum())
    p = binomial_p(heads, coin.size, 0.5)
    yield "coins are fair", coin.size, p, f"{heads} of {coin.size} heads"
    yield _pairs("coins between decisions", coin[:, :-1], coin[:, 1:])
    yield _pairs("coins between instances", coin[:-1], coin[1:])
    yield _pairs("coins and the noise before", noise, coin)
    yield _pairs("coins and the noise after", coin[:, :-1], noise[:, 1:])


def _settings(place: Place, seed: int, number: int) -> Settings:
    own = 0 if number % 4 == 3 else path_seed(f"{seed} {place.process} instance {number}")
    return Settings(
        process=place.process, temperature_c=place.temperature_c, memory_on=False, seed=own
    )


def _kind(model: ComparatorModel, place: Place, *, first: int) -> _Kind:
    reference = Reference(model)
    condition: dict[str, Any] = {
        "vdd": place.vdd_v, "vcm": place.vcm_v, "temp_c": place.temperature_c,
        "process": place.process,
    }  # fmt: skip
    return _Kind(
        place=place, first=first, trip_v=float(reference.offset(**condition)),
        sigma_v=float(reference.noise_sigma(**condition)),
        mismatch_sigma_v=_mismatch_sigma(model, reference.point((), condition)),
    )  # fmt: skip


def _mismatch_sigma(model: ComparatorModel, point: OperatingPoint) -> float:
    components = () if model.mismatch is None else model.mismatch.components
    return float(np.sqrt(sum(evaluate(one, point)[0] ** 2 for one in components)))


def _phase_ticks(model: ComparatorModel) -> int:
    slowest = 0.0 if model.delay is None else float(np.max(Reference(model).delay(0.0)))
    return max(1000, int(4.0 * slowest * model.cell.ticks_per_second))


def _s_curve(kind: _Kind, bits: Integers) -> Iterator[_Finding]:
    from scipy.special import ndtr  # noqa: PLC0415

    for n, level in enumerate((*LEVELS_SIGMA, 0.0)):
        begin = n * AT_LEVEL
        own = bits[:, begin : begin + (AT_LEVEL if n < len(LEVELS_SIGMA) else BALANCED)]
        ones, share = int((own == 1).sum()), float(ndtr(level))
        yield (
            f"ones at {level:+g} sigma, {kind.place.process}", own.size,
            binomial_p(ones, own.size, share), f"{share:.4f} expected, {ones / own.size:.4f} found",
        )  # fmt: skip


def _noise_independence(kind: _Kind, signs: Integers) -> Iterator[_Finding]:
    name = kind.place.process
    for lag in _LAGS:
        yield _pairs(f"noise {lag} decisions apart, {name}", signs[:, :-lag], signs[:, lag:])
    half = len(signs) // 2
    yield _pairs(f"noise of neighbouring instances, {name}", signs[:-1], signs[1:])
    yield _pairs(f"noise of instances far apart, {name}", signs[:half], signs[half : 2 * half])


def _pairs(name: str, a: Integers, b: Integers) -> _Finding:
    share = float((a == b).mean())
    return name, a.size, product_p(a, b), f"half of the pairs alike expected, {share:.4f} found"


def _mismatch(kind: _Kind, offsets: Floats) -> Iterator[_Finding]:
    sigma, count, name = kind.mismatch_sigma_v, len(offsets), kind.place.process
    normal = (offsets - kind.trip_v) / sigma
    found = format_si(float(normal.std()) * sigma, "V", 3)
    yield (f"mismatch sigma, {name}", count, variance_p(float((normal**2).sum()), count),
           f"{format_si(sigma, 'V', 3)} expected, {found} found")  # fmt: skip
    z = float(normal.mean()) * count**0.5
    yield (f"mismatch mean, {name}", count, normal_p(z), f"{z:.2f} standard errors from the trip")
    yield (f"mismatch of neighbouring seeds, {name}", count - 1,
           correlation_p(normal[:-1], normal[1:]), "uncorrelated expected")  # fmt: skip
