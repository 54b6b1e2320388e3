"""A test circuit around an emitted event-driven Verilog-A comparator, run by evas-sim."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from behavgen.emit.verilog_a_event import verilog_a_event
from behavgen.model import ComparatorModel
from behavgen.simulators.evas import Waves, find_evas

RAMP_S = 10e-12

Corners = Sequence[tuple[float, float]]
"""Of a piecewise linear source: time in s, voltage in V."""


@dataclass(frozen=True, kw_only=True)
class Cycle:
    """A reset, in whose middle the sources change, and the decision phase after it."""

    vdiff: float = 0.0
    vdd: float = 1.2
    vcm: float = 0.65
    reset_s: float = 1e-9
    phase_s: float = 2e-9


@dataclass(frozen=True, kw_only=True)
class Played:
    """What the circuit did; edges are where the clock crosses half the supply."""

    waves: Waves
    edges: np.ndarray
    ends: np.ndarray

    def level(self, pin: str, time: float) -> float:
        return float(np.interp(time, self.waves["time"], self.waves[pin]))

    def levels(self, time: float) -> list[float]:
        return [self.level(pin, time) for pin in ("outp", "outn")]

    def apart(self, time: np.ndarray) -> np.ndarray:
        difference = self.waves["outp"] - self.waves["outn"]
        return np.interp(time, self.waves["time"], difference)

    def crossing(self, wave: np.ndarray, level: float, after: float) -> float:
        """Return when a wave first crosses a level, either way, after a moment; NaN if never."""
        time, beyond = self.waves["time"], wave - level
        turned = (beyond[:-1] < 0.0) != (beyond[1:] < 0.0)
        at = np.flatnonzero(turned & (time[1:] > after))
        if not len(at):
            return float("nan")
        i = at[0]
        step = (time[i + 1] - time[i]) / (beyond[i + 1] - beyond[i])
        return float(time[i] - step * beyond[i])


@dataclass(frozen=True, kw_only=True)
class Circuit:
    """The circuit of a model; evas-sim knows no other temperature than 27 degrees Celsius.

    With `observed`, an expression of the module's variables, `outn` shows that in V.
    """

    model: ComparatorModel
    folder: Path
    parameters: dict[str, float] = field(default_factory=dict)
    observed: str = ""

    def play(self, cycles: Sequence[Cycle], **sources: Corners) -> Played:
        """Run cycles; a keyword gives a node another source."""
        emitted = verilog_a_event(self.model)
        # evas-sim reads one excluded value at most.
        text = re.sub(r" exclude \d+", "", emitted.text)
        if self.observed:
            text = re.sub(r"V\(outn, vss\) <\+ .*;", f"V(outn, vss) <+ {self.observed};", text)
        (self.folder / emitted.path).write_text(text, encoding="utf-8")
        edges = np.cumsum([c.reset_s for c in cycles])
        edges = edges + np.append(0.0, np.cumsum([c.phase_s for c in cycles])[:-1])
        ends = edges + [c.phase_s for c in cycles]
        deck = self._deck(self._sources(cycles, edges, ends) | sources, ends[-1] + 0.5e-9)
        return Played(waves=find_evas().run(deck, folder=self.folder), edges=edges, ends=ends)

    def _sources(
        self, cycles: Sequence[Cycle], edges: np.ndarray, ends: np.ndarray
    ) -> dict[str, Corners]:
        falling = self.model.cell.decides_on == "falling"
        first = cycles[0]
        corners: dict[str, list[tuple[float, float]]] = {
            "vdd": [(0.0, first.vdd)], "inp": [(0.0, first.vcm + first.vdiff / 2)],
            "inn": [(0.0, first.vcm - first.vdiff / 2)], "clk": [(0.0, first.vdd * falling)],
        }  # fmt: skip
        for cycle, edge, end in zip(cycles, edges, ends, strict=True):
            change = edge - cycle.reset_s / 2
            rest, decide = cycle.vdd * falling, cycle.vdd * (not falling)
            values = {"vdd": cycle.vdd, "inp": cycle.vcm + cycle.vdiff / 2,
                      "inn": cycle.vcm - cycle.vdiff / 2, "clk": rest}  # fmt: skip
            for name, value in values.items():
                if value != corners[name][-1][1]:
                    corners[name] += [(change, corners[name][-1][1]), (change + RAMP_S, value)]
            for moment, before, after in ((edge, rest, decide), (end, decide, rest)):
                corners["clk"] += [(moment - RAMP_S / 2, before), (moment + RAMP_S / 2, after)]
        return {**corners, "en": [(0.0, 2.0)]}

    def _deck(self, sources: dict[str, Corners], stop: float) -> str:
        pins = self.model.cell.pins
        nodes = {"inp": pins.inp, "inn": pins.inn, "clk": pins.clk, "en": pins.enable,
                 "outp": pins.outp, "outn": pins.outn, "vdd": pins.vdd}  # fmt: skip
        connected = " ".join(node for node, pin in nodes.items() if pin is not None)
        settings = " ".join(f"{name}={value!r}" for name, value in self.parameters.items())
        outputs = [node for node in ("outp", "outn") if nodes[node] is not None]
        lines = [
            "simulator lang=spectre",
            "global 0",
            f'ahdl_include "{self.model.cell.name}_event.va"',
            *(f"V{name} ({name} 0) vsource {_wave(corners)}" for name, corners in sources.items()),
            f"X1 ({connected} 0) {self.model.cell.name}_event {settings}",
            f"tran tran stop={float(stop)!r} maxstep=50p",
            f"save {' '.join(f'{name}:17e' for name in outputs)}",
        ]
        return "\n".join(lines) + "\n"


def _wave(corners: Corners) -> str:
    """Write a piecewise linear source."""
    numbers = " ".join(f"{float(time)!r} {float(value)!r}" for time, value in corners)
    return f"type=pwl wave=[{numbers}]"
