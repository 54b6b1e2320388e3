"""Three decisions worked out by hand, and the record that an honest module would leave."""

from __future__ import annotations

import numpy as np

from behavgen.check.levels import Levels
from behavgen.check.runs import Run, Settings
from behavgen.check.stimulus import Stimulus
from behavgen.check.waveform import Record
from behavgen.reference import Trace

__all__ = ["LINES", "honest", "record_of", "run_with", "three_decisions"]

LINES = """\
0 xx05
1 1100
150 1000
230 1100
350 xx11
380 1110
560 0100
"""
"""Time, outp outn unresolved x_cause; the last reset is cut off at 620."""


def run_with(**settings: object) -> Run:
    """Return a run of three decisions."""
    meant = Settings(process="typ", temperature_c=27.0, **settings)
    return Run(index=0, name="by hand", given=meant, meant=meant, decisions=3)


def three_decisions() -> Stimulus:
    """Return decisions at 100 (a one after 50), 300 (too slow) and 500 (a zero after 60).

    Phases last 100, 50 and 100 ticks, resets 30; the last reset is cut off.
    """
    trace = Trace(
        overdrive_v=np.array([1e-3, 1e-9, -1e-3]),
        leaning=np.array([1, 1, 0]),
        delay_ticks=np.array([50, 90, 60]),
        unresolved=np.array([False, True, False]),
        bits=np.array([1, 1, 0]),
        reset_ticks=np.array([30, 30, 30]),
        aperture_ticks=np.zeros(3, dtype=np.int64),
        memory_v=np.zeros(3),
        energy_j=np.zeros(3),
    )
    inp, inn, vdd = np.array([0.601, 0.6, 0.599]), np.full(3, 0.6), np.full(3, 1.2)
    levels = Levels(moment=np.array([0, 250, 450]), inp_v=inp, inn_v=inn, vdd_v=vdd)
    return Stimulus(
        inp_v=inp, inn_v=inn, vdd_v=vdd, sampled_v=inp - inn, levels=levels,
        edge=np.array([100, 300, 500]), end=np.array([200, 350, 600]), finish=620,
        aim=np.zeros(3, dtype=np.int64), trace=trace,
    )  # fmt: skip


def record_text(lines: str) -> bytes:
    """Return lines in the form of the harness."""
    rows = (line.split() for line in lines.splitlines())
    return "".join(f"{time:>20}{state}\n" for time, state in rows).encode()


def record_of(lines: str, tmp_path) -> Record:
    """Return the record of some lines."""
    from behavgen.check.waveform import read_record  # noqa: PLC0415

    path = tmp_path / "0.events"
    path.write_bytes(record_text(lines))
    return read_record(path)


def honest(**changed: str) -> str:
    """Return the honest lines with some of them replaced: ``honest(t150="151 1000")``."""
    lines = LINES
    for key, new in changed.items():
        old = next(line for line in LINES.splitlines() if line.startswith(f"{key[1:]} "))
        lines = lines.replace(f"{old}\n", f"{new}\n" if new else "")
    return lines
