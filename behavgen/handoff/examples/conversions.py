"""Conversions: what goes into a simulated converter and what comes out, as files and as arrays."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import numpy.typing as npt

__all__ = [
    "INPUTS_VARIABLE",
    "OUTPUTS_VARIABLE",
    "Conversions",
    "read_results",
    "write_inputs",
    "write_results",
]

INPUTS_VARIABLE, OUTPUTS_VARIABLE = "BEHAVGEN_CONVERTER_INPUTS", "BEHAVGEN_CONVERTER_OUTPUTS"
"""Name the files in the environment of the bench."""

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Conversions:
    """What came of each conversion.

    Parameters
    ----------
    result : tuple of int
        Code of a SAR; of a flash its comparators, one bit each.
    lost : ndarray of int, shape (N,)
        Decisions that were not resolved in time.
    easy_s, slowest_s : ndarray, shape (N,)
        Delays of all decisions but the slowest, and that of the slowest, s; SAR only.
    """

    result: tuple[int, ...]
    lost: npt.NDArray[np.int64]
    easy_s: Floats
    slowest_s: Floats


def write_inputs(file: Path, vin_v: Floats, lsb_v: Floats, phase_ticks: Floats) -> None:
    """Write what to convert: inputs, steps and lengths of the decision phases, broadcast."""
    np.save(file, np.stack(np.broadcast_arrays(vin_v, lsb_v, phase_ticks), axis=-1).astype(float))


def write_results(
    file: Path,
    results: Sequence[int],
    lost: Sequence[int],
    delays_s: Sequence[tuple[float, float]],
) -> None:
    """Write what came of it; called in the simulator."""
    told = {
        "results": [f"{result:x}" for result in results],
        "lost": [*lost],
        "delays": [*delays_s],
    }
    file.write_text(json.dumps(told), encoding="utf-8")


def read_results(file: Path) -> Conversions:
    """Read what came of it."""
    told = json.loads(file.read_text(encoding="utf-8"))
    delays = np.array(told["delays"], dtype=float).reshape(-1, 2)
    return Conversions(
        result=tuple(int(text, 16) for text in told["results"]),
        lost=np.array(told["lost"], dtype=np.int64),
        easy_s=delays[:, 0],
        slowest_s=delays[:, 1],
    )
