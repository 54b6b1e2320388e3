"""What all simulations found: one result each, and one a sentence."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from behavgen.check.directed import WARNING_RUN
from behavgen.check.simulation import BatchOutcome
from behavgen.check.verdict import BenchResult
from behavgen.model import ComparatorModel
from behavgen.simulators.cocotb_benches import BenchOutcome
from behavgen.simulators.process import Finished

__all__ = ["Suite", "bench_results", "ended", "message_results", "summarise"]

Suite = tuple[str, BenchResult]
"""A result and the name of the suite that it belongs to."""


def bench_results(outcome: BatchOutcome) -> tuple[Suite, ...]:
    """Return every result of a batch's benches, suite by suite."""
    found = [(bench.module, _result(bench)) for bench in outcome.benches]
    simulated = ended(outcome.batch.name, outcome.finished, silent=not outcome.benches)
    return (("simulation", simulated), *sorted(found, key=lambda suite: suite[0]))


def _result(bench: BenchOutcome) -> BenchResult:
    function, _, option = bench.name.partition("/")
    sentence = function.replace("_", " ")
    kind, _, value = option.partition("=")
    if option:
        sentence = f"{sentence}: {kind} {value}"
    return BenchResult(name=sentence, passed=not bench.message, message=bench.message)


def ended(name: str, finished: Finished, *, silent: bool = False) -> BenchResult:
    """Judge how a simulation ended; a silent one has left no results."""
    message = ""
    if finished.code is None:
        message = f"did not end in time; see {finished.log.name}"
    elif finished.code != 0 or silent:
        end = f"ended with exit code {finished.code}"
        message = f"{end}; {finished.log.name} ends with:\n{finished.tail()}"
    sentence = f"the simulation runs to its end: {name}"
    return BenchResult(name=sentence, passed=not message, message=message)


def message_results(
    model: ComparatorModel, outcome: BatchOutcome, others: Sequence[Finished]
) -> tuple[BenchResult, ...]:
    """Judge the messages of the silent instances and of the one that warns.

    Parameters
    ----------
    model : ComparatorModel
    outcome : BatchOutcome
        Of the batch in which an instance warns.
    others : sequence of Finished
    """
    lines = [
        line
        for finished in (outcome.finished, *others)
        for line in finished.text.splitlines()
        if "[behavgen]" in line
    ]
    warning = [run for run in outcome.batch.runs if run.name == WARNING_RUN]
    told = [line for line in lines if any(f"{run.path} " in line for run in warning)]
    causes = 2 + _can_leave_box(model)
    return (
        _counted("each cause is warned of once", causes, len(told)),
        _counted("a silent instance says nothing", 0, len(lines) - len(told)),
    )


def _can_leave_box(model: ComparatorModel) -> bool:
    supply = model.box.vdd_v is not None and model.cell.pins.vdd is not None
    return model.box.vcm_v is not None or supply


def _counted(name: str, expected: int, found: int) -> BenchResult:
    message = "" if expected == found else f"{expected} messages expected, {found} found"
    return BenchResult(name=name, passed=not message, message=message)


def summarise(suites: Iterable[Suite]) -> tuple[BenchResult, ...]:
    """Return one result for each sentence, whatever the number of its runs."""
    sentences: dict[str, list[BenchResult]] = {}
    for _, result in suites:
        sentences.setdefault(result.name.partition(": ")[0], []).append(result)
    return tuple(_summary(name, results) for name, results in sentences.items())


def _summary(name: str, results: list[BenchResult]) -> BenchResult:
    failed = [result for result in results if not result.passed]
    if not failed:
        return BenchResult(name=name, passed=True)
    where = failed[0].name.partition(": ")[2]
    first = f"{where}: {failed[0].message}" if where else failed[0].message
    many = f"{len(failed)} of {len(results)} fail, first " if len(results) > 1 else ""
    return BenchResult(name=name, passed=False, message=many + first)
