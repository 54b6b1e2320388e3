"""Check one cell's SystemVerilog: three questions, answered separately.

decisions       does it equal the reference, decision by decision?
tables          characterised anew in simulation, does it give the tables back?
distribution    is the random part distributed as it must be, for seeds nobody chose?
"""

from __future__ import annotations

from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path
from tempfile import TemporaryDirectory

from behavgen.check.bench_results import Suite, summarise
from behavgen.check.closure.closure import closure, closure_csv, closure_results
from behavgen.check.decisions import Compared, compare_decisions
from behavgen.check.distribution.distribution import distribution, distribution_results
from behavgen.check.given import Given, given_text, own_text
from behavgen.check.power import decision_power, distribution_power
from behavgen.check.results_file import results_xml
from behavgen.check.simulation import (
    IcarusSimulation,
    Simulation,
    VerilatorSimulation,
)
from behavgen.check.verdict import (
    CheckReport,
    ClosureResult,
    ClosureRow,
    DistributionResult,
    dump_report,
)
from behavgen.check.wishes import Wishes
from behavgen.emit.emitted_file import EmittedFile
from behavgen.errors import Fault, ProjectError
from behavgen.files import sha256_of_text, write_whole
from behavgen.model import ComparatorModel
from behavgen.model_file import dump_model
from behavgen.simulators.icarus import find_icarus
from behavgen.simulators.verilator import find_verilator

__all__ = ["check"]


def check(
    model: ComparatorModel,
    systemverilog: EmittedFile,
    *,
    folder: Path,
    seed: int = 1,
    jobs: int = 2,
    wishes: Wishes | None = None,
    given: bool = False,
    progress: Callable[[str], None] | None = None,
) -> CheckReport:
    """Simulate a SystemVerilog text and answer three questions about it.

    Writes ``check.json``, ``results.xml``, ``closure.csv`` (every row of the
    tables) and the simulations' logs to the folder ``check`` under `folder`.

    Parameters
    ----------
    model : ComparatorModel
    systemverilog : EmittedFile
        Its text declares the cell's module; it need not be an emitted one.
    folder : Path
        The cell's output folder.
    seed : int
        Varies the stimulus; the same seed gives the same check.
    jobs : int
        Simulations that run at the same time.
    wishes : Wishes or None
        How it shall differ from the usual check.
    given : bool
        The text is the user's own: what it lacks is left out and told.
    progress : callable or None
        Is told in words what happens now.

    Returns
    -------
    CheckReport
        A disagreement is a verdict in it, not an exception.

    Raises
    ------
    ToolError
        When the simulator is missing or too old.
    ProjectError
        When the folder cannot be written.
    """
    wishes = wishes or Wishes()
    make = _maker(wishes.simulator)
    tell = progress or (lambda _: None)
    logs = (folder / "check").absolute()
    with TemporaryDirectory(prefix="behavgen-check-") as work:
        made = make(Path(work).resolve(), logs)
        _make_folder(logs)
        asked = _Asked(
            given=given_text(model, systemverilog.text) if given else own_text(model),
            text=systemverilog.text, make=make, work=Path(work).resolve(),
            seed=seed, jobs=jobs, wishes=wishes, tell=tell,
        )  # fmt: skip
        found = _answers(asked, made)
    report = _report(model, asked, made.version, found)
    write_whole(logs / "results.xml", results_xml(model.cell.name, found.suites))
    write_whole(logs / "closure.csv", closure_csv(found.rows))
    write_whole(logs / "check.json", dump_report(report))
    return report


def _maker(simulator: str) -> Callable[[Path, Path], Simulation]:
    """Return what makes a simulation in a working folder, with its logs in another."""
    if simulator == "verilator":
        verilator = find_verilator()
        return lambda work, logs: VerilatorSimulation(
            verilator=verilator, work=work, logs=logs, brief=True
        )
    icarus = find_icarus()
    return lambda work, logs: IcarusSimulation(icarus=icarus, work=work, logs=logs)


def _make_folder(folder: Path) -> None:
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        fault = Fault(
            file=str(folder),
            what=f"cannot be made: {error.strerror or error}",
            allowed="choose a folder that can be written",
        )
        raise ProjectError(fault) from error


@dataclass(frozen=True, slots=True, kw_only=True)
class _Asked:
    """What is asked about which text."""

    given: Given
    text: str
    make: Callable[[Path, Path], Simulation]
    work: Path
    seed: int
    jobs: int
    wishes: Wishes
    tell: Callable[[str], None]

    def bench(self, name: str) -> Simulation:
        """Return a simulation with a working folder of its own."""
        folder = self.work / name
        folder.mkdir()
        return self.make(folder, folder)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Found:
    """All answers."""

    compared: Compared
    closure: tuple[ClosureResult, ...] = ()
    rows: tuple[ClosureRow, ...] = ()
    distribution: tuple[DistributionResult, ...] = ()

    @property
    def suites(self) -> tuple[Suite, ...]:
        """Every result with its suite."""
        return (
            *self.compared.suites,
            *(("tables", result) for result in closure_results(self.closure)),
            *(("distribution", result) for result in distribution_results(self.distribution)),
        )


def _answers(asked: _Asked, simulation: Simulation) -> _Found:
    """Ask what shall be asked; a text that does not compile answers nothing more."""
    compared = compare_decisions(
        simulation, asked.given, asked.text, seed=asked.seed, jobs=asked.jobs, tell=asked.tell,
        only_compile="decisions" not in asked.wishes.questions,
    )  # fmt: skip
    if not compared.compiled:
        return _Found(compared=compared)
    asked.tell("characterising anew")
    with ThreadPoolExecutor(max_workers=max(asked.jobs, 1)) as pool:
        tables = pool.submit(_tables, asked)
        random = pool.submit(_distribution, asked)
        results, rows = tables.result()
        return _Found(compared=compared, closure=results, rows=rows, distribution=random.result())


def _tables(asked: _Asked) -> tuple[tuple[ClosureResult, ...], tuple[ClosureRow, ...]]:
    if "tables" not in asked.wishes.questions:
        return (), ()
    return closure(asked.bench("tables"), asked.given.switchable, asked.text, seed=asked.seed)


def _distribution(asked: _Asked) -> tuple[DistributionResult, ...]:
    if "distribution" not in asked.wishes.questions:
        return ()
    fresh = asked.wishes.fresh_seed
    return distribution(
        asked.bench("distribution"), asked.given.switchable, asked.text,
        seed=asked.seed if fresh is None else fresh,
    )  # fmt: skip


def _report(model: ComparatorModel, asked: _Asked, simulator: str, found: _Found) -> CheckReport:
    compared, benches = found.compared, summarise(found.suites)
    strata = compared.strata
    exercised = asked.given.foreign or not any(s.short for s in strata)
    sound = all(bench.passed for bench in benches) and exercised
    return CheckReport(
        cell=model.cell.name,
        passed=sound and compared.compiled and compared.wrong == 0,
        simulator=simulator,
        model_sha256=sha256_of_text(dump_model(model)),
        emitted_sha256=sha256_of_text(asked.text),
        decisions=compared.decisions,
        strata=strata,
        benches=benches,
        disagreements=compared.disagreements,
        disagreement_count=compared.wrong,
        worst_delay_ticks=max((b.worst_delay_ticks for b in compared.blocks), default=0),
        excluded=sum(block.excluded for block in compared.blocks),
        left_out=compared.left_out,
        closure=found.closure,
        distribution=found.distribution,
        power=(
            *decision_power(b.power for b in compared.blocks if b.power is not None),
            *distribution_power(found.distribution),
        ),
        seed=asked.seed if asked.wishes.fresh_seed is None else asked.wishes.fresh_seed,
    )
