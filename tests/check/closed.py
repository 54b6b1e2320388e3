"""A model whose tables are its own values: whatever does what it says gives them back."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from behavgen.formulas.random_stream import stream_key
from behavgen.model import ComparatorModel, Condition, CurvePoints
from behavgen.reference import Reference
from tests.example_models import complete_model

__all__ = ["closed_model"]

HERE = {"vdd_v": 1.2, "temperature_k": 300.15, "vcm_v": 0.65}
TRIALS = 400


def closed_model(**cell: object) -> ComparatorModel:
    """Return the complete model with tables of what it says at one condition of each process."""
    model = complete_model(**cell)
    reference = Reference(model)
    points = [p for process in ("typ", "slow") for p in points_at(reference, process)]
    return replace(model, points=tuple(points), fits=())


def points_at(reference: Reference, process: str) -> list[CurvePoints]:
    """Return tables of one process; the counts of the S-curve are drawn."""
    condition = Condition(process=process, **HERE)
    given = {"vdd": 1.2, "temp_c": 27.0, "vcm": 0.65, "process": process}
    overdrive = np.array([1e-6, 1e-4, 1e-2, 0.2])
    resolve = reference.delay([1e-6, 1e-4, 1e-2], **given)
    reset = np.array([6e-11, 1.2e-10, 4e-10])
    trip, sigma = float(reference.offset(**given)), float(reference.noise_sigma(**given))
    level = trip + sigma * np.array([-1.5, -0.5, 0.0, 0.5, 1.5])
    rng = np.random.default_rng(stream_key(3, 0, len(process)) % 2**32)
    share = rng.binomial(TRIALS, reference.probability(level, **given)) / TRIALS
    centre = float(reference.trace([0.0], [0], **given).aperture_ticks[0]) * 1e-15

    def points(quantity: str, x: object, y: object, **more: object) -> CurvePoints:
        columns = (tuple(np.asarray(a, dtype=float).tolist()) for a in (x, y))
        return CurvePoints(quantity=quantity, condition=condition, **more,
                           **dict(zip("xy", columns, strict=True)))  # fmt: skip

    return [
        points("delay", overdrive, reference.delay(overdrive, **given)),
        points("energy", overdrive, reference.energy(overdrive, **given)),
        points("window", resolve, [2e-6, 2e-4, 2e-2]),
        points("noise", level, share, trials=(TRIALS,) * len(level)),
        points("reset", [0.0], [float(reference.reset_delay(**given))]),
        points("memory", reset, reference.memory_shift(reset, **given)),
        points("memory_at_least", [1e-12], [0.9 * reference.memory_shift(1e-12, **given)]),
        points("aperture", [0.0, 0.5 * centre, 1.5 * centre, 2.0 * centre], [1.0, 1.0, 0.0, 0.0]),
    ]
