"""The harness around the emitted module: its macros, its instances, its stimulus files."""

from __future__ import annotations

import re
from collections.abc import Iterable
from pathlib import Path

import numpy as np

from behavgen.check.runs import TOP, Run, Settings
from behavgen.check.stimulus import Stimulus
from behavgen.model import ComparatorModel

__all__ = ["harness_macros", "top_text", "write_stimulus"]


def harness_macros(model: ComparatorModel, text: str) -> dict[str, str]:
    """Return the macros that fit the block harness to a cell.

    Parameters
    ----------
    model : ComparatorModel
    text : str
        The SystemVerilog under check: what can be read inside it may be missing.
    """
    cell = model.cell
    names = ("inp", "inn", "clk", "outp", "outn", "vdd", "unresolved", "enable")
    pins = {f"PIN_{name.upper()}": getattr(cell.pins, name) for name in names}
    readable = {"READS_X_CAUSE": "1"} if re.search(r"\bx_cause\b", text) else {}
    return {
        "CELL": cell.name,
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
        f"`timescale {precision}/{precision}\n\nmodule {TOP};\n{instances}"
        f"  // to read the parameters' defaults\n  {model.cell.name} as_declared ();\nendmodule\n"
    )


def _instance(model: ComparatorModel, run: Run) -> str:
    parameters = {"INDEX": str(run.index), **_parameters(model, run.given)}
    connections = ",\n".join(f"    .{name}({value})" for name, value in parameters.items())
    return f"  // {run.name}\n  block_harness #(\n{connections}\n  ) {run.instance} ();\n"


def _parameters(model: ComparatorModel, given: Settings) -> dict[str, str]:
    codes = {process.name: process.code for process in model.processes}
    return {
        "OFFSET_SHIFT_V": repr(given.offset_shift_v),
        "NOISE_ON": str(int(given.noise_on)),
        "MISMATCH_ON": str(int(given.mismatch_on)),
        "DELAY_ON": str(int(given.delay_on)),
        "SEED": f"64'h{given.seed:016x}",
        "TEMPERATURE_C": repr(given.temperature_c),
        "PROCESS": str(codes[given.process]),
        "UNRESOLVED_MODE": str(given.unresolved_mode),
        "FORCE_UNRESOLVED_EVERY": str(given.force_unresolved_every),
        "WARNINGS": str(given.warnings),
    }


def write_stimulus(folder: Path, run: Run, stimulus: Stimulus) -> None:
    """Write the files that the block harness plays: big-endian words of 64 bits."""
    waits = stimulus.edge - np.append(0, stimulus.end[:-1])
    phases = np.stack([waits, stimulus.end - stimulus.edge], axis=-1)
    phases.astype(">u8").tofile(folder / f"{run.index}.clock")
    moments = np.append(stimulus.moment, stimulus.finish)
    levels = np.stack([stimulus.inp_v, stimulus.inn_v, stimulus.vdd_v], axis=-1)
    inputs = np.empty((len(moments), 4), dtype=">f8")
    inputs[:, 1:] = np.append(levels, levels[-1:], axis=0)
    inputs.view(">u8")[:, 0] = np.diff(moments, prepend=0)
    inputs.tofile(folder / f"{run.index}.inputs")
