"""Compile the module with its harness once, then simulate it as often as wanted."""

from __future__ import annotations

import shutil
from dataclasses import dataclass
from pathlib import Path
from typing import Protocol

from behavgen.check.bench_files import BATCH_VARIABLE, write_batch
from behavgen.check.runs import TOP, Batch
from behavgen.resources import sim_folder
from behavgen.simulators.cocotb_benches import (
    BenchOutcome,
    bench_environment,
    read_outcomes,
    vpi_library,
)
from behavgen.simulators.icarus import Icarus
from behavgen.simulators.process import Finished, run_logged
from behavgen.simulators.verilator import Verilator

__all__ = [
    "BatchOutcome",
    "IcarusSimulation",
    "Simulation",
    "VerilatorSimulation",
    "play",
]

_HARNESS = "block_harness.sv"
_LONGEST_S = 1800.0


class Simulation(Protocol):
    """A harness in one simulator.

    Parameters
    ----------
    work : Path
        Folder of stimulus, records and whatever the simulator makes.
    logs : Path
        Folder of the logs, which outlive the check.
    """

    work: Path
    logs: Path

    @property
    def two_states(self) -> bool:
        """Whether the simulator knows no X."""

    @property
    def version(self) -> str:
        """Name and version of the simulator."""

    def compile(self, module: str, text: str, top: str, macros: dict[str, str]) -> Finished:
        """Compile the text under check, the harness and the top, in this order."""

    def simulate(self, name: str, *plusargs: str) -> Finished:
        """Simulate without benches; the log has this name."""


@dataclass(slots=True, kw_only=True)
class IcarusSimulation:
    """A harness in Icarus Verilog; benches can look at it."""

    icarus: Icarus
    work: Path
    logs: Path

    @property
    def two_states(self) -> bool:
        """It knows X and Z."""
        return False

    @property
    def version(self) -> str:
        """Name and version of the simulator."""
        return self.icarus.version

    @property
    def compiled(self) -> Path:
        """The file that the simulator runs."""
        return self.work / "check.vvp"

    def compile(self, module: str, text: str, top: str, macros: dict[str, str]) -> Finished:
        """Compile the text under check, the harness and the top, in this order."""
        return self.icarus.compile(
            _sources(self.work, module, text, top), top=TOP, output=self.compiled,
            log=self.logs / "compile.log", macros=macros,
        )  # fmt: skip

    def simulate(self, name: str, *plusargs: str) -> Finished:
        """Simulate without benches; the log has this name."""
        return self.icarus.simulate(
            self.compiled, log=self.logs / f"{name}.log", plusargs=plusargs, timeout_s=_LONGEST_S
        )

    def dump(self, name: str, *plusargs: str) -> Finished:
        """Simulate without benches and leave waveforms; the log has this name."""
        return self.icarus.simulate(
            self.compiled, log=self.logs / f"{name}.log", plusargs=plusargs, waveforms=True
        )

    def run_benches(self, batch: Batch) -> BatchOutcome:
        """Simulate with the benches of a batch."""
        name = batch.name.replace(",", "").replace(" ", "_")
        batch_file = self.work / f"{name}.batch.json"
        results = self.work / f"{name}.results.xml"
        write_batch(batch_file, batch.runs)
        environment = bench_environment(
            modules=batch.benches, folder=sim_folder() / "benches", top=TOP, results=results,
            variables={BATCH_VARIABLE: str(batch_file)},
        )  # fmt: skip
        finished = self.icarus.simulate(
            self.compiled, log=self.logs / f"{name}.log", library=vpi_library("icarus"),
            plusargs=batch.plusargs, environment=environment,
        )  # fmt: skip
        return BatchOutcome(batch=batch, finished=finished, benches=read_outcomes(results))


@dataclass(slots=True, kw_only=True)
class VerilatorSimulation:
    """A harness built by Verilator, fast and without X.

    Parameters
    ----------
    brief : bool
        Whether so few decisions are played that a quick build matters more than speed.
    """

    verilator: Verilator
    work: Path
    logs: Path
    brief: bool = False

    @property
    def two_states(self) -> bool:
        """It knows neither X nor Z."""
        return True

    @property
    def version(self) -> str:
        """Name and version of the simulator."""
        return self.verilator.version

    @property
    def program(self) -> Path:
        """The built program."""
        return self.work / "check"

    def compile(self, module: str, text: str, top: str, macros: dict[str, str]) -> Finished:
        """Build a program of the text under check, the harness and the top."""
        sources = [self.work / source for source in _sources(self.work, module, text, top)]
        return self.verilator.build(
            sources, top=TOP, output=self.program, log=self.logs / "compile.log", macros=macros,
            brief=self.brief,
        )  # fmt: skip

    def simulate(self, name: str, *plusargs: str) -> Finished:
        """Simulate; the log has this name."""
        command: list[str | Path] = [self.program, *(f"+{arg}" for arg in plusargs)]
        log = self.logs / f"{name}.log"
        return run_logged(command, log=log, folder=self.work, timeout_s=_LONGEST_S)


def _sources(work: Path, module: str, text: str, top: str) -> list[Path]:
    """Write the sources to the working folder; return their names."""
    shutil.copyfile(sim_folder() / "tops" / _HARNESS, work / _HARNESS)
    (work / f"{module}.sv").write_text(text, encoding="utf-8")
    (work / f"{TOP}.sv").write_text(top, encoding="utf-8")
    return [Path(name) for name in (f"{module}.sv", _HARNESS, f"{TOP}.sv")]


@dataclass(frozen=True, slots=True, kw_only=True)
class BatchOutcome:
    """What came of a batch's benches; none when the simulation ended before its time."""

    batch: Batch
    finished: Finished
    benches: tuple[BenchOutcome, ...]


def play(first: int, last: int) -> tuple[str, str]:
    """Return the plusargs by which runs are played without benches."""
    return f"play_from={first}", f"play_to={last}"
