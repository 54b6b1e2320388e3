"""What a check would have caught: the smallest errors of its module, from its own samples.

An error that is present everywhere in one process is caught decision by decision when it
moves a compared bit, or a delay by more ticks than are allowed: the decisions that were aimed
closest say how small it may be. The distribution alone, which needs no common random numbers,
sees what its counts tell from the right ones; their acceptance is exactly binomial.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from functools import partial
from typing import Any

import numpy as np
import numpy.typing as npt

from behavgen.check.agreement import INEXACT_SHARE
from behavgen.check.runs import reference_of
from behavgen.check.slices import PlayedRun
from behavgen.check.verdict import DistributionResult, PowerResult
from behavgen.model import ComparatorModel
from behavgen.operating_point import evaluate

__all__ = [
    "PROBABILITY",
    "BlockPower",
    "block_power",
    "decision_power",
    "distribution_power",
]

PROBABILITY = 0.99
"""With which an error of the stated size would have been caught."""
BY_DECISION = "decision by decision"
BY_DISTRIBUTION = "by distribution"

_QUANTILE = 2.3263478740408408
"""Of the standard normal at 99 %."""
_SEEN_TICKS = 2.0
"""A delay that is off by so much is a tick beyond what is allowed, however it is rounded."""
_HALVINGS = 60
_SIGMA_PLACE = 2e-15
"""Relative; a smaller change of sigma is lost in the last place of its logarithm."""

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class BlockPower:
    """Smallest errors that one block sees; infinite where it sees none.

    Parameters
    ----------
    process : str
    offset_v : float
        Of the trip point, either sign.
    sigma, tau, delay : float
        Relative.
    """

    process: str
    offset_v: float
    sigma: float
    tau: float
    delay: float


def block_power(model: ComparatorModel, played: PlayedRun) -> BlockPower:
    """Return what one block of decisions sees.

    Parameters
    ----------
    model : ComparatorModel
    played : PlayedRun
    """
    shown = played.expected.resolved & ~played.expected.excluded
    overdrive_v = played.stimulus.trace.overdrive_v
    timed = played.agreement.timed & bool(played.expected.delay_tolerance)
    ticks = played.stimulus.trace.delay_ticks.astype(float)
    noise_v = _noise_v(model, played)
    moved = shown & (np.abs(noise_v) > 0.0)
    tau_ticks, tail_ticks = _tail(model, played)
    tail = timed & (tail_ticks > 0.0) & (overdrive_v != 0.0)
    near, late = overdrive_v[shown], tau_ticks[tail] / np.abs(overdrive_v[tail])
    return BlockPower(
        process=played.run.meant.process,
        offset_v=max(
            min(_flips(near, np.ones(len(near))), _delay_error(late)), _last_place_v(played)
        ),
        sigma=max(
            min(_flips(overdrive_v[moved], noise_v[moved]),
                _delay_error(late * np.abs(noise_v[tail]))),
            _SIGMA_PLACE,
        ),
        tau=_delay_error(tail_ticks[timed]),
        delay=_delay_error(ticks[timed]),
    )  # fmt: skip


def _flips(overdrive_v: Floats, per_error: Floats) -> float:
    """Return the smallest error, per unit of which overdrives move, that turns a bit either way."""
    needed = -overdrive_v / per_error
    up, down = needed[needed > 0.0], -needed[needed < 0.0]
    return max(float(np.min(up, initial=np.inf)), float(np.min(down, initial=np.inf)))


def _condition(model: ComparatorModel, played: PlayedRun) -> dict[str, Any]:
    """Return the conditions of the decisions as the reference takes them."""
    meant, stimulus = played.run.meant, played.stimulus
    fixed = {"temp_c": meant.temperature_c, "process": meant.process, "vcm": stimulus.vcm_v}
    return fixed if model.cell.pins.vdd is None else fixed | {"vdd": stimulus.vdd_v}


def _last_place_v(played: PlayedRun) -> float:
    """Return what an offset must be to change a trip point at all."""
    trip_v = played.stimulus.sampled_v - played.stimulus.trace.overdrive_v
    return 2.0 * float(np.spacing(np.max(np.abs(trip_v), initial=0.0)))


def _noise_v(model: ComparatorModel, played: PlayedRun) -> Floats:
    """Return the noise of each decision; 0 where none was drawn."""
    run, stimulus = played.run, played.stimulus
    if not run.meant.noise_on or model.noise is None:
        return np.zeros(len(stimulus.edge))
    reference = reference_of(model, run)
    condition = _condition(model, played)
    trip_v = reference.offset(**condition) + run.meant.offset_shift_v
    trip_v = trip_v + reference.mismatch_v(**condition) + stimulus.trace.memory_v
    noise_v = stimulus.trace.overdrive_v - (stimulus.sampled_v - trip_v)
    drawn = np.abs(noise_v) > 1e-6 * reference.noise_sigma(**condition)
    return np.where(drawn, noise_v, 0.0)


def _tail(model: ComparatorModel, played: PlayedRun) -> tuple[Floats, Floats]:
    """Return tau in ticks, and how much of each delay is proportional to it."""
    stimulus = played.stimulus
    if model.delay is None:
        return (np.zeros(len(stimulus.edge)),) * 2
    reference = reference_of(model, played.run)
    point = reference.point(stimulus.edge.shape, _condition(model, played))
    log_node_v = np.log(model.delay.node_overdrive_v[0])
    tau_ticks = evaluate(model.delay.tau, point) * model.cell.ticks_per_second
    overdrive_v = np.abs(stimulus.trace.overdrive_v)
    known = np.log(np.maximum(overdrive_v, model.delay.floor_v))
    below = np.where(overdrive_v > model.delay.floor_v, log_node_v - known, 0.0)
    return tau_ticks, np.asarray(tau_ticks * np.maximum(below, 0.0))


def _delay_error(ticks: Floats) -> float:
    """Return the smallest relative error that is seen in delays of so many ticks.

    Either one is off by more than is allowed, or more of them than a right module may are
    rounded to another tick: each is with the probability ``error x ticks``.
    """
    if not len(ticks) or not np.any(ticks > 0.0):
        return math.inf
    allowed = 1.0 + INEXACT_SHARE * len(ticks)

    def seen(error: float) -> bool:
        share = np.minimum(error * ticks, 1.0)
        spread = math.sqrt(float((share * (1.0 - share)).sum()))
        return float(share.sum()) - _QUANTILE * spread > allowed

    surely = _SEEN_TICKS / float(np.max(ticks))
    return _smallest(seen, 1e-9 * surely, surely) if seen(surely) else surely


def _smallest(seen: Callable[[float], bool], low: float, high: float) -> float:
    """Return the smallest error that is seen, between one that is not and one that is."""
    for _ in range(_HALVINGS):
        middle = math.sqrt(low * high)
        low, high = (low, middle) if seen(middle) else (middle, high)
    return high


def decision_power(blocks: Iterable[BlockPower]) -> tuple[PowerResult, ...]:
    """Return the smallest errors that all blocks together see, in the process that sees least.

    Parameters
    ----------
    blocks : iterable of BlockPower
    """
    known = list(blocks)
    processes = dict.fromkeys(block.process for block in known)
    found = []
    for quantity, name, unit in (
        ("offset", "offset_v", "V"), ("sigma", "sigma", "1"), ("tau", "tau", "1"),
        ("delay", "delay", "1"),
    ):  # fmt: skip
        least = max(
            (min(getattr(block, name) for block in known if block.process == process)
             for process in processes),
            default=math.inf,
        )  # fmt: skip
        if math.isfinite(least):
            found.append(PowerResult(quantity=quantity, error=least, unit=unit, how=BY_DECISION))
    return tuple(found)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Counted:
    """A count of ones at a distance from the trip point, and what of it is accepted."""

    level: float
    sample: int
    low: int
    high: int

    def miss(self, level: float) -> float:
        """Return the probability of acceptance where the input lies at another distance."""
        from scipy.special import bdtr, ndtr  # noqa: PLC0415

        share = float(ndtr(level))
        below = float(bdtr(self.low - 1, self.sample, share)) if self.low > 0 else 0.0
        return max(float(bdtr(self.high, self.sample, share)) - below, 0.0)


def distribution_power(results: Sequence[DistributionResult]) -> tuple[PowerResult, ...]:
    """Return the smallest errors that the distribution alone sees, in the process that sees least.

    Offset in sigmas, sigma and mismatch relative. An error of one sign may be easier to see:
    stated is what is seen of either.

    Parameters
    ----------
    results : sequence of DistributionResult
    """
    processes: dict[str, list[_Counted]] = {}
    for one in results:
        found = re.fullmatch(r"ones at ([-+][\d.e-]+) sigma, (.*)", one.name)
        if found:
            processes.setdefault(found[2], []).append(_counted(float(found[1]), one))
    quantities: list[tuple[str, str, float]] = []
    if processes:
        every = list(processes.values())
        quantities = [
            ("offset", "sigma", max(_either(partial(_miss_offset, one)) for one in every)),
            ("sigma", "1", max(_either(partial(_miss_sigma, one)) for one in every)),
        ]  # fmt: skip
    mismatch = [one for one in results if one.name.startswith("mismatch sigma")]
    if mismatch:
        least = max(_either(partial(_miss_mismatch, one)) for one in mismatch)
        quantities.append(("mismatch", "1", least))
    return tuple(
        PowerResult(quantity=name, error=error, unit=unit, how=BY_DISTRIBUTION)
        for name, unit, error in quantities
    )


def _counted(level: float, one: DistributionResult) -> _Counted:
    """Return the counts whose two-sided p-value passes."""
    from scipy.special import bdtr, bdtrc, ndtr  # noqa: PLC0415

    count, share = np.arange(one.sample + 1), float(ndtr(level))
    low, high = bdtr(count, one.sample, share), bdtrc(count - 1, one.sample, share)
    high[0] = 1.0
    passing = np.flatnonzero(2.0 * np.minimum(low, high) >= one.least_p)
    return _Counted(level=level, sample=one.sample, low=int(passing[0]), high=int(passing[-1]))


def _miss_offset(counted: Sequence[_Counted], error: float) -> float:
    """Return how often an offset of so many sigmas is not seen."""
    return math.prod(one.miss(one.level - error) for one in counted)


def _miss_sigma(counted: Sequence[_Counted], error: float) -> float:
    """Return how often a sigma that is too large by a share is not seen."""
    return math.prod(one.miss(one.level / (1.0 + error)) for one in counted)


def _miss_mismatch(one: DistributionResult, error: float) -> float:
    from scipy.special import chdtr, chdtri  # noqa: PLC0415

    tail, larger = 0.5 * one.least_p, (1.0 + error) ** 2
    high, low = chdtri(one.sample, tail), chdtri(one.sample, 1.0 - tail)
    return float(chdtr(one.sample, high / larger) - chdtr(one.sample, low / larger))


def _either(miss: Callable[[float], float]) -> float:
    """Return the smallest error that is seen whichever sign it has."""
    up = _least(lambda error: miss(error) <= 1.0 - PROBABILITY)
    down = _least(lambda error: miss(-error) <= 1.0 - PROBABILITY)
    return max(up, down)


def _least(seen: Callable[[float], bool]) -> float:
    return _smallest(seen, 1e-6, 0.95 if seen(0.95) else 20.0)
