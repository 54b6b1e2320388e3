"""What an emitted text provides for and its model never makes use of, over the whole range."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.check.conditions import spread_conditions
from behavgen.formulas.node_law import node_slopes
from behavgen.model import ComparatorModel
from behavgen.operating_point import delay_law, evaluate
from behavgen.reference import Reference
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["Inertness", "inertness_of"]

Floats = npt.NDArray[np.float64]

_POINTS = 4000
"""Conditions of each process and temperature, corners among them."""
_TEMPERATURES = 9


@dataclass(frozen=True, slots=True, kw_only=True)
class Inertness:
    """What never acts.

    Parameters
    ----------
    first_slope, last_slope : float
        The steepest slope at the first and last node of a segment, over the flatter of the
        chords beside it; infinite where a curve rises or has nothing to limit.
    last_slope_over_first_limit : float
        The slope at the last node over the flatter of the chords beside the first.
    slopes_fall : bool
        Whether all slopes are negative without being limited.
    delays_are_longer : bool
        Whether every delay is longer than its aperture by more than a tick.
    supply_warns : bool
        Whether there is a supply to be warned of.
    """

    first_slope: float
    last_slope: float
    last_slope_over_first_limit: float
    slopes_fall: bool
    delays_are_longer: bool
    supply_warns: bool

    def first_slope_is_free(self, chords: float) -> bool:
        """Tell whether no slope at a first node exceeds so many chords."""
        return self.first_slope < chords

    def last_slope_is_free(self, chords: float) -> bool:
        """Tell whether no slope at a last node exceeds so many chords."""
        return self.last_slope < chords


def inertness_of(model: ComparatorModel) -> Inertness:
    """Return what never acts in a model, from many conditions over its whole range."""
    supply_warns = model.box.vdd_v is not None and model.cell.pins.vdd is not None
    shares, falls, longer = [(0.0, 0.0, 0.0)], True, model.delay is not None
    for process in model.processes:
        for temperature_c in _temperatures_c(model):
            if model.delay is None:
                continue
            condition = {"temp_c": temperature_c, "process": process.name}
            found = _of_curves(model, condition)
            shares.append(found[:3])
            falls, longer = falls and found[3], longer and found[4]
    first, last, mixed = (max(column) for column in zip(*shares, strict=True))
    return Inertness(
        first_slope=first, last_slope=last, last_slope_over_first_limit=mixed, slopes_fall=falls,
        delays_are_longer=longer, supply_warns=supply_warns,
    )  # fmt: skip


def _temperatures_c(model: ComparatorModel) -> Floats:
    span = model.box.temperature_k
    if span is None:
        return np.array([27.0])
    return np.linspace(span.low, span.high, _TEMPERATURES) - ZERO_CELSIUS_K


def _of_curves(
    model: ComparatorModel, condition: dict[str, object]
) -> tuple[float, float, float, bool, bool]:
    vdd_v, vcm_v = spread_conditions(model, _POINTS, start=0)
    given = {**condition, "vdd": vdd_v, "vcm": vcm_v}
    point = Reference(model).point((_POINTS,), given)  # type: ignore[arg-type]
    assert model.delay is not None
    log_node, tau_s, node_s = delay_law(model.delay, point)
    aperture_s = 0.0 if model.aperture is None else evaluate(model.aperture.centre, point)
    clear = node_s.min(axis=1) > np.maximum(aperture_s, 0.0) + 2.0 * model.cell.time_unit_s
    if len(log_node) < 2:
        return 0.0, 0.0, 0.0, True, bool(clear.all())
    slope = node_slopes(log_node, tau_s, node_s, limited=False)
    chord = np.diff(node_s, axis=1) / np.diff(log_node)
    before = np.concatenate([chord[:, :1], chord[:, :-1]], axis=1)
    after = np.concatenate([chord[:, 1:], chord[:, -1:]], axis=1)
    flat_first, flat_last = np.maximum(before, chord), np.maximum(after, chord)
    return (
        _steepest(slope[:, :-1], flat_first), _steepest(slope[:, 1:], flat_last),
        _steepest(slope[:, 1:], flat_first), bool((slope < 0.0).all()), bool(clear.all()),
    )  # fmt: skip


def _steepest(slope: Floats, chord: Floats) -> float:
    """Return the largest slope over its chord; infinite where a chord does not fall."""
    if np.any(chord >= 0.0):
        return float("inf")
    return float(np.max(slope / chord))
