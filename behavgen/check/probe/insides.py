"""What stands inside the module at the end of each decision phase: expected, and read."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.check.runs import Run, reference_of
from behavgen.model import ComparatorModel
from behavgen.trace import Trace

__all__ = ["Insides", "expected_insides", "watching_text"]

DELAY_TOLERANCE = 1e-10
"""Relative; simulators may use their own logarithms in it."""
_TIE_TICKS = 1e-4
"""Delays that close to half a tick may be rounded either way."""
_NAMES = ("overdrive_v", "delay_s", "delay_ticks", "aperture_ticks", "reset_ticks")

Floats = npt.NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Insides:
    """What must stand there, shape (N,) each; not a number where nothing is stated.

    Parameters
    ----------
    overdrive_v : ndarray
        To the last bit.
    delay_s : ndarray
    delay_ticks, aperture_ticks, reset_ticks : ndarray
    """

    overdrive_v: Floats
    delay_s: Floats
    delay_ticks: Floats
    aperture_ticks: Floats
    reset_ticks: Floats

    def fault(self, path: Path) -> str:
        """Return the first thing in a file that is wrong; "" where nothing is."""
        rows = _read(path)
        if len(rows) < len(self.overdrive_v):
            return "too few decisions"
        for name, seen in zip(_NAMES, rows[: len(self.overdrive_v)].T, strict=True):
            expected = getattr(self, name)
            allowed = DELAY_TOLERANCE * np.abs(expected) if name == "delay_s" else 0.0
            wrong = np.flatnonzero(~np.isnan(expected) & ~(np.abs(seen - expected) <= allowed))
            if len(wrong):
                return f"decision {wrong[0]}: {name}"
        return ""


def expected_insides(
    model: ComparatorModel, run: Run, trace: Trace, phase_ticks: npt.NDArray[np.int64],
    vcm_v: Floats, vdd_v: Floats,
) -> Insides:  # fmt: skip
    """Return what must stand inside after each decision of a run.

    Parameters
    ----------
    model : ComparatorModel
    run : Run
    trace : Trace
        What the reference makes of the decisions.
    phase_ticks : ndarray of int
        Decisions that end before they have sampled say nothing.
    vcm_v, vdd_v : ndarray
        At the edges; supplies that the cell does not have are not numbers.
    """
    sampled = phase_ticks > trace.aperture_ticks
    meant, reference = run.meant, reference_of(model, run)
    condition = {"vcm": vcm_v} | ({} if np.isnan(vdd_v).any() else {"vdd": vdd_v})
    nothing = np.full(len(phase_ticks), np.nan)
    delay_s, delay_ticks = nothing, nothing
    if model.delay is not None and meant.delay_on:
        delay_s = np.maximum(
            reference.delay(trace.overdrive_v, temp_c=meant.temperature_c, process=meant.process,
                            **condition),
            model.cell.time_unit_s,
        )  # fmt: skip
        ticks = delay_s * model.cell.ticks_per_second
        clear = np.abs(ticks - np.floor(ticks) - 0.5) > _TIE_TICKS
        delay_ticks = np.where(sampled & clear, trace.delay_ticks, np.nan)
    return Insides(
        overdrive_v=np.where(sampled, trace.overdrive_v, np.nan),
        delay_s=np.where(sampled, delay_s, np.nan), delay_ticks=delay_ticks,
        aperture_ticks=nothing if model.aperture is None else trace.aperture_ticks.astype(float),
        reset_ticks=_reset_ticks(model, run, trace),
    )  # fmt: skip


def _returns(model: ComparatorModel) -> bool:
    return model.reset is not None and model.cell.in_reset != "hold"


def _reset_ticks(model: ComparatorModel, run: Run, trace: Trace) -> Floats:
    if not _returns(model) or not run.meant.delay_on:
        return np.full(len(trace.reset_ticks), np.nan)
    return trace.reset_ticks.astype(float)


def watching_text(model: ComparatorModel, run: Run) -> str:
    """Return what writes the insides of an instance to a file of its own."""
    resting, k = ("1'b0" if model.cell.decides_on == "rising" else "1'b1"), run.index
    present = {
        "delay_ticks": model.delay is not None, "aperture_ticks": model.aperture is not None,
        "reset_ticks": _returns(model),
    }  # fmt: skip
    values = ",\n      ".join(
        f"$realtobits(run_{k}.dut.{name})" if present.get(name, True) else "64'd0"
        for name in _NAMES
    )
    return (
        f'  int insides_{k};\n  initial insides_{k} = $fopen("{k}.insides", "w");\n'
        f"  always @(run_{k}.clk) if (run_{k}.clk === {resting} && run_{k}.dut.decision_count != 0)"
        f'\n    $fdisplay(insides_{k}, "{"%h" * len(_NAMES)}",\n      {values});\n'
    )


def _read(path: Path) -> Floats:
    words = bytes.fromhex(path.read_text(encoding="ascii"))
    return np.frombuffer(words, dtype=">f8").astype(float).reshape(-1, len(_NAMES))
