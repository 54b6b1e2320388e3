"""What passes between a check and the benches that it runs inside the simulator.

A batch file says which runs a batch plays and which its benches drive.
Each played run has its ``<index>.expected.npz``, what it must show, its
``<index>.events``, what it showed, written by the harness, and its
``<index>.agreement.npz``, the bench's comparison of the two.
"""

from __future__ import annotations

import json
import os
import pickle
from collections.abc import Iterable
from dataclasses import asdict, dataclass, fields
from pathlib import Path

import numpy as np

from behavgen.check.agreement import Agreement, compare
from behavgen.check.runs import Run, Settings
from behavgen.check.waveform import Expectation, read_record
from behavgen.model import ComparatorModel

__all__ = [
    "BATCH_VARIABLE",
    "BenchBatch",
    "compare_run",
    "open_batch",
    "read_agreement",
    "read_model",
    "write_batch",
    "write_expectation",
    "write_model",
]

BATCH_VARIABLE = "BEHAVGEN_CHECK_BATCH"
"""Environment variable through which a bench finds its batch file."""
_MODEL_NAME = "model.pickle"  # written by the check itself, and read faster than the model file


@dataclass(frozen=True, slots=True, kw_only=True)
class BenchBatch:
    """What a bench knows of its batch.

    Parameters
    ----------
    folder : Path
        Where the files of all runs are.
    runs : tuple of Run
    """

    folder: Path
    runs: tuple[Run, ...]

    @property
    def played(self) -> tuple[Run, ...]:
        """Runs to which a block is played."""
        return tuple(run for run in self.runs if run.decisions > 0)

    def driven(self, name: str) -> Run:
        """Return the run that a bench of this name drives."""
        return next(run for run in self.runs if run.decisions == 0 and run.name == name)


def write_model(folder: Path, model: ComparatorModel) -> None:
    """Write the model that the benches hold the module against."""
    (folder / _MODEL_NAME).write_bytes(pickle.dumps(model))


def read_model(folder: Path) -> ComparatorModel:
    """Return the model that the benches hold the module against."""
    model: ComparatorModel = pickle.loads((folder / _MODEL_NAME).read_bytes())
    return model


def write_batch(path: Path, runs: Iterable[Run]) -> None:
    """Write a batch file beside the files of its runs."""
    path.write_text(json.dumps([asdict(run) for run in runs]), encoding="utf-8")


def open_batch() -> BenchBatch:
    """Return the batch that the running simulation belongs to."""
    path = Path(os.environ[BATCH_VARIABLE])
    runs = tuple(_run(raw) for raw in json.loads(path.read_text(encoding="utf-8")))
    return BenchBatch(folder=path.parent, runs=runs)


def _run(raw: dict[str, object]) -> Run:
    given, meant = (Settings(**raw.pop(name)) for name in ("given", "meant"))  # type: ignore[arg-type]
    return Run(given=given, meant=meant, **raw)  # type: ignore[arg-type]


def write_expectation(folder: Path, index: int, expected: Expectation) -> None:
    """Write what a run must show."""
    _save(folder / f"{index}.expected.npz", expected)


def compare_run(folder: Path, index: int) -> Agreement:
    """Compare a run's record with its expectation and write the outcome.

    Raises
    ------
    OSError, ValueError
        When the record is missing or torn.
    """
    with np.load(folder / f"{index}.expected.npz") as stored:
        expected = Expectation(**{f.name: stored[f.name] for f in fields(Expectation)})
    agreement = compare(expected, read_record(folder / f"{index}.events"))
    _save(folder / f"{index}.agreement.npz", agreement)
    return agreement


def read_agreement(folder: Path, index: int) -> Agreement | None:
    """Return a run's outcome; None when its bench did not get so far."""
    path = folder / f"{index}.agreement.npz"
    if not path.is_file():
        return None
    with np.load(path) as stored:
        return Agreement(**{f.name: stored[f.name] for f in fields(Agreement)})


def _save(path: Path, data: Expectation | Agreement) -> None:
    np.savez(path, **{field.name: getattr(data, field.name) for field in fields(data)})
