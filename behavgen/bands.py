"""Intervals of what users decide with, through the model's covariances.

Every quantity is a smooth function of fitted numbers whose joint covariance
the model carries; its interval follows from the first-order propagation of
that covariance (the delta method). Far below the smallest tabulated overdrive
the uncertainty of tau takes over, so that extrapolated windows widen by
themselves. Intervals cover sampling error and lack of fit, nothing else.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.special import ndtr, ndtri, stdtrit

from behavgen.formulas.node_law import node_law_delay
from behavgen.model import ComparatorModel, DelayEffect, Surface
from behavgen.operating_point import OperatingPoint, evaluate, surface_terms
from behavgen.reference import Reference

__all__ = ["Band", "Bands"]

Floats = npt.NDArray[np.float64]

_STEP = 1e-4
"""Relative step of the numerical derivatives; the law is linear in its parameters."""
_LOG_SMALLEST = -600.0
"""ln of the smallest overdrive in V that is evaluated; below, the law is a straight line."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Band:
    """Values with their interval, one shape."""

    value: Floats
    low: Floats
    high: Floats


class Bands:
    """Intervals around a model's nominal instance.

    Parameters
    ----------
    model : ComparatorModel
    level : float
        Confidence, 0..1.

    Notes
    -----
    All methods take the operating condition as `Reference` does.
    """

    def __init__(self, model: ComparatorModel, level: float = 0.95) -> None:
        self.model = model
        self.level = level
        self.reference = Reference(model)
        self._normal = float(ndtri(0.5 + 0.5 * level))

    def offset(self, **condition: npt.ArrayLike) -> Band:
        """Nominal trip point in V."""
        value = self.reference.offset(**condition)
        half = self._normal * np.sqrt(self._offset_variance(condition))
        return Band(value=value, low=value - half, high=value + half)

    def noise_sigma(self, **condition: npt.ArrayLike) -> Band:
        """Noise sigma in V."""
        value = self.reference.noise_sigma(**condition)
        return _logarithmic(value, self._normal * np.sqrt(self._sigma_variance(condition)))

    def tau(self, **condition: npt.ArrayLike) -> Band:
        """Regeneration time constant in s; NaN where not characterised."""
        effect = self.model.delay
        point = self.reference.point((), condition)
        if effect is None:
            nothing = np.full(point.shape, np.nan)
            return Band(value=nothing, low=nothing, high=nothing)
        value = evaluate(effect.tau, point).reshape(point.shape)
        alone = np.zeros((value.size, 1 + len(effect.nodes)))
        alone[:, 0] = 1.0
        return _logarithmic(value, self._law_error(alone, point).reshape(point.shape))

    def surface(self, surface: Surface, **condition: npt.ArrayLike) -> Band:
        """Value of any surface of the model, with its interval where it carries a covariance."""
        point = self.reference.point((), condition)
        value = evaluate(surface, point).reshape(point.shape)
        half = self._normal * np.sqrt(self._variance(surface, condition))
        if surface.transform == "log":
            return _logarithmic(value, half)
        return Band(value=value, low=value - half, high=value + half)

    def probability(self, vdiff_v: npt.ArrayLike, **condition: npt.ArrayLike) -> Band:
        """Probability of a one over noise; narrowest where the data were."""
        reference, normal = self.reference, self._normal
        sigma = reference.noise_sigma(**condition)
        if not np.all(sigma > 0.0):
            value = reference.probability(vdiff_v, **condition)
            return Band(value=value, low=value, high=value)
        z = (np.asarray(vdiff_v, dtype=float) - reference.offset(**condition)) / sigma
        variance = self._offset_variance(condition) / sigma**2
        half = normal * np.sqrt(variance + z * z * self._sigma_variance(condition))
        return Band(value=ndtr(z), low=ndtr(z - half), high=ndtr(z + half))

    def delay(self, overdrive_v: npt.ArrayLike, **condition: npt.ArrayLike) -> Band:
        """Delay in s at the magnitude of an overdrive in V."""
        value = self.reference.delay(overdrive_v, **condition)
        effect = self.model.delay
        if effect is None:
            return Band(value=value, low=value, high=value)
        magnitude = np.maximum(np.abs(overdrive_v), effect.floor_v)
        half_s, _ = self._delay_error(np.log(magnitude), condition)
        return _logarithmic(value, half_s / value)

    def window(self, resolve_time_s: npt.ArrayLike, **condition: npt.ArrayLike) -> Band:
        """Width in V of the input interval still unresolved at a time after the edge."""
        value = self.reference.window(resolve_time_s, **condition)
        log_window = self.log_window(resolve_time_s, **condition)
        with np.errstate(over="ignore"):
            return Band(value=value, low=np.exp(log_window.low), high=np.exp(log_window.high))

    def log_window(self, resolve_time_s: npt.ArrayLike, **condition: npt.ArrayLike) -> Band:
        """Natural logarithm of the window in V; finite where the window itself underflows."""
        resolve_s = np.asarray(resolve_time_s, dtype=float)
        value = self._log_window(resolve_s, condition)
        if self.model.delay is None:
            return Band(value=value, low=value, high=value)
        largest = np.log(self.model.delay.node_overdrive_v[-1])
        log_half_width = np.where(np.isfinite(value), value - np.log(2.0), largest)
        half_s, local_tau_s = self._delay_error(log_half_width, condition)
        half = half_s / local_tau_s
        return Band(value=value, low=value - half, high=value + half)

    def _log_window(self, resolve_time_s: Floats, condition: dict[str, npt.ArrayLike]) -> Floats:
        width = self.reference.window(resolve_time_s, **condition)
        if self.model.delay is None:
            return width
        point = self.reference.point(resolve_time_s.shape, condition)
        log_node, law = self.reference.law(point)
        excess_s = np.broadcast_to(resolve_time_s, point.shape).ravel() - law[:, 1]
        tail = np.log(2.0) + log_node[0] - excess_s / law[:, 0]
        with np.errstate(divide="ignore"):
            above = np.log(width.ravel())
        return np.where(excess_s >= 0.0, tail, above).reshape(point.shape)

    def _offset_variance(self, condition: dict[str, npt.ArrayLike]) -> Floats:
        effect = self.model.offset
        return self._variance(effect.surface if effect else None, condition)

    def _sigma_variance(self, condition: dict[str, npt.ArrayLike]) -> Floats:
        effect = self.model.noise
        return self._variance(effect.surface if effect else None, condition)

    def _variance(self, surface: Surface | None, condition: dict[str, npt.ArrayLike]) -> Floats:
        point = self.reference.point((), condition)
        if surface is None or not surface.covariance:
            return np.zeros(point.shape)
        terms = surface_terms(surface, point)
        covariance = np.array(surface.covariance)
        variance = np.einsum("nt,tu,nu->n", terms, covariance, terms)
        return np.maximum(variance, 0.0).reshape(point.shape)

    def _delay_error(
        self, log_magnitude: Floats, condition: dict[str, npt.ArrayLike]
    ) -> tuple[Floats, Floats]:
        """Return the delay's half width and the local slope -d(delay)/d(ln overdrive), s."""
        effect = self.model.delay
        assert effect is not None
        point = self.reference.point(log_magnitude.shape, condition)
        log_magnitude = np.broadcast_to(log_magnitude, point.shape).ravel()
        log_node, parameters = self.reference.law(point)
        gradient, local_tau_s = _gradient(log_magnitude, log_node, parameters)
        half_s = self._law_error(gradient, point)
        return half_s.reshape(point.shape), local_tau_s.reshape(point.shape)

    def _law_error(self, gradient: Floats, point: OperatingPoint) -> Floats:
        """Return the half width, (N,), of what has this gradient in ln tau and ln node delays."""
        effect = self.model.delay
        assert effect is not None
        scatter = _propagated(gradient, effect.scatter)
        if effect.leverage:
            terms = surface_terms(effect.tau, point)
            leverage = np.array(effect.leverage)
            scatter = scatter * np.einsum("nt,tu,nu->n", terms, leverage, terms)
        lack_of_fit = _propagated(gradient, effect.lack_of_fit)
        half: Floats = np.sqrt(
            self._quantile(effect) ** 2 * scatter + self._normal**2 * lack_of_fit
        )
        return half

    def _quantile(self, effect: DelayEffect) -> float:
        freedom = max(effect.scatter_freedom, 1)
        return float(stdtrit(freedom, 0.5 + 0.5 * self.level))


def _logarithmic(value: Floats, half: Floats) -> Band:
    with np.errstate(over="ignore"):
        return Band(value=value, low=value * np.exp(-half), high=value * np.exp(half))


def _gradient(log_magnitude: Floats, log_node: Floats, parameters: Floats) -> tuple[Floats, Floats]:
    """Return d(delay) / d ln(parameters), shape (N, K + 1), and the local slope (N,), s."""
    magnitude = np.exp(np.maximum(log_magnitude, _LOG_SMALLEST))

    def delay(at: Floats, overdrive: Floats) -> Floats:
        return node_law_delay(overdrive, log_node, at[:, 0], at[:, 1:])

    columns = []
    for k in range(parameters.shape[-1]):
        up, down = parameters.copy(), parameters.copy()
        up[:, k] *= 1.0 + _STEP
        down[:, k] *= 1.0 - _STEP
        columns.append((delay(up, magnitude) - delay(down, magnitude)) / (2.0 * _STEP))
    # Below the first node the delay grows by tau with every unit of the logarithm.
    columns[0] = columns[0] + parameters[:, 0] * np.maximum(_LOG_SMALLEST - log_magnitude, 0.0)
    lower, upper = magnitude * (1.0 - _STEP), magnitude * (1.0 + _STEP)
    slope = (delay(parameters, lower) - delay(parameters, upper)) / (2.0 * _STEP)
    return np.stack(columns, axis=-1), np.maximum(slope, 1e-6 * parameters[:, 0])


def _propagated(gradient: Floats, covariance: tuple[tuple[float, ...], ...]) -> Floats:
    if not covariance:
        return np.zeros(len(gradient))
    variance = np.einsum("nk,kl,nl->n", gradient, np.array(covariance), gradient)
    return np.maximum(variance, 0.0)
