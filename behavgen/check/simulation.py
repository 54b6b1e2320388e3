"""Compile the module with its harness once, then run all batches side by side."""

from __future__ import annotations

import shutil
from collections.abc import Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from pathlib import Path

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
from behavgen.simulators.process import Finished

__all__ = ["BatchOutcome", "CompiledCheck", "play", "share_out", "simulate_batches"]


@dataclass(frozen=True, slots=True, kw_only=True)
class CompiledCheck:
    """A compiled harness and where its files are.

    Parameters
    ----------
    icarus : Icarus
    work : Path
        Folder of stimulus, records and the compiled file.
    logs : Path
        Folder of the logs, which outlive the check.
    """

    icarus: Icarus
    work: Path
    logs: Path

    @property
    def compiled(self) -> Path:
        """The file that the simulator runs."""
        return self.work / "check.vvp"

    def compile(self, module: str, text: str, top: str, macros: dict[str, str]) -> Finished:
        """Compile the text under check, the harness and the top, in this order."""
        shutil.copyfile(sim_folder() / "tops" / "block_harness.sv", self.work / "block_harness.sv")
        (self.work / f"{module}.sv").write_text(text, encoding="utf-8")
        (self.work / f"{TOP}.sv").write_text(top, encoding="utf-8")
        sources = [Path(name) for name in (f"{module}.sv", "block_harness.sv", f"{TOP}.sv")]
        return self.icarus.compile(
            sources, top=TOP, output=self.compiled, log=self.logs / "compile.log", macros=macros
        )

    def simulate(self, name: str, *plusargs: str) -> Finished:
        """Simulate without benches."""
        return self.icarus.simulate(self.compiled, log=self._log(name), plusargs=plusargs)

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
            self.compiled, log=self._log(name), library=vpi_library("icarus"),
            plusargs=batch.plusargs, environment=environment,
        )  # fmt: skip
        return BatchOutcome(batch=batch, finished=finished, benches=read_outcomes(results))

    def _log(self, name: str) -> Path:
        return self.logs / f"{name}.log"


@dataclass(frozen=True, slots=True, kw_only=True)
class BatchOutcome:
    """What came of a batch; no benches when the simulation ended before its time."""

    batch: Batch
    finished: Finished
    benches: tuple[BenchOutcome, ...]


def simulate_batches(
    check: CompiledCheck, batches: Sequence[Batch], *, jobs: int
) -> tuple[BatchOutcome, ...]:
    """Run batches on several processors; outcomes in the order of the batches."""
    with ThreadPoolExecutor(max_workers=max(jobs, 1)) as pool:
        return tuple(pool.map(check.run_benches, batches))


def play(first: int, last: int) -> tuple[str, str]:
    """Return the plusargs by which runs are played without benches."""
    return f"play_from={first}", f"play_to={last}"


def share_out(batch: Batch, parts: int) -> tuple[Batch, ...]:
    """Split a batch into several of about the same number of decisions."""
    parts = max(1, min(parts, len(batch.runs)))
    return tuple(
        replace(batch, name=f"{batch.name}_{part + 1}", runs=batch.runs[part::parts])
        for part in range(parts)
    )
