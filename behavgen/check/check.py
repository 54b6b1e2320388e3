"""Hold an emitted SystemVerilog text against the reference: the whole check of one cell."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass
from itertools import chain
from pathlib import Path
from tempfile import TemporaryDirectory

from behavgen.check.bench_files import read_agreement
from behavgen.check.bench_results import Suite, bench_results, summarise
from behavgen.check.disagreements import describe_disagreements
from behavgen.check.fatal import fatal_results
from behavgen.check.harness import harness_macros, top_text
from behavgen.check.preparation import Block, plan_check, prepare_blocks
from behavgen.check.results_file import results_xml
from behavgen.check.simulation import CompiledCheck, simulate_batches
from behavgen.check.strata import PlayedRun, count_strata
from behavgen.check.verdict import BenchResult, CheckReport, Disagreement, dump_report
from behavgen.emit.emitted_file import EmittedFile
from behavgen.errors import Fault, ProjectError
from behavgen.files import sha256_of_text, write_whole
from behavgen.model import ComparatorModel, dump_model
from behavgen.simulators.icarus import find_icarus
from behavgen.simulators.process import Finished

__all__ = ["check"]


def check(
    model: ComparatorModel,
    systemverilog: EmittedFile,
    *,
    folder: Path,
    seed: int = 1,
    jobs: int = 2,
    progress: Callable[[str], None] | None = None,
) -> CheckReport:
    """Simulate an emitted text and compare it with the reference, decision by decision.

    Writes ``check.json``, ``results.xml`` and the simulations' logs to the
    folder ``check`` under `folder`.

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
    icarus = find_icarus()
    tell = progress or (lambda _: None)
    logs = (folder / "check").absolute()
    _make_folder(logs)
    with TemporaryDirectory(prefix="behavgen-check-") as work:
        simulation = CompiledCheck(icarus=icarus, work=Path(work).resolve(), logs=logs)
        found = _simulated(model, systemverilog.text, simulation, seed, jobs, tell)
    report = _report(model, systemverilog.text, icarus.version, found)
    write_whole(logs / "results.xml", results_xml(model.cell.name, found.suites))
    write_whole(logs / "check.json", dump_report(report))
    return report


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


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Found:
    """Everything that came of it."""

    suites: tuple[Suite, ...]
    played: tuple[PlayedRun, ...] = ()
    disagreements: tuple[Disagreement, ...] = ()


def _simulated(
    model: ComparatorModel,
    text: str,
    simulation: CompiledCheck,
    seed: int,
    jobs: int,
    tell: Callable[[str], None],
) -> _Found:
    plan = plan_check(model, seed=seed, jobs=jobs)
    tell("compiling")
    top, macros = top_text(model, plan.runs), harness_macros(model, text)
    compiled = simulation.compile(model.cell.name, text, top, macros)
    if compiled.code != 0:
        refused = BenchResult(name="the text compiles", passed=False, message=_complaints(compiled))
        return _Found(suites=(("compile", refused),))
    blocks = prepare_blocks(model, plan, simulation.work, seed=seed)
    tell(f"simulating {sum(block.run.decisions for block in blocks)} decisions")
    outcomes = simulate_batches(simulation, plan.batches, jobs=jobs)
    suites = [*bench_results(model, outcomes)]
    suites += [("fatal", one) for one in fatal_results(simulation, model, plan.fatal)]
    tell("comparing")
    played = tuple(_played(blocks, simulation.work))
    described = [describe_disagreements(model, one, simulation.work) for one in played]
    return _Found(suites=tuple(suites), played=played, disagreements=tuple(chain(*described)))


def _complaints(compiled: Finished) -> str:
    """Return what a compiler refused, without its warnings."""
    lines = [line for line in compiled.text.splitlines() if "warning" not in line]
    return "compile.log says:\n" + "\n".join(lines[:8] or [compiled.tail()])


def _played(blocks: Iterable[Block], work: Path) -> Iterator[PlayedRun]:
    """Return the runs that their benches have compared."""
    for block in blocks:
        agreement = read_agreement(work, block.run.index)
        if agreement is not None:
            yield PlayedRun(
                run=block.run, stimulus=block.stimulus, expected=block.expected,
                agreement=agreement,
            )  # fmt: skip


def _report(model: ComparatorModel, text: str, simulator: str, found: _Found) -> CheckReport:
    strata = count_strata(model, found.played) if found.played else ()
    benches = summarise(found.suites)
    agreements = [one.agreement for one in found.played]
    wrong = sum(int((a.fault != 0).sum()) for a in agreements)
    sound = all(bench.passed for bench in benches) and not any(s.short for s in strata)
    return CheckReport(
        cell=model.cell.name,
        passed=sound and wrong == 0 and bool(strata),
        simulator=simulator,
        model_sha256=sha256_of_text(dump_model(model)),
        emitted_sha256=sha256_of_text(text),
        decisions=sum(int(a.compared.sum()) for a in agreements),
        strata=strata,
        benches=benches,
        disagreements=found.disagreements,
        disagreement_count=wrong,
        worst_delay_ticks=max((int(abs(a.delay_error).max()) for a in agreements), default=0),
        excluded=sum(int((~a.compared).sum()) for a in agreements),
    )
