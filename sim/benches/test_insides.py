"""What can be read inside the module."""

# ruff: noqa: D103  the names are sentences

from __future__ import annotations

import cocotb

from behavgen.check.driver import Driver
from behavgen.check.runs import MODES

ROOM_K = 300.15
READABLE = ("x_cause", "decision_count", "overdrive_v", "delay_s")


@cocotb.test()
async def the_insides_can_be_read(top) -> None:
    cell = Driver(top, "the insides can be read")
    readable = [*READABLE, *(["energy_j"] if cell.model.energy is not None else [])]
    missing = [name for name in readable if not hasattr(cell.unit.dut, name)]
    assert not missing, f"the module has nothing to read of the name {', '.join(missing)}"
    await cell.power_up()
    await cell.decide(cell.large_v)
    await cell.decide(-cell.large_v)
    expected = cell.trace(-cell.large_v)
    count = int(cell.unit.dut.decision_count.value)
    assert count == 2, f"decision_count must be 2 after two decision edges, is {count}"
    overdrive = float(cell.unit.dut.overdrive_v.value)
    assert overdrive == expected.overdrive_v[0], (
        f"overdrive_v must be {expected.overdrive_v[0]!r} V, is {overdrive!r} V"
    )
    if cell.model.delay is not None:
        ticks = float(cell.unit.dut.delay_s.value) * cell.cell.ticks_per_second
        assert abs(ticks - expected.delay_ticks[0]) <= 1.0, (
            f"delay_s must be {expected.delay_ticks[0]} ticks, is {ticks}"
        )


@cocotb.test()
async def the_parameters_are_those_of_the_interface(top) -> None:
    model = Driver(top, "the insides can be read").model
    declared, first = top.as_declared, model.processes[0]
    span = model.box.temperature_k
    room = span is None or span.low <= ROOM_K <= span.high
    mode = MODES.index(model.cell.when_unresolved)
    defaults = {
        "OFFSET_SHIFT_V": 0.0, "NOISE_ON": 1, "MISMATCH_ON": 0, "MEMORY_ON": 1, "DELAY_ON": 1,
        "SEED": 0, "TEMPERATURE_C": 27.0 if room else None, "PROCESS": first.code,
        "UNRESOLVED_MODE": mode,
        "FORCE_UNRESOLVED_EVERY": 0, "WARNINGS": 1,
    }  # fmt: skip
    missing = [name for name in defaults if not hasattr(declared, name)]
    assert not missing, f"the module has no parameter {', '.join(missing)}"
    for name, default in defaults.items():
        value = getattr(declared, name).value
        number = value if isinstance(value, float) else int(value)
        assert default in (None, number), f"{name} must default to {default}, is {number}"
