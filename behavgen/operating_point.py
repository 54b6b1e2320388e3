"""A model's surfaces, and the curves they carry, at operating conditions."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, field
from typing import Any, TypeVar

import numpy as np
import numpy.typing as npt

from behavgen.formulas.exact_math import exact_exp
from behavgen.formulas.memory import memory_shift
from behavgen.formulas.node_law import node_law_delay, node_slopes
from behavgen.formulas.polynomial import (
    axis_coordinate,
    dense_coefficients,
    nested_horner,
    quantise,
)
from behavgen.model import (
    ComparatorModel,
    DelayEffect,
    EnergyEffect,
    MemoryEffect,
    Range,
    Surface,
    Variant,
)

__all__ = [
    "TEMPERATURE_STEPS_PER_K",
    "VOLTAGE_STEPS_PER_V",
    "OperatingPoint",
    "delay_law",
    "delay_s",
    "energy_j",
    "evaluate",
    "memory_shift_v",
    "operating_point",
    "overdrive_at",
    "surface_terms",
]

Floats = npt.NDArray[np.float64]
_Any = TypeVar("_Any", bound=np.generic)
_Rows = slice | npt.NDArray[np.bool_]

VOLTAGE_STEPS_PER_V = 2.0**20
TEMPERATURE_STEPS_PER_K = 2.0**10
_ZERO_CELSIUS_K = 273.15
_PORTION = 8192


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class OperatingPoint:
    """Quantised operating conditions, flattened.

    Parameters
    ----------
    vdd_v, temperature_k, vcm_v : ndarray, shape (N,)
    process : ndarray of str, shape (N,)
    shape : tuple of int
        Shape that the conditions had when broadcast.
    known : dict
        What surfaces are worth here, as far as it was asked: by the surface's identity.

    Notes
    -----
    A condition that was given as one number, or one name, is repeated without being
    copied (a stride of 0): surfaces then fold it once.
    """

    vdd_v: Floats
    temperature_k: Floats
    vcm_v: Floats
    process: npt.NDArray[np.str_]
    shape: tuple[int, ...]
    known: dict[int, tuple[Surface | DelayEffect, Any]] = field(default_factory=dict, repr=False)

    def at(self, rows: npt.NDArray[np.intp]) -> OperatingPoint:
        """Return some of the conditions."""
        return OperatingPoint(
            vdd_v=_at(self.vdd_v, rows), temperature_k=_at(self.temperature_k, rows),
            vcm_v=_at(self.vcm_v, rows), process=_at(self.process, rows), shape=rows.shape,
        )  # fmt: skip

    def equals(self, other: OperatingPoint) -> bool:
        """Return whether conditions and their shape are the same."""
        return self.shape == other.shape and all(
            np.array_equal(_distinct(mine), _distinct(others))
            for mine, others in (
                (self.vdd_v, other.vdd_v), (self.temperature_k, other.temperature_k),
                (self.vcm_v, other.vcm_v), (self.process, other.process),
            )
        )  # fmt: skip


def operating_point(
    model: ComparatorModel, shape: tuple[int, ...], condition: dict[str, npt.ArrayLike]
) -> OperatingPoint:
    """Broadcast conditions given by keyword and quantise them.

    Parameters
    ----------
    model : ComparatorModel
        Whose box gives the defaults.
    shape : tuple of int
        Shape of whatever is asked at these conditions.
    condition : dict
        Any of ``vdd`` (V), ``temp_c`` (degrees Celsius), ``vcm`` (V), ``process`` (name).

    Raises
    ------
    TypeError
        For a condition of another name.
    ValueError
        For a process that the model does not know.
    """
    unknown = set(condition) - {"vdd", "temp_c", "vcm", "process"}
    if unknown:
        raise TypeError(f"unknown condition {sorted(unknown)}; use vdd, temp_c, vcm, process")
    middle_c = _middle(model.box.temperature_k, 300.0) - _ZERO_CELSIUS_K
    vdd, temp_c, vcm = (
        np.asarray(condition.get(name, otherwise), dtype=float)
        for name, otherwise in (
            ("vdd", _middle(model.box.vdd_v)), ("temp_c", middle_c),
            ("vcm", _middle(model.box.vcm_v)),
        )
    )  # fmt: skip
    process = np.asarray(condition.get("process", model.processes[0].name), dtype=str)
    known = {process.name for process in model.processes}
    if not set(np.unique(process).tolist()) <= known:
        raise ValueError(f"unknown process; this model knows {sorted(known)}")
    shape = np.broadcast_shapes(vdd.shape, temp_c.shape, vcm.shape, process.shape, shape)
    temperature_k = temp_c + _ZERO_CELSIUS_K
    return OperatingPoint(
        vdd_v=_repeated(quantise(vdd, VOLTAGE_STEPS_PER_V), shape),
        temperature_k=_repeated(quantise(temperature_k, TEMPERATURE_STEPS_PER_K), shape),
        vcm_v=_repeated(quantise(vcm, VOLTAGE_STEPS_PER_V), shape),
        process=_repeated(process, shape),
        shape=shape,
    )


def _repeated(value: npt.NDArray[_Any], shape: tuple[int, ...]) -> npt.NDArray[_Any]:
    """Broadcast and flatten; what is the same everywhere is not copied."""
    if value.size == 1:
        return np.broadcast_to(value.reshape(()), (math.prod(shape),))
    return np.broadcast_to(value, shape).ravel()


def _at(value: npt.NDArray[_Any], rows: npt.NDArray[np.intp]) -> npt.NDArray[_Any]:
    same = value.strides == (0,) and len(value) > 0
    return np.broadcast_to(value[0], rows.shape) if same else value[rows]


def _distinct(value: npt.NDArray[_Any]) -> npt.NDArray[_Any]:
    """Return one value for all where they are known to be the same, else all."""
    return value[:1] if value.strides == (0,) else value


def _middle(span: Range | None, otherwise: float = 0.0) -> float:
    return otherwise if span is None else span.middle


def evaluate(surface: Surface, point: OperatingPoint) -> Floats:
    """Evaluate a surface, shape (N,): clamp, normalise, fold slow conditions first.

    The result is kept with the point and must not be written to.
    """
    if id(surface) not in point.known:
        value = np.empty(len(point.vdd_v))
        for name, rows in _rows_of_processes(point):
            value[rows] = _values(surface, surface.variant(name), point, rows)
        value.flags.writeable = False
        point.known[id(surface)] = (surface, value)
    known: Floats = point.known[id(surface)][1]
    return known


def _values(surface: Surface, variant: Variant, point: OperatingPoint, rows: _Rows) -> Floats:
    dense = dense_coefficients(surface.exponents, variant.coefficients)
    value = nested_horner(dense, _coordinates(surface, variant, point, rows))
    return exact_exp(value) if surface.transform == "log" else value


def _rows_of_processes(point: OperatingPoint) -> Iterator[tuple[str, _Rows]]:
    """Return each process that occurs with its rows, some at a time where there is only one."""
    names = np.unique(_distinct(point.process)).tolist()
    for name in names:
        if len(names) > 1:
            yield name, point.process == name
        else:
            yield from ((name, rows) for rows in _some_at_a_time(len(point.vdd_v)))


def _some_at_a_time(count: int) -> Iterator[slice]:
    """Return the rows in portions that stay in the processor's cache."""
    return (slice(first, first + _PORTION) for first in range(0, count, _PORTION))


def surface_terms(surface: Surface, point: OperatingPoint) -> Floats:
    """Return the value of each term of a surface's polynomial, shape (N, terms)."""
    terms = np.ones((len(point.vdd_v), len(surface.exponents)))
    powers = np.array(surface.exponents, dtype=float).reshape(len(surface.exponents), -1)
    for name, rows in _rows_of_processes(point):
        variant = surface.variant(name)
        for k, coordinate in enumerate(_coordinates(surface, variant, point, rows)):
            terms[rows] *= coordinate[:, None] ** powers[:, k]
    return terms


def _coordinates(
    surface: Surface, variant: Variant, point: OperatingPoint, rows: _Rows
) -> tuple[Floats, ...]:
    """Return one coordinate an axis, of one element where the condition is the same everywhere."""
    coordinates = []
    for axis in surface.axes:
        span: Range = getattr(variant.box, axis.condition)
        value = _distinct(getattr(point, axis.condition)[rows])
        clamped = np.minimum(np.maximum(value, span.low), span.high)
        coordinates.append(axis_coordinate(clamped, axis.shape, axis.centre, axis.half_range))
    return tuple(coordinates)


def delay_law(effect: DelayEffect, point: OperatingPoint) -> tuple[Floats, Floats, Floats]:
    """Return ln of the node overdrives (K,), tau (N,) and node delays (N, K), s."""
    log_node = np.log(np.array(effect.node_overdrive_v))
    nodes = np.stack([evaluate(node, point) for node in effect.nodes]).T
    return log_node, evaluate(effect.tau, point), nodes


@dataclass(frozen=True, slots=True)
class _KnownLaw:
    """Node delays and slopes, (N, K) each, in s, where they are known."""

    known: npt.NDArray[np.bool_]
    nodes_s: Floats
    slopes_s: Floats


def _law_at(effect: DelayEffect, point: OperatingPoint, rows: npt.NDArray[np.intp]) -> _KnownLaw:
    """Return the law, known at least at these rows; it is kept with the point."""
    count, nodes = len(point.vdd_v), len(effect.nodes)
    if id(effect) not in point.known:
        empty = _KnownLaw(np.full(count, False), *np.empty((2, nodes, count)).transpose(0, 2, 1))
        point.known[id(effect)] = (effect, empty)
    law: _KnownLaw = point.known[id(effect)][1]
    missing = rows[~law.known[rows]]
    for some in (missing[part] for part in _some_at_a_time(len(missing))):
        log_node, tau_s, nodes_s = delay_law(effect, point.at(some))
        law.nodes_s[some] = nodes_s
        law.slopes_s[some] = node_slopes(log_node, tau_s, nodes_s)
        law.known[some] = True
    return law


def delay_s(effect: DelayEffect, overdrive_v: Floats, point: OperatingPoint) -> Floats:
    """Return the delay in s at overdrives of shape (..., N).

    Most are so small that they lie on the straight line below the first node; only where
    one does not are the other nodes evaluated.
    """
    log_node, tau_s = np.log(np.array(effect.node_overdrive_v)), evaluate(effect.tau, point)
    overdrive = np.maximum(np.abs(overdrive_v), effect.floor_v)
    delay = node_law_delay(
        overdrive, log_node[:1], tau_s, evaluate(effect.nodes[0], point)[:, None]
    )
    curved = ~(np.log(overdrive) < log_node[0])
    rows = np.flatnonzero(curved.any(axis=tuple(range(curved.ndim - 1))))
    law = _law_at(effect, point, rows)
    for some in (rows[part] for part in _some_at_a_time(len(rows))):
        delay[..., some] = node_law_delay(
            overdrive[..., some], log_node, tau_s[some], law.nodes_s[some], law.slopes_s[some]
        )
    return delay


def overdrive_at(effect: DelayEffect, delay: Floats, point: OperatingPoint) -> Floats:
    """Invert the delay law, (N,) in s to V: closed form on the regenerative tail, bisection above.

    Infinite where even the largest characterised overdrive takes longer.
    """
    log_node, tau, nodes = delay_law(effect, point)
    tail = log_node[0] - (delay - nodes[:, 0]) / tau
    low = np.full(len(delay), log_node[0])
    high = np.full(len(delay), log_node[-1])
    for _ in range(60):
        middle = 0.5 * (low + high)
        slower = node_law_delay(np.exp(middle), log_node, tau, nodes) > delay
        low, high = np.where(slower, middle, low), np.where(slower, high, middle)
    inside = np.where(delay < nodes[:, -1], np.inf, np.exp(0.5 * (low + high)))
    return np.where(delay >= nodes[:, 0], np.exp(np.minimum(tail, log_node[0])), inside)


def memory_shift_v(effect: MemoryEffect, reset_time_s: Floats, point: OperatingPoint) -> Floats:
    """Return by how much the trip point favours the previous decision, (N,) in V."""
    nothing = np.zeros(len(point.vdd_v))
    return memory_shift(
        reset_time_s,
        nothing if effect.floor is None else evaluate(effect.floor, point),
        np.array([evaluate(term.shift, point) for term in effect.terms]),
        np.array([evaluate(term.tau, point) for term in effect.terms]),
        effect.cap_v,
    )


def energy_j(
    effect: EnergyEffect, overdrive_v: Floats, time_s: Floats, point: OperatingPoint
) -> Floats:
    """Return the energy of decisions, (N,) in J.

    Parameters
    ----------
    effect : EnergyEffect
    overdrive_v : ndarray, shape (N,)
        0 for decisions that did not resolve.
    time_s : ndarray, shape (N,)
        For how long the cell decided.
    point : OperatingPoint
    """
    fixed = evaluate(effect.fixed, point)
    if effect.rise is None:
        return fixed
    rise = evaluate(effect.rise, point)
    if effect.overdrive_v is None:
        return fixed + rise * time_s
    span = effect.overdrive_v
    magnitude = np.minimum(np.maximum(np.abs(overdrive_v), span.low), span.high)
    return fixed + rise * np.log(span.high / magnitude)
