"""The benches that made the tables, run on the simulated module.

delay, energy    one decision at each overdrive, noise off
window           the overdrive that just resolves in the given time, searched
noise            as many decisions at each input as were counted, noise on
reset            from the end of the phase to the outputs' next change
memory           half the distance between the trip points after a one and after a zero
aperture         the time of a step from which on it no longer counts
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from behavgen.check.closure.places import Instances, Place, TableRow, levels_at, table_rows
from behavgen.check.closure.searches import narrowed
from behavgen.check.closure.shots import Bench, Seen, Shots, joined, shots
from behavgen.check.simulation import Simulation
from behavgen.model import ComparatorModel
from behavgen.reference import Reference

__all__ = ["MOST_TRIALS", "Characterised", "recharacterise"]

Floats = npt.NDArray[np.float64]
Characterised = list[tuple[TableRow, float]]
"""Rows with what was measured; not a number where nothing could be."""

MOST_TRIALS = 20_000
"""Decisions at one point of an S-curve; more were counted only where noise hardly matters."""
_TRIP_SPAN_V = 0.25
_STEP_V = 0.05


def recharacterise(
    simulation: Simulation, model: ComparatorModel, text: str, *, seed: int
) -> Characterised:
    """Measure every row of the tables anew.

    Parameters
    ----------
    simulation : Simulation
        With a working folder of its own.
    model : ComparatorModel
        Its points are the tables; its reference is asked for nothing but how long to wait.
    text : str
        The module under check.
    seed : int
        Of the noise.
    """
    return _Characterisation(simulation, model, text, seed).all_rows()


class _Characterisation:
    """Rows, the instances that they need and the bench with these."""

    def __init__(
        self, simulation: Simulation, model: ComparatorModel, text: str, seed: int
    ) -> None:
        self.model = model
        self.ticks_per_s = model.cell.ticks_per_second
        self.instances = Instances(seed=seed)
        self.rows = table_rows(
            model, "delay", "energy", "window", "noise", "reset", "memory", "memory_at_least",
            "aperture",
        )  # fmt: skip
        self.plain = {row.place: self.instances.at(row.place) for row in self.rows}
        self.remembering = {
            row.place: self.instances.at(row.place, memory_on=True) for row in self.of("memory")
        }
        self.noisy = {
            row.place: self.instances.at(row.place, noise_on=True) for row in self.of("noise")
        }
        self.bench = Bench(simulation, model, text, self.instances.settings)
        self.long_ticks = self._longest_ticks()

    def of(self, *quantities: str) -> list[TableRow]:
        """Return the rows of some quantities; memory includes what is only bounded."""
        wanted = {*quantities, *(["memory_at_least"] if "memory" in quantities else [])}
        return [row for row in self.rows if row.quantity in wanted]

    def all_rows(self) -> Characterised:
        """Measure everything."""
        places = list(self.plain)
        memory = self.of("memory")
        trips = self._trips(
            [(place, self.plain[place], 0, 0.0) for place in places]
            + [(r.place, self.remembering[r.place], s, r.x) for r in memory for s in (1, -1)]
        )
        trip = dict(zip(places, trips.tolist(), strict=False))
        pairs = trips[len(places) :].reshape(-1, 2)
        shifts = zip(memory, (0.5 * (pairs[:, 1] - pairs[:, 0])).tolist(), strict=True)
        return [
            *self._single(trip), *self._windows(trip), *self._s_curves(), *shifts,
            *self._apertures(trip),
        ]  # fmt: skip

    def _trips(self, wanted: Sequence[tuple[Place, int, int, float]]) -> Floats:
        """Return the trip point of an instance after a decision of a sign and a reset, V."""
        vdd, vcm = levels_at([place for place, *_ in wanted])
        instance, before = (np.array([w[k] for w in wanted], dtype=int) for k in (1, 2))
        reset = np.array([round(w[3] * self.ticks_per_s) for w in wanted], dtype=int)

        def ones(vdiff: Floats) -> npt.NDArray[np.bool_]:
            given = (a[:, None] for a in (instance, vdd, vcm, before, reset))
            one, supply, common, sign, rest = given
            seen = self.bench.measure(
                shots(one, vdd_v=supply, vcm_v=common, vdiff_v=vdiff, before=sign,
                      reset_ticks=rest, phase_ticks=self.long_ticks)
            )  # fmt: skip
            return (seen.bit == 1).reshape(vdiff.shape)

        span = np.full(len(wanted), _TRIP_SPAN_V)
        return narrowed(-span, span, ones, rounds=7, points=25)

    def _single(self, trip: dict[Place, float]) -> Characterised:
        """Measure all that takes one decision."""
        rows = self.of("delay", "energy", "reset")
        if not rows:
            return []
        seen = self.bench.measure(joined([self._at(row, trip, row.x) for row in rows]))
        return list(zip(rows, self._values(rows, seen), strict=True))

    def _at(
        self, row: TableRow, trip: dict[Place, float], overdrive_v: float, phase: int = 0
    ) -> Shots:
        """Return a shot whose bit can be seen, after its opposite where outputs hold."""
        sign, holds = self._visible_sign, self.model.cell.in_reset == "hold"
        size = 0.1 if row.quantity == "reset" else overdrive_v
        return shots(
            self.plain[row.place], vdd_v=row.place.vdd_v, vcm_v=row.place.vcm_v,
            vdiff_v=trip[row.place] + sign * size, before=-sign if holds else 0,
            reset_ticks=self.long_ticks, phase_ticks=phase or self.long_ticks,
        )  # fmt: skip

    @property
    def _visible_sign(self) -> int:
        """Sign of a decision that moves the first output from its reset state."""
        return -1 if self.model.cell.in_reset == "high" else 1

    def _values(self, rows: Sequence[TableRow], seen: Seen) -> list[float]:
        delay = np.where(seen.delay_ticks >= 0, seen.delay_ticks / self.ticks_per_s, np.nan)
        reset = np.where(seen.reset_ticks >= 0, seen.reset_ticks / self.ticks_per_s, np.nan)
        found = {"delay": delay, "energy": seen.energy_j, "reset": reset}
        return [float(found[row.quantity][n]) for n, row in enumerate(rows)]

    def _windows(self, trip: dict[Place, float]) -> Characterised:
        """Search, around half of each window, the overdrive that just resolves."""
        rows = self.of("window")
        if not rows:
            return []

        def resolved(log_size: Floats) -> npt.NDArray[np.bool_]:
            parts = [
                self._at(row, trip, float(size), phase=max(round(row.x * self.ticks_per_s), 1))
                for row, sizes in zip(rows, np.exp(log_size), strict=True) for size in sizes
            ]  # fmt: skip
            return (self.bench.measure(joined(parts)).bit >= 0).reshape(log_size.shape)

        middle = np.log(0.5 * np.array([row.value for row in rows]))
        spread = np.log(2.0)
        half = np.exp(narrowed(middle - spread, middle + spread, resolved, rounds=3, points=12))
        return list(zip(rows, (2.0 * half).tolist(), strict=True))

    def _s_curves(self) -> Characterised:
        """Count ones among as many decisions as the table counted."""
        rows = self.of("noise")
        if not rows:
            return []
        counts = [min(row.trials, MOST_TRIALS) for row in rows]
        wanted = [
            shots(self.noisy[row.place], vdd_v=row.place.vdd_v, vcm_v=row.place.vcm_v,
                  vdiff_v=np.full(count, row.x), phase_ticks=self.long_ticks)
            for row, count in zip(rows, counts, strict=True)
        ]  # fmt: skip
        ones = np.split(self.bench.measure(joined(wanted)).bit == 1, np.cumsum(counts)[:-1])
        return [(row, float(one.mean())) for row, one in zip(rows, ones, strict=True)]

    def _apertures(self, trip: dict[Place, float]) -> Characterised:
        """Search when a step of the input stops to count; one row for each condition."""
        rows = [_centre(rows) for rows in _by_place(self.of("aperture"))]
        if not rows or self.model.aperture is None:
            return []
        latest = 4.0 * max(1e-12, *(row.value for row in rows)) * self.ticks_per_s

        def late(ticks: Floats) -> npt.NDArray[np.bool_]:
            parts = [
                shots(self.plain[row.place], vdd_v=row.place.vdd_v, vcm_v=row.place.vcm_v,
                      vdiff_v=trip[row.place] + _STEP_V, phase_ticks=self.long_ticks,
                      step_ticks=np.floor(each + 0.5), step_v=trip[row.place] - _STEP_V)
                for row, each in zip(rows, ticks, strict=True)
            ]  # fmt: skip
            return (self.bench.measure(joined(parts)).bit == 1).reshape(ticks.shape)

        ends = np.full(len(rows), 1.0), np.full(len(rows), latest)
        found = narrowed(*ends, late, rounds=5, points=20) / self.ticks_per_s
        return list(zip(rows, found.tolist(), strict=True))

    def _longest_ticks(self) -> int:
        """Return a phase in which even the smallest overdrive resolves at every place."""
        ticks = [1000]
        reference = Reference(self.model)
        for place in self.plain if self.model.delay is not None else ():
            slowest = reference.delay(
                0.0, vdd=place.vdd_v, vcm=place.vcm_v, temp_c=place.temperature_c,
                process=place.process,
            )  # fmt: skip
            ticks.append(int(2.0 * float(slowest) * self.ticks_per_s))
        return max(ticks)


def _by_place(rows: Sequence[TableRow]) -> list[list[TableRow]]:
    places = dict.fromkeys(row.place for row in rows)
    return [[row for row in rows if row.place == place] for place in places]


def _centre(rows: Sequence[TableRow]) -> TableRow:
    """Return the mean of the weight that a table of steps gives: where it ends, plus what is after.

    The mean of a distribution from its survival function, by the trapezoid rule.
    """
    times = sorted({row.x for row in rows})
    after = [float(np.mean([row.value for row in rows if row.x == time])) for time in times]
    value = times[0] + float(np.trapezoid(after, times))
    return TableRow(
        quantity="aperture", place=rows[0].place, number=0, x=value, value=value, trials=0
    )
