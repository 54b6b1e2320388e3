"""Hands a converter one input after the other and notes what it makes of each.

The work to do and its results are files of numbers; their names come in by the environment.
"""

# ruff: noqa: D103  the names are sentences

from __future__ import annotations

import os
from pathlib import Path

import cocotb
import numpy as np
from cocotb.triggers import Timer, ValueChange

from behavgen.handoff.examples.conversions import (
    INPUTS_VARIABLE,
    OUTPUTS_VARIABLE,
    write_results,
)


@cocotb.test()
async def every_input_is_converted(top) -> None:
    inputs = np.load(Path(os.environ[INPUTS_VARIABLE]))
    results, lost, delays = [], [], []
    top.lsb_v.value, top.phase_ticks.value, top.vin.value = 1.0, 1.0, 0.0
    top.start.value = 0
    await Timer(1, "ns")
    for number, (vin, lsb_v, phase) in enumerate(inputs, start=1):
        top.vin.value, top.lsb_v.value, top.phase_ticks.value = vin, lsb_v, phase
        top.start.value = number % 2
        await ValueChange(top.done)
        results.append(int(top.result.value))
        lost.append(int(top.lost.value))
        delays.append((top.easy_s.value, top.slowest_s.value))
    write_results(Path(os.environ[OUTPUTS_VARIABLE]), results, lost, delays)
