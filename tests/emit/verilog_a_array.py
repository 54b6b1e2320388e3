"""Many emitted Verilog-A comparators side by side in one deck of VACASK."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

from behavgen.emit.verilog_a import verilog_a
from behavgen.model import ComparatorModel
from behavgen.simulators.openvaf import find_openvaf
from behavgen.simulators.vacask import Waves, find_vacask, read_waves

Corners = Sequence[tuple[float, float]]
"""Of a piecewise linear source: time in s, voltage in V."""


@dataclass(frozen=True, kw_only=True)
class Site:
    """One comparator with sources of its own; a number is a constant source in V.

    `cycles` are pairs of a reset and a decision phase, in s.
    """

    vdiff: float | Corners = 0.0
    vdd: float = 1.2
    vcm: float = 0.65
    cycles: Sequence[tuple[float, float]] = ((0.5e-9, 1e-9),)
    clock: Corners = ()
    edge_s: float = 10e-12
    parameters: dict[str, float] = field(default_factory=dict)
    source_ohm: float = 0.0
    cell: str = ""

    @property
    def edges(self) -> np.ndarray:
        return np.cumsum(np.ravel(self.cycles))[::2]

    @property
    def ends(self) -> np.ndarray:
        return np.cumsum(np.ravel(self.cycles))[1::2]

    def clock_corners(self) -> Corners:
        corners = [(0.0, 0.0)]
        for edge, end in zip(self.edges, self.ends, strict=True):
            for middle, before, after in ((edge, 0.0, self.vdd), (end, self.vdd, 0.0)):
                corners += [(middle - self.edge_s / 2, before), (middle + self.edge_s / 2, after)]
        return self.clock or corners


@dataclass(frozen=True, kw_only=True)
class Result:
    waves: Waves
    sites: Sequence[Site]

    def wave(self, name: str, index: int) -> np.ndarray:
        return np.asarray(self.waves[f"{name}_{index}"])

    def level(self, name: str, index: int, time: float) -> float:
        return float(np.interp(time, self.waves["time"], self.wave(name, index)))

    def apart(self, index: int) -> np.ndarray:
        return self.wave("outp", index) - self.wave("outn", index)

    def decision(self, index: int, number: int) -> tuple[float, int]:
        """Return after which time in s the outputs stood half the supply apart, and the bit.

        NaN and -1 if they never did in that decision phase.
        """
        site, time, apart = self.sites[index], self.waves["time"], self.apart(index)
        edge, end = site.edges[number], site.ends[number]
        beyond = np.abs(apart) - site.vdd / 2
        at = np.flatnonzero(
            (beyond[:-1] < 0) & (beyond[1:] >= 0) & (time[1:] > edge) & (time[1:] <= end)
        )
        if not len(at):
            return float("nan"), -1
        i = at[-1]
        ready = time[i] - (time[i + 1] - time[i]) * beyond[i] / (beyond[i + 1] - beyond[i])
        return float(ready - edge), int(apart[i + 1] > 0.0)

    def charge(self, source: str, index: int, start: float, stop: float) -> float:
        """Return the charge in C that a voltage source takes up at its positive terminal."""
        time, current = self.waves["time"], np.asarray(self.waves[f"{source}_{index}:flow(br)"])
        inside = (time >= start) & (time <= stop)
        return float(np.trapezoid(current[inside], time[inside]))


def play(
    models: ComparatorModel | Sequence[ComparatorModel],
    sites: Sequence[Site],
    folder: Path,
    *,
    stop: float | None = None,
    options: str = "",
) -> Result:
    """Simulate sites in one deck; a site without `cell` takes the first model."""
    models = [models] if isinstance(models, ComparatorModel) else models
    for model in models:
        emitted = verilog_a(model)
        source = folder / emitted.path
        source.write_text(emitted.text)
        compilation = find_openvaf().compile(
            source, library=source.with_suffix(".osdi"), log=folder / "openvaf.log"
        )
        assert compilation.library is not None, compilation.message
    until = stop or max(float(site.ends[-1]) for site in sites) + 0.3e-9
    names = [model.cell.name for model in models]
    lines = ["side by side", *(f'load "{name}.osdi"' for name in names), "model vsource vsource"]
    lines += ["model resistor resistor"] if any(site.source_ohm for site in sites) else []
    lines += ['load "resistor.osdi"'] if any(site.source_ohm for site in sites) else []
    lines += [f"model {name} {name}" for name in names]
    for index, site in enumerate(sites):
        lines += _site(index, site, site.cell or names[0])
    lines += ["control", f"  options {options}" if options else "",
              f"  analysis result tran step=10p stop={until!r}", "endc", ""]  # fmt: skip
    find_vacask().run("\n".join(lines), folder=folder, timeout_s=120.0)
    return Result(waves=read_waves(folder / "result.raw"), sites=sites)


def _site(k: int, site: Site, cell: str) -> list[str]:
    settings = " ".join(f"{name}={value!r}" for name, value in site.parameters.items())
    vdiff = site.vdiff if isinstance(site.vdiff, Sequence) else [(0.0, float(site.vdiff))]
    inputs = {"inp": [(t, site.vcm + v / 2) for t, v in vdiff],
              "inn": [(t, site.vcm - v / 2) for t, v in vdiff]}  # fmt: skip
    lines = []
    for name, corners in inputs.items():
        node = f"s{name}_{k}" if site.source_ohm else f"{name}_{k}"
        lines.append(f"v{name}_{k} ({node} 0) vsource {_wave(corners)}")
        if site.source_ohm:
            lines.append(f"r{name}_{k} ({node} {name}_{k}) resistor r={site.source_ohm!r}")
    return [
        *lines,
        f"vdd_{k} (dd_{k} 0) vsource dc={site.vdd!r}",
        f"vck_{k} (clk_{k} 0) vsource {_wave(site.clock_corners())}",
        f"x{k} (inp_{k} inn_{k} clk_{k} outp_{k} outn_{k} dd_{k} 0) {cell} {settings}",
    ]


def _wave(corners: Corners) -> str:
    if len(corners) == 1:
        return f"dc={corners[0][1]!r}"
    numbers = ", ".join(f"{float(time)!r}, {float(value)!r}" for time, value in corners)
    return f'type="pwl" wave=[{numbers}]'
