"""What passes between a check and the benches that it runs inside the simulator.

A batch file says which runs its benches drive; beside it lies the model.
"""

from __future__ import annotations

import json
import os
import pickle
from collections.abc import Iterable
from dataclasses import asdict, dataclass
from pathlib import Path

from behavgen.check.runs import Run, Settings
from behavgen.model import ComparatorModel

__all__ = [
    "BATCH_VARIABLE",
    "BenchBatch",
    "open_batch",
    "read_model",
    "write_batch",
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

    def driven(self, name: str) -> Run:
        """Return the run that a bench of this name drives."""
        return next(run for run in self.runs if run.name == name)


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
