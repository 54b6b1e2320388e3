"""What the blocks of all batches say, as results with sentences for names."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from behavgen.check.blocks import BlockOutcome, PlayedBatch
from behavgen.check.given import Given
from behavgen.check.verdict import BenchResult, Stratum

__all__ = ["block_results", "merged_strata"]

SENTENCES = {
    "bit": "every bit is that of the reference",
    "unresolved": "every decision resolves when it should",
    "delay": "every delay agrees within a tick",
    "reset": "the reset state returns when it should",
    "x_cause": "x cause names the cause",
    "energy": "every decision takes its energy",
    "stray change": "nothing else moves the outputs",
}
"""Of each kind of fault, what holds where there is none."""


def block_results(given: Given, played: Sequence[PlayedBatch]) -> tuple[BenchResult, ...]:
    """Return one result for each sentence and run.

    Parameters
    ----------
    given : Given
        What is known of the module.
    played : sequence of PlayedBatch
    """
    blocks = [block for one in played for block in one.blocks]
    kinds = [kind for kind in SENTENCES if kind != "energy" or given.model.energy is not None]
    results = [_played_to_its_end(one, block) for one in played for block in one.blocks]
    results += [_free_of(kind, block) for kind in kinds for block in blocks]
    return (*results, *(() if given.foreign else map(_rounded_alike, blocks)))


def _played_to_its_end(one: PlayedBatch, block: BlockOutcome) -> BenchResult:
    said = f"[block] {block.run.index} played" in one.finished.text.splitlines()
    message = block.problem or ("" if said else f"{one.finished.log.name} does not say so")
    name = f"every block is played to its end: {block.run.name}"
    return BenchResult(name=name, passed=not message, message=message)


def _free_of(kind: str, block: BlockOutcome) -> BenchResult:
    message = block.problem
    for found, count, first in block.faults:
        if found == kind:
            decisions = f"{count} of {block.compared} decisions"
            message = f"{kind} wrong in {decisions}, first in decision {first}"
    name = f"{SENTENCES[kind]}: {block.run.name}"
    return BenchResult(name=name, passed=not message, message=message)


def _rounded_alike(block: BlockOutcome) -> BenchResult:
    message = ""
    if not block.rounds_alike:
        message = f"{block.off} of {block.timed} delays are off by a tick or more"
    name = f"delays are rounded alike: {block.run.name}"
    return BenchResult(name=name, passed=not message, message=message)


def merged_strata(each: Iterable[tuple[Stratum, ...]]) -> tuple[Stratum, ...]:
    """Add up the same strata of several runs."""
    merged: dict[tuple[str, str], Stratum] = {}
    for strata in each:
        for one in strata:
            key = (one.group, one.name)
            known = merged.get(key)
            merged[key] = one if known is None else Stratum(
                group=one.group, name=one.name, required=one.required,
                decisions=known.decisions + one.decisions,
                disagreements=known.disagreements + one.disagreements,
            )  # fmt: skip
    return tuple(merged.values())
