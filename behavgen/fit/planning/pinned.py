"""What the present tables pin down already, and what they do not."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from math import hypot, inf
from statistics import median

from behavgen.fit.planning.delay_plans import delay_half_at, tau_half, widest_tau
from behavgen.fit.planning.estimates import estimate_of, half_of
from behavgen.fit.planning.goals import Goals
from behavgen.fit.planning.instances import mean_half, sigma_half
from behavgen.fit.planning.surface_values import value_at
from behavgen.model import ComparatorModel, Condition

__all__ = ["Pinned", "mismatch_sigma_v", "pinned"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Pinned:
    """How well one quantity is known at the conditions in its table.

    Parameters
    ----------
    quantity : str
    of : int
        How many intervals there are, one a condition or S-curve.
    condition : Condition
        Where the interval is widest.
    value : float or None
        There, SI; None for a quantity without a single value.
    unit : str
    half, median_half : float or None
        Half width of the interval there, and the median of all; relative, or in
        `unit` when `absolute`. None: not bounded.
    absolute : bool
    wanted : float or None
    """

    quantity: str
    of: int
    condition: Condition
    value: float | None
    unit: str
    half: float | None
    median_half: float | None
    absolute: bool = False
    wanted: float | None = None

    @property
    def reached(self) -> bool | None:
        """Whether the goal is reached; None without one."""
        if self.wanted is None:
            return None
        return self.half is not None and self.half <= self.wanted


def pinned(model: ComparatorModel, goals: Goals) -> tuple[Pinned, ...]:
    """Return one entry for each quantity that the model knows with intervals."""
    return (*_of_curves(model, goals), *_of_instances(model, goals), *_of_delay(model, goals))


def mismatch_sigma_v(model: ComparatorModel) -> float | None:
    """Return the offset's spread between instances; None where it is not known."""
    if model.mismatch is None:
        return None
    for parameter in model.parameters:
        if parameter.name == "mismatch_sigma_v":
            return parameter.estimate.value
    return hypot(*(value_at(model, part, Condition()) for part in model.mismatch.components))


def _of_curves(model: ComparatorModel, goals: Goals) -> Iterator[Pinned]:
    fits = [fit for fit in model.fits if fit.quantity == "noise"]
    if not fits:
        yield from _of_ready_made_sigma(model, goals)
    for quantity, name, wanted in (
        ("noise sigma", "noise_sigma_v", goals.sigma),
        ("trip point", "offset_v", goals.offset_v),
    ):
        halves = []
        for fit in fits:
            found = estimate_of(fit, name)
            if found is not None:
                scale = found.value if name == "noise_sigma_v" else 1.0
                halves.append((half_of(found) / scale, fit, found.value))
        if halves:
            half, fit, value = max(halves, key=lambda entry: entry[0])
            yield Pinned(
                quantity=quantity, of=len(halves), condition=fit.condition, value=value, unit="V",
                half=_finite(half), median_half=_finite(median(h for h, _, _ in halves)),
                absolute=name == "offset_v", wanted=wanted,
            )  # fmt: skip


def _of_ready_made_sigma(model: ComparatorModel, goals: Goals) -> Iterator[Pinned]:
    for parameter in model.parameters:
        if parameter.name == "noise_sigma_v":
            half = _finite(half_of(parameter.estimate) / parameter.estimate.value)
            yield Pinned(
                quantity="noise sigma", of=1, condition=Condition(), unit="V",
                value=parameter.estimate.value, half=half, median_half=half, wanted=goals.sigma,
            )  # fmt: skip


def _of_instances(model: ComparatorModel, goals: Goals) -> Iterator[Pinned]:
    spread_v = mismatch_sigma_v(model)
    if model.mismatch is None or spread_v is None:
        return
    count = model.mismatch.instances
    for quantity, value, half, absolute, wanted in (
        ("mismatch", spread_v, sigma_half(count, goals.level), False, goals.mismatch),
        ("mean offset", None, mean_half(count, goals.level) * spread_v, True, goals.mean_v),
    ):
        yield Pinned(
            quantity=quantity, of=count, condition=Condition(), value=value, unit="V",
            half=half, median_half=None, absolute=absolute, wanted=wanted,
        )  # fmt: skip


def _of_delay(model: ComparatorModel, goals: Goals) -> Iterator[Pinned]:
    worst = widest_tau(model)
    if model.delay is None or worst is None:
        return
    halves = [tau_half(fit) for fit in model.fits if fit.quantity == "delay"]
    tau = estimate_of(worst, "tau_s")
    assert tau is not None
    yield Pinned(
        quantity="tau", of=len(halves), condition=worst.condition, value=tau.value, unit="s",
        half=tau_half(worst), median_half=_finite(median(halves)), wanted=goals.tau,
    )  # fmt: skip
    yield Pinned(
        quantity="delay", of=1, condition=worst.condition, value=None, unit="s",
        half=_finite(delay_half_at(model, worst)), median_half=None, wanted=goals.delay,
    )  # fmt: skip


def _finite(half: float) -> float | None:
    return half if half < inf else None
