"""A test circuit around an emitted Verilog-A comparator, run by VACASK."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from behavgen.emit.verilog_a import verilog_a
from behavgen.model import ComparatorModel
from behavgen.simulators.openvaf import find_openvaf
from behavgen.simulators.vacask import Waves, find_vacask, read_waves

EDGE_S = 30e-12


@dataclass(frozen=True, kw_only=True)
class Stimulus:
    """Constant sources and a clock that starts in reset: `edge_s`, `phase_s` decision, reset."""

    vdiff: float | str = 0.0
    vdd: float | str = 1.2
    vcm: float = 0.65
    temp_c: float = 27.0
    enable: float | str = 1.2
    reset_s: float = 0.5e-9
    phase_s: float = 3e-9
    edge_s: float = EDGE_S
    cycles: float = 0.8
    clock: str = ""
    parameters: dict[str, float] = field(default_factory=dict)
    options: str = ""

    def edge(self, number: int = 0) -> float:
        """Time at which the clock is half-way to its deciding level."""
        return self.reset_s + self.edge_s / 2 + number * 2 * self.phase_s


@dataclass(frozen=True, kw_only=True)
class Circuit:
    model: ComparatorModel
    folder: Path

    @classmethod
    def of(cls, model: ComparatorModel, folder: Path, text: str = "") -> Circuit:
        """Compile what is emitted, or another text in its place, without a single warning."""
        emitted = verilog_a(model)
        source = folder / emitted.path
        source.write_text(text or emitted.text)
        library = source.with_suffix(".osdi")
        compilation = find_openvaf().compile(source, library=library, log=folder / "openvaf.log")
        assert compilation.library is not None, compilation.message
        assert compilation.warnings == 0, compilation.message
        return cls(model=model, folder=folder)

    def transient(self, stimulus: Stimulus) -> Waves:
        stop = stimulus.reset_s + 2 * stimulus.phase_s * stimulus.cycles
        return self.run(stimulus, f"tran step=10p stop={stop!r}")

    def run(self, stimulus: Stimulus, analysis: str) -> Waves:
        find_vacask().run(self.deck(stimulus, analysis), folder=self.folder, timeout_s=60.0)
        return read_waves(self.folder / "result.raw")

    def deck(self, stimulus: Stimulus, analysis: str) -> str:
        cell = self.model.cell
        pins = cell.pins
        nodes = {"inp": pins.inp, "inn": pins.inn, "clk": pins.clk, "en": pins.enable,
                 "outp": pins.outp, "outn": pins.outn, "vdd": pins.vdd}  # fmt: skip
        connected = " ".join(node for node, pin in nodes.items() if pin is not None)
        settings = " ".join(f"{name}={value!r}" for name, value in stimulus.parameters.items())
        halves = _source(stimulus.vdiff) if isinstance(stimulus.vdiff, str) else ""
        return f"""test circuit
load "{cell.name}.osdi"
model vsource vsource
model comparator {cell.name}
vdd (vdd 0) vsource {_source(stimulus.vdd)}
ven (en 0) vsource {_source(stimulus.enable)}
vcm (cm 0) vsource dc={stimulus.vcm!r}
vip (inp cm) vsource {halves or f"dc={stimulus.vdiff / 2!r}"}
vin (cm inn) vsource {halves or f"dc={stimulus.vdiff / 2!r}"}
vck (clk 0) vsource {stimulus.clock or self._clock(stimulus)}
x1 ({connected} 0) comparator {settings}
control
  options temp={stimulus.temp_c} {stimulus.options}
  analysis result {analysis}
endc
"""

    def _clock(self, stimulus: Stimulus) -> str:
        low, high = (0.0, stimulus.vdd if isinstance(stimulus.vdd, float) else 1.2)
        if self.model.cell.decides_on == "falling":
            low, high = high, low
        return (
            f'type="pulse" val0={low!r} val1={high!r} delay={stimulus.reset_s!r} '
            f"rise={stimulus.edge_s!r} fall={stimulus.edge_s!r} "
            f"width={stimulus.phase_s - stimulus.edge_s!r} period={2 * stimulus.phase_s!r}"
        )


def steps(*corners: tuple[float, float]) -> str:
    """Return a piecewise linear source through points (time, value)."""
    return 'type="pwl" wave=[' + ", ".join(f"{t!r}, {v!r}" for t, v in corners) + "]"


def _source(value: float | str) -> str:
    return value if isinstance(value, str) else f"dc={value!r}"


def crossing(time: np.ndarray, wave: np.ndarray, level: float, after: float) -> float:
    """Return when a wave first rises through a level after a moment; NaN if never."""
    above = wave - level
    at = np.flatnonzero((above[:-1] < 0) & (above[1:] >= 0) & (time[1:] > after))
    if not len(at):
        return float("nan")
    i = at[0]
    return float(time[i] - (time[i + 1] - time[i]) * above[i] / (above[i + 1] - above[i]))


def separation(waves: Waves) -> np.ndarray:
    return np.asarray(waves["outp"] - waves["outn"])


def value(waves: Waves, name: str, time: float) -> float:
    return float(np.interp(time, waves["time"], waves[name]))
