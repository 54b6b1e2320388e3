"""The harness around the emitted module: its macros, its instances, its stimulus files."""

from __future__ import annotations

import re
from collections.abc import Iterable
from pathlib import Path

import numpy as np
import numpy.typing as npt

from behavgen.check.levels import Levels
from behavgen.check.runs import TOP, Run, Settings
from behavgen.check.stimulus import Stimulus
from behavgen.model import ComparatorModel

__all__ = ["harness_macros", "top_text", "write_block", "write_stimulus"]

PARAMETERS = (
    "OFFSET_SHIFT_V", "NOISE_ON", "MISMATCH_ON", "MEMORY_ON", "DELAY_ON", "SEED", "TEMPERATURE_C",
    "PROCESS", "UNRESOLVED_MODE", "FORCE_UNRESOLVED_EVERY", "WARNINGS",
)  # fmt: skip
"""Of the emitted modules' interface."""

Integers = npt.NDArray[np.int64]


def harness_macros(model: ComparatorModel, text: str) -> dict[str, str]:
    """Return the macros that fit the block harness to a cell.

    Parameters
    ----------
    model : ComparatorModel
    text : str
        The SystemVerilog under check: parameters and what can be read inside may be missing.
    """
    cell = model.cell
    names = ("inp", "inn", "clk", "outp", "outn", "vdd", "unresolved", "enable")
    pins = {f"PIN_{name.upper()}": getattr(cell.pins, name) for name in names}
    readable = {
        f"READS_{name.upper()}": "1"
        for name in ("x_cause", "energy_j")
        if re.search(rf"\b{name}\b", text)
    }
    parameters = [name for name in PARAMETERS if re.search(rf"\b{name}\b", text)]
    return {
        "CELL": cell.name,
        "PARAMETERS": ", ".join(f".{name}({name})" for name in parameters),
        "TICK": cell.time_precision,
        "DECIDING": "1'b1" if cell.decides_on == "rising" else "1'b0",
        **{macro: pin for macro, pin in pins.items() if pin is not None},
        **readable,
    }


def top_text(model: ComparatorModel, runs: Iterable[Run]) -> str:
    """Return the module that holds one harness for each run, and one module as it is declared."""
    precision = model.cell.time_precision
    instances = "".join(_instance(model, run) for run in runs)
    return (
        f"`timescale {precision}/{precision}\n\nmodule {TOP};\n  int playing = 0;\n{instances}"
        f"  // to read the parameters' defaults\n  {model.cell.name} as_declared ();\nendmodule\n"
    )


def _instance(model: ComparatorModel, run: Run) -> str:
    parameters = {
        "INDEX": str(run.index),
        "SCRIPTED": str(int(run.scripted)),
        **_parameters(model, run.given),
    }
    connections = ",\n".join(f"    .{name}({value})" for name, value in parameters.items())
    return f"  // {run.name}\n  block_harness #(\n{connections}\n  ) {run.instance} ();\n"


def _parameters(model: ComparatorModel, given: Settings) -> dict[str, str]:
    codes = {process.name: process.code for process in model.processes}
    return {
        "OFFSET_SHIFT_V": repr(given.offset_shift_v),
        "NOISE_ON": str(int(given.noise_on)),
        "MISMATCH_ON": str(int(given.mismatch_on)),
        "MEMORY_ON": str(int(given.memory_on)),
        "DELAY_ON": str(int(given.delay_on)),
        "SEED": f"64'h{given.seed:016x}",
        "TEMPERATURE_C": repr(given.temperature_c),
        "PROCESS": str(codes[given.process]),
        "UNRESOLVED_MODE": str(given.unresolved_mode),
        "FORCE_UNRESOLVED_EVERY": str(given.force_unresolved_every),
        "WARNINGS": str(given.warnings),
    }


def write_stimulus(folder: Path, run: Run, stimulus: Stimulus) -> None:
    """Write the files that the block harness plays."""
    write_block(
        folder, run, edge=stimulus.edge, end=stimulus.end, levels=stimulus.levels,
        finish=stimulus.finish,
    )  # fmt: skip


def write_block(
    folder: Path, run: Run, *, edge: Integers, end: Integers, levels: Levels, finish: int
) -> None:
    """Write a block's clock and levels: big-endian words of 64 bits.

    Parameters
    ----------
    folder : Path
    run : Run
    edge, end : ndarray of int, shape (N,)
        Decision edges and ends of the decision phases, in ticks.
    levels : Levels
    finish : int
        When nothing more can happen.
    """
    phases = np.stack([edge - np.append(0, end[:-1])[: len(edge)], end - edge], axis=-1)
    phases.astype(">u8").tofile(folder / f"{run.index}.clock")
    volts = np.stack([levels.inp_v, levels.inn_v, levels.vdd_v], axis=-1)
    inputs = np.empty((len(volts) + 1, 4), dtype=">f8")
    inputs[:-1, 1:] = volts
    inputs[-1, 1:] = volts[-1] if len(volts) else 0.0
    inputs.view(">u8")[:, 0] = np.diff(np.append(levels.moment, finish), prepend=0)
    inputs.tofile(folder / f"{run.index}.inputs")
