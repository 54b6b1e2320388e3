"""Closure: whether the module under check gives the tables back."""

from __future__ import annotations

import csv
import io
from collections.abc import Sequence
from dataclasses import asdict

from behavgen.check.closure.judgement import judged
from behavgen.check.closure.recharacterise import recharacterise
from behavgen.check.simulation import Simulation
from behavgen.check.verdict import BenchResult, ClosureResult, ClosureRow
from behavgen.model import ComparatorModel

__all__ = ["closure", "closure_csv", "closure_results"]

_COLUMNS = ("quantity", "condition", "point", "x", "table", "measured", "relative_error", "z")


def closure(
    simulation: Simulation, model: ComparatorModel, text: str, *, seed: int
) -> tuple[tuple[ClosureResult, ...], tuple[ClosureRow, ...]]:
    """Characterise a module anew; return a result for each quantity, and every row.

    Parameters
    ----------
    simulation : Simulation
        With a working folder of its own.
    model : ComparatorModel
        With the tables' points.
    text : str
        The module under check.
    seed : int
        Of the noise; the same seed gives the same result.
    """
    return judged(model, recharacterise(simulation, model, text, seed=seed))


def closure_results(found: Sequence[ClosureResult]) -> tuple[BenchResult, ...]:
    """Return one result for each quantity."""
    return tuple(
        BenchResult(
            name=f"the tables come back: {one.quantity}",
            passed=one.passed,
            message="" if one.passed else f"{one.limit}; worst {_worst(one)}",
        )
        for one in found
    )


def _worst(one: ClosureResult) -> str:
    row = one.worst[0]
    return f"point {row.point} at {row.condition}: {row.told}"


def closure_csv(rows: Sequence[ClosureRow]) -> str:
    """Return every row with its error as a table."""
    stream = io.StringIO()
    writer = csv.DictWriter(stream, _COLUMNS, extrasaction="ignore", lineterminator="\n")
    writer.writeheader()
    writer.writerows(asdict(row) for row in rows)
    return stream.getvalue()
