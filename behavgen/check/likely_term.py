"""Which term a wrong decision probably comes from: the reference, with each effect off in turn.

What the module showed is compared with what it would have to show without an
effect; the first that explains it is named.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import Any

import numpy as np

from behavgen.check.runs import Run, Settings, reference_of
from behavgen.check.stimulus import Stimulus
from behavgen.check.waveform import OUTP, Record
from behavgen.model import ComparatorModel
from behavgen.trace import Trace

__all__ = ["likely_term"]

_CLOSE_TICKS = 1


def likely_term(
    model: ComparatorModel, run: Run, stimulus: Stimulus, record: Record, n: int
) -> str:
    """Return in words what would explain a wrong decision; "" if nothing here does.

    Parameters
    ----------
    model : ComparatorModel
    run : Run
    stimulus : Stimulus
    record : Record
        What the run showed.
    n : int
        Number of the decision.
    """
    shown = _shown(stimulus, record, n)
    for words, changed, vdiff_v, at in _alternatives(model, run, stimulus):
        trace = _traced(model, replace(run, meant=changed), stimulus, vdiff_v, at)
        if _explains(trace, n, shown):
            return words
    return ""


def _alternatives(
    model: ComparatorModel, run: Run, stimulus: Stimulus
) -> Iterator[tuple[str, Settings, np.ndarray, dict[str, Any]]]:
    """Return each effect off in turn, then conditions taken otherwise."""
    meant, sampled = run.meant, stimulus.sampled_v
    switches = (
        ("noise", meant.noise_on and model.noise is not None, {"noise_on": False}),
        ("mismatch", meant.mismatch_on, {"mismatch_on": False}),
        ("memory", meant.memory_on and model.memory is not None, {"memory_on": False}),
        ("OFFSET_SHIFT_V", meant.offset_shift_v != 0.0, {"offset_shift_v": 0.0}),
    )
    for name, there, off in switches:
        if there:
            yield f"as if without {name}", replace(meant, **off), sampled, {}
    yield "as if the input were taken at the edge", meant, stimulus.inp_v - stimulus.inn_v, {}
    yield "as if both inputs were exchanged", meant, -sampled, {}
    middle = {
        "vdd": model.box.vdd_v, "vcm": model.box.vcm_v,
    }  # fmt: skip
    for name, span in middle.items():
        if span is not None:
            yield f"as if {name} did not matter", meant, sampled, {name: span.middle}
    for process in model.processes:
        if process.name != meant.process:
            words = f"as if of the process {process.name}"
            yield words, replace(meant, process=process.name), sampled, {}


def _traced(
    model: ComparatorModel, run: Run, stimulus: Stimulus, vdiff_v: np.ndarray,
    at: dict[str, Any],
) -> Trace:  # fmt: skip
    given: dict[str, Any] = {
        "vdd": stimulus.vdd_v, "vcm": stimulus.vcm_v, "temp_c": run.meant.temperature_c,
        "process": run.meant.process, **at,
    }  # fmt: skip
    phase = stimulus.end - stimulus.edge
    return reference_of(model, run).trace(vdiff_v, phase, stimulus.reset, **given)


def _shown(stimulus: Stimulus, record: Record, n: int) -> tuple[int, int]:
    """Return the first output before the end of the phase, and when it was reached; -1: never."""
    edge, end = stimulus.edge[n : n + 1], stimulus.end[n : n + 1]
    ready = int(record.first_change(edge)[0])
    bit = int(record.at(end - 1)[0, OUTP])
    return bit, ready - int(edge[0]) if edge[0] < ready <= end[0] else -1


def _explains(trace: Trace, n: int, shown: tuple[int, int]) -> bool:
    bit, delay = shown
    if trace.unresolved[n]:
        return delay < 0
    near = abs(int(trace.delay_ticks[n]) - delay) <= _CLOSE_TICKS
    return bit == int(trace.leaning[n]) and (near or delay < 0)
