"""Delay tables of invented latches, solved transistor by transistor.

Independent of the demo's latch: other topologies, and another device, whose current is
that of a charge-sheet transistor, one formula from weak to strong inversion (C. Enz,
F. Krummenacher, E. Vittoz, Analog Integrated Circuits and Signal Processing 8, 1995,
83-114), with short channels' loss of mobility and a finite output conductance (coarse
textbook terms). Every inner node has its own equation; the numbers are those of no real
process. ``python -m tests.fit.transistor_latches`` writes tests/data/transistor_latches anew.
"""

from __future__ import annotations

import itertools
import sys
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from tests.fit.weak_latches import csv_text

FOLDER = Path(__file__).parents[1] / "data" / "transistor_latches"
OVERDRIVE_V = np.geomspace(1e-6, 0.3, 16)
POINTS_BETWEEN = 80
_ZERO_CELSIUS_K = 273.15
_STEP_S = 1e-12
_RESET_S = 0.25e-9
_EDGE_S = 30e-12
_CAPACITANCE_F_PER_UM = 1.0e-15
_SLOPE_FACTOR = 1.35

STRONG_ARM = """
n t clk 0 tail
n x inp t pair
n y inn t pair
n outn outp x latch
n outp outn y latch
p outn outp vdd pull
p outp outn vdd pull
p outn clk vdd reset
p outp clk vdd reset
p x clk vdd reset
p y clk vdd reset
"""
"""Rising edge, outputs high in reset."""

SHORTED_P = """
p t clk vdd tail
p x inp t pair
p y inn t pair
p outn outp x latch
p outp outn y latch
n outn outp 0 pull
n outp outn 0 pull
n outp clk outn reset
n x clk y reset
"""
"""Falling edge, outputs shorted in reset, p-channel input."""

SHORTED_N = """
n t nclk 0 tail
n x inp t pair
n y inn t pair
n outn outp x latch
n outp outn y latch
p outn outp vdd pull
p outp outn vdd pull
p outp nclk outn reset
p x nclk y reset
"""
"""Falling edge (the tail hangs on the inverted clock), outputs shorted in reset."""

TWO_STAGES = """
n t clk 0 tail
n x inp t pair
n y inn t pair
p x clk vdd reset
p y clk vdd reset
p s nclk vdd tail
p outp outn s latch
p outn outp s latch
n outp outn 0 pull
n outn outp 0 pull
n outp y 0 reset
n outn x 0 reset
"""
"""Rising edge, a stage of gain with its own tail, outputs low in reset."""


@dataclass(frozen=True, slots=True, kw_only=True)
class TransistorLatch:
    """A netlist, its sizes, and how it is characterised.

    Parameters
    ----------
    netlist : str
        A device a line: type, drain, gate, source, which size.
    width_um : dict of str to float
    load_f : float
        At each output.
    threshold_v, drive_a_per_v2, lost_mobility_per_v : float
        At 300 K; drive a micrometre, p-channel devices 0.45 of it.
    falling : bool
        Decides on the falling edge.
    temperature_c, vdd_v, vcm_v : tuple of float
        Tabulated levels.
    observed_for_s : float
    seed : int
        Of the operating points between the tabulated ones.
    """

    netlist: str
    width_um: dict[str, float]
    load_f: float
    threshold_v: float
    drive_a_per_v2: float = 4e-3
    lost_mobility_per_v: float = 2.0
    falling: bool = False
    temperature_c: tuple[float, ...] = (-40.0, 27.0, 125.0)
    vdd_v: tuple[float, ...] = (0.9, 1.0, 1.1)
    vcm_v: tuple[float, ...] = (0.5, 0.65)
    observed_for_s: float = 2e-9
    seed: int = 1

    @property
    def conditions(self):
        """Temperature (C), supply and common mode (V), one row a condition."""
        return np.array(list(itertools.product(self.temperature_c, self.vdd_v, self.vcm_v)))

    def table(self):
        """Return rows of temperature, supply, common mode, overdrive and delay."""
        conditions = np.repeat(self.conditions, len(OVERDRIVE_V), axis=0)
        overdrive_v = np.tile(OVERDRIVE_V, len(self.conditions))
        return np.column_stack([conditions, overdrive_v, self.delays(conditions, overdrive_v)])

    def between(self):
        """Return such rows at random operating points between the tabulated ones."""
        rng = np.random.default_rng(self.seed)
        low, high = self.conditions.min(axis=0), self.conditions.max(axis=0)
        conditions = np.round(low + rng.uniform(size=(POINTS_BETWEEN, 3)) * (high - low), 4)
        overdrive_v = np.exp(rng.uniform(np.log(1e-5), np.log(0.25), POINTS_BETWEEN))
        return np.column_stack([conditions, overdrive_v, self.delays(conditions, overdrive_v)])

    def delays(self, conditions, overdrive_v):
        """Return delays to a separation of half the supply in s, (N,); NaN: not in time."""
        return _Circuit(self, conditions, overdrive_v).delays()


class _Circuit:
    """N copies of a latch at conditions and inputs of their own."""

    def __init__(self, latch, conditions, overdrive_v):
        temp_c, self.vdd_v, vcm_v = conditions.T
        self.latch = latch
        kelvin = temp_c + _ZERO_CELSIUS_K
        self.thermal_v = 8.617333e-5 * kelvin  # Boltzmann over charge, CODATA 2018
        self.threshold_v = latch.threshold_v - 0.8e-3 * (kelvin - 300.0)
        self.drive = latch.drive_a_per_v2 * (kelvin / 300.0) ** -1.4
        self.fixed = {
            "0": np.zeros_like(vcm_v), "vdd": self.vdd_v,
            "inp": vcm_v + 0.5 * overdrive_v, "inn": vcm_v - 0.5 * overdrive_v,
        }  # fmt: skip
        self.devices = [line.split() for line in latch.netlist.split("\n") if line]
        ends = [end for _, drain, _, source, _ in self.devices for end in (drain, source)]
        self.nodes = [name for name in dict.fromkeys(ends) if name not in self.fixed]
        self.capacitance_f = np.array([[self._capacitance(name)] for name in self.nodes])

    def _capacitance(self, node):
        widths = [
            self.latch.width_um[size] * (drain, gate, source).count(node)
            for _, drain, gate, source, size in self.devices
        ]
        load = self.latch.load_f if node in ("outp", "outn") else 0.0
        return load + _CAPACITANCE_F_PER_UM * sum(widths)

    def delays(self):
        """Solve in time by the classical Runge-Kutta method (W. Kutta, 1901)."""
        at = np.repeat(0.5 * self.vdd_v[None], len(self.nodes), axis=0)
        plus, minus = self.nodes.index("outp"), self.nodes.index("outn")
        found, gaps = np.full(len(self.vdd_v), np.nan), []
        steps = round((_RESET_S + self.latch.observed_for_s) / _STEP_S)
        for k in range(steps):
            at = self._step(k * _STEP_S - _RESET_S, at)
            gaps = [*gaps[-3:], np.abs(at[plus] - at[minus]) - 0.5 * self.vdd_v]
            if len(gaps) < 4 or (k - 2) * _STEP_S < _RESET_S:
                continue
            new = np.isnan(found) & (gaps[1] <= 0.0) & (gaps[2] > 0.0)
            if new.any():
                within = _crossing(*(gap[new] for gap in gaps))
                found[new] = (k - 1 + within) * _STEP_S - _RESET_S
            if np.isfinite(found).all():
                break
        return found

    def _step(self, time_s, at):
        a = self._slopes(time_s, at)
        b = self._slopes(time_s + 0.5 * _STEP_S, at + 0.5 * _STEP_S * a)
        c = self._slopes(time_s + 0.5 * _STEP_S, at + 0.5 * _STEP_S * b)
        d = self._slopes(time_s + _STEP_S, at + _STEP_S * c)
        return at + _STEP_S / 6.0 * (a + 2.0 * b + 2.0 * c + d)

    def _slopes(self, time_s, at):
        phase = min(max(time_s / _EDGE_S, -0.5), 0.5)
        rising = self.vdd_v * (0.5 + 0.5 * np.sin(np.pi * phase))
        falling = self.vdd_v - rising
        clock = (falling, rising) if self.latch.falling else (rising, falling)
        volts = {**self.fixed, "clk": clock[0], "nclk": clock[1]}
        volts |= zip(self.nodes, at, strict=True)
        into = dict.fromkeys(self.nodes, 0.0)
        for kind, drain, gate, source, size in self.devices:
            current = self._current(kind, size, *(volts[name] for name in (drain, gate, source)))
            if drain in into:
                into[drain] = into[drain] - current
            if source in into:
                into[source] = into[source] + current
        return np.array([into[name] for name in self.nodes]) / self.capacitance_f

    def _current(self, kind, size, drain_v, gate_v, source_v):
        """Return the current from drain to source."""
        sign, share = (1.0, 1.0) if kind == "n" else (-1.0, 0.45)
        if kind == "p":  # the same device upside down, seen from the supply
            drain_v, gate_v, source_v = (self.vdd_v - v for v in (drain_v, gate_v, source_v))
        pinch_v = (gate_v - self.threshold_v) / _SLOPE_FACTOR
        forward, reverse = (
            np.logaddexp(0.0, 0.5 * (pinch_v - v) / self.thermal_v) for v in (source_v, drain_v)
        )
        drive = share * self.drive * self.latch.width_um[size]
        current = 2.0 * _SLOPE_FACTOR * drive * self.thermal_v**2 * (forward**2 - reverse**2)
        lost = self.latch.lost_mobility_per_v * 2.0 * self.thermal_v * np.maximum(forward, reverse)
        return sign * current * (1.0 + 0.1 * np.abs(drain_v - source_v)) / (1.0 + lost)


def _crossing(a, b, c, d):
    """Return where the cubic through four even samples turns positive, from the second on."""
    first, second = c - a / 3.0 - 0.5 * b - d / 6.0, 0.5 * (c - 2.0 * b + a)
    third = (d - a) / 6.0 + 0.5 * (b - c)
    x = b / (b - c)
    for _ in range(5):  # Newton from the chord
        value = b + x * (first + x * (second + x * third))
        x = x - value / (first + x * (2.0 * second + x * 3.0 * third))
    return x


LATCHES = {
    "shorted_p": TransistorLatch(
        netlist=SHORTED_P, falling=True, load_f=3e-15, threshold_v=0.40, vcm_v=(0.2, 0.35),
        width_um={"tail": 4.0, "pair": 3.0, "latch": 2.0, "pull": 0.8, "reset": 0.5}, seed=2,
    ),
    "shorted_n": TransistorLatch(
        netlist=SHORTED_N, falling=True, load_f=3e-15, threshold_v=0.42,
        temperature_c=(-40.0, 125.0), vcm_v=(0.5, 0.6, 0.75),
        width_um={"tail": 2.0, "pair": 2.0, "latch": 1.5, "pull": 1.5, "reset": 0.8}, seed=3,
    ),
    "two_levels": TransistorLatch(
        netlist=SHORTED_N, falling=True, load_f=4e-15, threshold_v=0.36, lost_mobility_per_v=1.5,
        vcm_v=(0.55, 0.75),
        width_um={"tail": 2.0, "pair": 3.0, "latch": 2.0, "pull": 1.0, "reset": 0.8}, seed=52,
    ),
    "weak_n": TransistorLatch(
        netlist=STRONG_ARM, load_f=3e-15, threshold_v=0.44, vcm_v=(0.5, 0.7),
        width_um={"tail": 2.0, "pair": 2.0, "latch": 1.5, "pull": 1.0, "reset": 0.7}, seed=4,
    ),
    "loaded_n": TransistorLatch(
        netlist=STRONG_ARM, load_f=18e-15, threshold_v=0.42, drive_a_per_v2=2e-3,
        lost_mobility_per_v=0.8, vdd_v=(1.08, 1.2, 1.32), vcm_v=(0.65, 0.8, 0.95),
        width_um={"tail": 6.0, "pair": 6.0, "latch": 4.0, "pull": 3.0, "reset": 2.0}, seed=5,
    ),
    "two_supplies": TransistorLatch(
        netlist=STRONG_ARM, load_f=4e-15, threshold_v=0.40, vdd_v=(0.9, 1.1),
        vcm_v=(0.5, 0.6, 0.75),
        width_um={"tail": 2.0, "pair": 3.0, "latch": 1.5, "pull": 1.0, "reset": 0.7}, seed=6,
    ),
    "two_stages": TransistorLatch(
        netlist=TWO_STAGES, load_f=3e-15, threshold_v=0.40, vcm_v=(0.45, 0.6, 0.75),
        width_um={"tail": 1.5, "pair": 2.0, "latch": 2.0, "pull": 1.0, "reset": 1.0}, seed=7,
    ),
}  # fmt: skip


if __name__ == "__main__":
    FOLDER.mkdir(exist_ok=True)
    for name in sys.argv[1:] or LATCHES:
        for suffix, rows in (("", LATCHES[name].table()), ("_between", LATCHES[name].between())):
            path = FOLDER / f"{name}{suffix}.csv"
            path.write_text(csv_text(rows))
            sys.stdout.write(f"{path.name}\n")
