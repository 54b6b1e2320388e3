"""What can be read inside the module."""

from __future__ import annotations

import cocotb

from behavgen.check.driver import Driver

READABLE = ("x_cause", "decision_count", "overdrive_v", "delay_s")


@cocotb.test()
async def the_insides_can_be_read(top) -> None:
    cell = Driver(top, "the insides can be read")
    missing = [name for name in READABLE if not hasattr(cell.unit.dut, name)]
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
