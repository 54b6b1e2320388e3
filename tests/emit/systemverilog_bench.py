"""Moments of clock, inputs and supply, played to one emitted module in Icarus."""

from __future__ import annotations

import struct
import subprocess
from bisect import bisect_left
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import NamedTuple

from behavgen.emit.systemverilog import systemverilog
from behavgen.model import ComparatorModel

__all__ = ["Change", "Insides", "Moment", "Played", "play"]

BENCH = Path(__file__).with_name("effects_bench.sv")


@dataclass(frozen=True, slots=True, kw_only=True)
class Moment:
    """From when on the pins are at these levels."""

    tick: int
    clk: str
    inp_v: float
    inn_v: float
    vdd_v: float = 1.2
    report: bool = False

    def at(self, tick: int, **levels: object) -> Moment:
        """Return a later moment at which only these levels are others."""
        return replace(self, **{"tick": tick, "report": False, **levels})

    @property
    def line(self) -> str:
        """As the bench reads it."""
        levels = (self.inp_v, self.inn_v, self.vdd_v)
        words = " ".join(struct.pack(">d", level).hex() for level in levels)
        return f"{self.tick} {self.clk} {words} {int(self.report)}\n"


class Change(NamedTuple):
    """What the outputs show from a tick on: outp, outn, unresolved, and x_cause."""

    tick: int
    pins: str
    x_cause: int


class Insides(NamedTuple):
    """Read at a moment that asks for a report."""

    overdrive_v: float
    energy_j: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Played:
    """What a bench printed."""

    changes: tuple[Change, ...]
    insides: tuple[Insides, ...]

    def before(self, tick: int) -> Change:
        """Return the last change before a tick; at the beginning, that nothing is known."""
        later = bisect_left(self.changes, tick, key=lambda change: change.tick)
        return self.changes[later - 1] if later else Change(0, "xxx", 5)


def play(
    model: ComparatorModel,
    moments: Sequence[Moment],
    folder: Path,
    parameters: Mapping[str, object] | None = None,
) -> Played:
    """Play moments to a cell with 1 fs ticks and all its usual pins."""
    (folder / "cell.sv").write_text(systemverilog(model).text)
    (folder / "moments.txt").write_text("".join(moment.line for moment in moments))
    given = {"SEED": "64'd77", "WARNINGS": 0} | dict(parameters or {})
    text = ", ".join(f".{name}({value})" for name, value in given.items())
    bench = BENCH.read_text().replace("`CELL", model.cell.name).replace("`PARAMETERS", text)
    if model.energy is None:
        bench = bench.replace("dut.energy_j", "0.0")
    (folder / "bench.sv").write_text(bench)
    command = ["iverilog", "-g2012", "-s", "effects_bench", "-o", "bench", "cell.sv", "bench.sv"]
    subprocess.run(command, cwd=folder, check=True)
    done = subprocess.run(
        ["vvp", "-n", "bench"], cwd=folder, check=True, capture_output=True, text=True
    )
    rows = [line.split() for line in done.stdout.splitlines()]
    return Played(
        changes=tuple(Change(int(r[1]), r[2][:3], int(r[2][3])) for r in rows if r[0] == "C"),
        insides=tuple(Insides(*map(_real, r[1:])) for r in rows if r[0] == "R"),
    )


def _real(word: str) -> float:
    return struct.unpack(">d", bytes.fromhex(word))[0]
