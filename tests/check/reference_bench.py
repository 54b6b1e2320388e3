"""A bench whose instances are played by the reference: what a module that equals it would show."""

from __future__ import annotations

import numpy as np

from behavgen.check.closure.shots import Seen
from behavgen.check.runs import Run, reference_of

__all__ = ["reference_bench"]


def reference_bench(played):
    """Return a class that stands in for the simulated bench, deciding by a model's reference.

    Parameters
    ----------
    played : ComparatorModel
        Of the module under check; may be off from the model that is checked.
    """

    class ReferenceBench:
        def __init__(self, simulation, model, text, instances, *plusargs):
            run_seed = int(plusargs[0].partition("=")[2])
            settings = [_with_seed(one, run_seed) for one in instances]
            self.runs = [
                Run(index=n, name=f"instance {n}", given=one, meant=one, decisions=1)
                for n, one in enumerate(settings)
            ]

        def measure(self, wanted):
            bit, after = (np.full(len(wanted.instance), -1) for _ in range(2))
            for run in self.runs:
                rows = np.flatnonzero(wanted.instance == run.index)
                if len(rows):
                    trace = _trace(played, run, wanted.pick(rows))
                    bit[rows] = np.where(trace.unresolved, -1, trace.leaning)
                    after[rows] = np.where(trace.unresolved, trace.bits, trace.leaning)
            nothing = np.full(len(bit), -1)
            return Seen(bit=bit, after=after, delay_ticks=nothing, reset_ticks=nothing,
                        energy_j=np.full(len(bit), np.nan))  # fmt: skip

    return ReferenceBench


def _with_seed(settings, run_seed):
    from dataclasses import replace  # noqa: PLC0415

    return replace(settings, run_seed=run_seed)


def _trace(played, run, wanted):
    meant = run.meant
    given = {"vcm": wanted.vcm_v, "temp_c": meant.temperature_c, "process": meant.process}
    if played.cell.pins.vdd is not None:
        given["vdd"] = wanted.vdd_v
    reset = np.full(len(wanted.instance), 10**6)
    return reference_of(played, run).trace(wanted.vdiff_v, wanted.phase_ticks, reset, **given)
