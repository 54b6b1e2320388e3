"""What is applied to a comparator, and how often its decisions then fail."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
import numpy.typing as npt
from scipy.special import logsumexp

from behavgen.formulas.decision_errors import (
    log_error_probability,
    log_error_probability_uniform,
    log_unresolved_probability,
    log_unresolved_probability_uniform,
)

__all__ = ["Comparators", "Failures", "Levels", "Uniform"]

Floats = npt.NDArray[np.float64]

_UNIFORM_SIGMAS = 3.0
"""Of all errors that noise makes of a uniform input, 99.9 % come from nearer: the share
beyond `a` sigmas is ``1 - G(-a) / G(0)``, `G` the integral of the normal distribution."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Comparators:
    """The numbers that decide about errors, shape (...) each.

    Parameters
    ----------
    offset_v : ndarray
        Trip point of the nominal instance, V.
    sigma_v : ndarray
        Noise of one decision, V; 0 for none.
    log_half_window : ndarray
        Natural logarithm of half the unresolved window in V.
    farthest_v : ndarray or None
        Consider all instances whose trip point is no farther from the nominal one than
        this, V, and take the worst; None: the nominal instance alone.
    """

    offset_v: Floats
    sigma_v: Floats
    log_half_window: Floats
    farthest_v: Floats | None = None


class Failures(NamedTuple):
    """Natural logarithms of probabilities, shape (...) each.

    Parameters
    ----------
    noise : ndarray
        That noise turns the bit, were every decision to resolve.
    unresolved : ndarray
    either : ndarray
        That the decision is wrong or unresolved.
    """

    noise: Floats
    unresolved: Floats
    either: Floats


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Levels:
    """Inputs that occur with given weights.

    Parameters
    ----------
    vdiff_v : ndarray, shape (..., L)
        Differential inputs, V.
    right_bit : ndarray, shape (..., L)
        What should come out, 0 or 1.
    weight : ndarray, shape (L,)
        Relative frequencies.
    from_trip_point : bool
        The inputs are counted from the nominal trip point, so that the offset is no matter.
    """

    vdiff_v: Floats
    right_bit: npt.NDArray[np.int64]
    weight: Floats
    from_trip_point: bool = False

    @classmethod
    def of(
        cls,
        vdiff_v: npt.ArrayLike,
        *,
        right_bit: npt.ArrayLike | None = None,
        weight: npt.ArrayLike | None = None,
        from_trip_point: bool = False,
    ) -> Levels:
        """Return inputs of shape (..., L), L = 1 where no weights are given.

        Without `right_bit` a positive input should give a one.
        """
        vdiff = np.asarray(vdiff_v, dtype=float)
        if weight is None:
            vdiff, weight = vdiff[..., None], [1.0]
        right = np.asarray(vdiff > 0.0 if right_bit is None else right_bit, dtype=np.int64)
        return cls(
            vdiff_v=vdiff,
            right_bit=np.broadcast_to(right, vdiff.shape),
            weight=np.asarray(weight, dtype=float),
            from_trip_point=from_trip_point,
        )

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the cases."""
        return self.vdiff_v.shape[:-1]

    def failures(self, these: Comparators) -> Failures:
        """Return how often decisions fail."""
        sigma, log_half = these.sigma_v[..., None], these.log_half_window[..., None]
        half, log_weight = np.exp(log_half), np.log(self.weight / np.sum(self.weight))
        found = []
        for shift in self._shifts(these):
            distance = self._sign * (self._from_trip_point(these) - shift)
            log_p = np.stack(
                [
                    log_error_probability(distance, sigma),
                    log_unresolved_probability(distance, sigma, log_half),
                    log_error_probability(distance, sigma, half),
                ]
            )
            found.append(logsumexp(log_p + log_weight, axis=-1))
        return Failures(*np.max(found, axis=0))

    def nearest_overdrive_v(self, these: Comparators) -> Floats:
        """Return the smallest overdrive of any level and instance, V."""
        nearest = np.min(np.abs(self._from_trip_point(these)), axis=-1)
        return np.maximum(nearest - _or_nothing(these.farthest_v), 0.0)

    def nearest_trip_point_v(self, offset_v: Floats) -> Floats:
        """Return the trip point next to the present one at which a level would be balanced, V."""
        if self.from_trip_point:
            return offset_v
        nearest = np.argmin(np.abs(self.vdiff_v - offset_v[..., None]), axis=-1)
        levels = np.broadcast_to(self.vdiff_v, (*offset_v.shape, self.vdiff_v.shape[-1]))
        return np.take_along_axis(levels, nearest[..., None], axis=-1)[..., 0]

    def sigmas(self, these: Comparators) -> Floats:
        """Return how many sigmas of noise turn the bit that is turned most easily."""
        margin = self._sign * self._from_trip_point(these)
        margin = margin - _or_nothing(these.farthest_v)[..., None]
        return np.min(np.abs(margin), axis=-1) / these.sigma_v

    @property
    def _sign(self) -> Floats:
        return np.where(self.right_bit == 1, 1.0, -1.0)

    def _from_trip_point(self, these: Comparators) -> Floats:
        offset = these.offset_v[..., None]
        return self.vdiff_v - (np.zeros_like(offset) if self.from_trip_point else offset)

    def _shifts(self, these: Comparators) -> Iterator[Floats]:
        """Yield trip points from the nominal one, (..., 1): the ends and those nearest to a level.

        Noise alone is worst at an end, metastability with the trip point on a level.
        """
        if these.farthest_v is None:
            yield np.zeros(1)
            return
        far = these.farthest_v[..., None]
        yield from (-far, far)
        levels = self._from_trip_point(these)
        for k in range(levels.shape[-1]):
            yield np.clip(levels[..., k, None], -far, far)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Uniform:
    """An input uniform over a span about the nominal trip point, where the right bit changes.

    Parameters
    ----------
    span_v : ndarray, shape (...)
        From end to end, V.
    """

    span_v: Floats

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the cases."""
        return self.span_v.shape

    def failures(self, these: Comparators) -> Failures:
        """Return how often decisions fail.

        Of other instances than the nominal one, the farthest makes most wrong
        decisions, and none has more unresolved ones than the nominal.
        """
        far, half = _or_nothing(these.farthest_v), np.exp(these.log_half_window)
        span, sigma = self.span_v, these.sigma_v
        return Failures(
            noise=log_error_probability_uniform(span, sigma, 0.0, far),
            unresolved=log_unresolved_probability_uniform(span, sigma, these.log_half_window),
            either=log_error_probability_uniform(span, sigma, half, far),
        )

    def nearest_overdrive_v(self, _these: Comparators) -> None:
        """Return None: inputs come as near to the trip point as one likes."""

    def nearest_trip_point_v(self, offset_v: Floats) -> Floats:
        """Return the present trip point: the input is always about it."""
        return offset_v

    def sigmas(self, these: Comparators) -> Floats:
        """Return how many sigmas of noise make nearly all errors."""
        return np.full_like(these.sigma_v, _UNIFORM_SIGMAS)


def _or_nothing(farthest_v: Floats | None) -> Floats:
    return np.zeros(()) if farthest_v is None else farthest_v
