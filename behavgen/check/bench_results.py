"""What the benches of all batches found: one result each, and one a sentence."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from behavgen.check.directed import WARNING_RUN
from behavgen.check.simulation import BatchOutcome
from behavgen.check.verdict import BenchResult
from behavgen.model import ComparatorModel
from behavgen.simulators.cocotb_benches import BenchOutcome

__all__ = ["Suite", "bench_results", "summarise"]

Suite = tuple[str, BenchResult]
"""A result and the name of the suite that it belongs to."""


def bench_results(model: ComparatorModel, outcomes: Sequence[BatchOutcome]) -> tuple[Suite, ...]:
    """Return every result of every batch, suite by suite.

    Parameters
    ----------
    model : ComparatorModel
    outcomes : sequence of BatchOutcome
    """
    found: list[Suite] = [("simulation", _ended(outcome)) for outcome in outcomes]
    for outcome in outcomes:
        found += [(bench.module, _result(outcome, bench)) for bench in outcome.benches]
    found += [("messages", result) for result in _messages(model, outcomes)]
    return tuple(sorted(found, key=lambda suite: suite[0]))


def _result(outcome: BatchOutcome, bench: BenchOutcome) -> BenchResult:
    function, _, option = bench.name.partition("/")
    sentence = function.replace("_", " ")
    kind, _, value = option.partition("=")
    if kind == "run":
        run = next(run for run in outcome.batch.runs if run.index == int(value))
        sentence = f"{sentence}: {run.name}"
    elif option:
        sentence = f"{sentence}: {kind} {value}"
    elif bench.module == "test_agreement":
        sentence = f"{sentence}: {outcome.batch.name}"
    return BenchResult(name=sentence, passed=not bench.message, message=bench.message)


def _ended(outcome: BatchOutcome) -> BenchResult:
    code, log = outcome.finished.code, outcome.finished.log
    message = ""
    if code is None:
        message = f"did not end in time; see {log.name}"
    elif code != 0 or not outcome.benches:
        message = f"ended with exit code {code}; {log.name} ends with:\n{outcome.finished.tail()}"
    name = f"the simulation runs to its end: {outcome.batch.name}"
    return BenchResult(name=name, passed=not message, message=message)


def _messages(model: ComparatorModel, outcomes: Sequence[BatchOutcome]) -> tuple[BenchResult, ...]:
    """Judge the messages of the silent instances and of the one that warns."""
    lines = [
        line
        for outcome in outcomes
        for line in outcome.finished.text.splitlines()
        if "[behavgen]" in line
    ]
    warning = [run for o in outcomes for run in o.batch.runs if run.name == WARNING_RUN]
    told = [line for line in lines if any(f"{run.path} " in line for run in warning)]
    others = len(lines) - len(told)
    causes = 2 + _can_leave_box(model)
    return (
        _counted("each cause is warned of once", causes, len(told)),
        _counted("a silent instance says nothing", 0, others),
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
