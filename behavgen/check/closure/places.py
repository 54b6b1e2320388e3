"""Where the rows of the tables were measured, and the instances that are needed there."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np

from behavgen.check.runs import Settings
from behavgen.formulas.random_stream import path_seed
from behavgen.model import ComparatorModel, Condition, CurvePoints, Range
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["Instances", "Place", "TableRow", "levels_at", "place_of", "table_rows"]

_ROOM_C, _VDD_V, _VCM_V = 27.0, 1.0, 0.5


@dataclass(frozen=True, slots=True, kw_only=True)
class Place:
    """One operating condition with every number known."""

    process: str
    temperature_c: float
    vdd_v: float
    vcm_v: float


@dataclass(frozen=True, slots=True, kw_only=True)
class TableRow:
    """One point that the model file carries of a table.

    Parameters
    ----------
    quantity : str
    place : Place
    number : int
        Of the point at its condition, from 1.
    x, value : float
    trials : int
        0 where it was not counted.
    """

    quantity: str
    place: Place
    number: int
    x: float
    value: float
    trials: int


def table_rows(model: ComparatorModel, *quantities: str) -> list[TableRow]:
    """Return all points of some quantities."""
    return [
        row for points in model.points if points.quantity in quantities
        for row in _rows(model, points)
    ]  # fmt: skip


def _rows(model: ComparatorModel, points: CurvePoints) -> list[TableRow]:
    place, trials = place_of(model, points.condition), points.trials or (0,) * len(points.x)
    return [
        TableRow(quantity=points.quantity, place=place, number=n, x=x, value=y, trials=count)
        for n, (x, y, count) in enumerate(zip(points.x, points.y, trials, strict=True), start=1)
    ]


def place_of(model: ComparatorModel, condition: Condition) -> Place:
    """Fill in what a table does not say: the first process and the middle of the range."""
    box = model.box
    kelvin = _known(condition.temperature_k, box.temperature_k, _ROOM_C + ZERO_CELSIUS_K)
    return Place(
        process=condition.process or model.processes[0].name,
        temperature_c=round(kelvin - ZERO_CELSIUS_K, 6),
        vdd_v=_known(condition.vdd_v, box.vdd_v, _VDD_V),
        vcm_v=_known(condition.vcm_v, box.vcm_v, _VCM_V),
    )


def _known(value: float | None, span: Range | None, otherwise: float) -> float:
    if value is not None:
        return value
    return otherwise if span is None else span.middle


@dataclass(slots=True, kw_only=True)
class Instances:
    """Instances that rows need, each once.

    Parameters
    ----------
    seed : int
        From which the noise of those that have some follows.
    """

    seed: int
    settings: list[Settings] = field(default_factory=list)

    def at(self, place: Place, *, noise_on: bool = False, memory_on: bool = False) -> int:
        """Return the number of an instance with these settings."""
        name = f"{self.seed} {place.process} {place.temperature_c}"
        wanted = Settings(
            process=place.process, temperature_c=place.temperature_c, noise_on=noise_on,
            memory_on=memory_on, seed=path_seed(name) if noise_on else 1,
        )  # fmt: skip
        if wanted not in self.settings:
            self.settings.append(wanted)
        return self.settings.index(wanted)


def levels_at(places: list[Place]) -> tuple[np.ndarray, np.ndarray]:
    """Return supply and common mode of places in V, shape (N,) each."""
    return np.array([p.vdd_v for p in places]), np.array([p.vcm_v for p in places])
