"""Unknown clock levels, and edges at the moments at which two things happen at once."""

# ruff: noqa: D103  the names are sentences

from __future__ import annotations

import cocotb

from behavgen.check.driver import Driver
from behavgen.check.runs import MODES


@cocotb.test()
async def a_clock_through_x_decides_nothing(top) -> None:
    cell = Driver(top, "a clock through x decides nothing")
    await cell.power_up()
    for level in ("X", "Z"):
        await cell.decide(cell.large_v)
        cell.clock(level)
        await cell.settle()
        cell.must_show(cell.unknown, f"clock {level}, at once")
        cell.must_name(4, f"clock {level}")
        await cell.wait(20)
        cell.edge()
        await cell.wait(2 * cell.delay(cell.large_v) + 20)
        cell.must_show(cell.unknown, f"clock from {level} to its deciding level")
        cell.release()
        await cell.wait(cell.reset_ticks + 5)
        cell.must_rest("after the next clean reset edge")


@cocotb.test()
async def a_clock_from_x_to_the_reset_level_powers_up(top) -> None:
    cell = Driver(top, "a clock from x to the reset level powers up")
    await cell.power_up()
    await cell.decide(cell.large_v)
    cell.clock("X")
    await cell.wait(20)
    cell.release()
    await cell.settle()
    cell.must_show(cell.unknown, "clock from X to its reset level, in the same instant")
    await cell.wait(1)
    await cell.settle()
    cell.must_show(cell.reset_state or cell.unknown, "a tick after the clock is known again")
    await cell.wait(1)
    if cell.delay(cell.large_v) <= 2:
        return  # the decision itself would show at once
    cell.clock("X")
    await cell.wait(20)
    cell.release()
    await cell.same_instant()
    cell.edge()
    for _ in range(2):
        await cell.wait(1)
        await cell.settle()
        cell.must_show(cell.unknown, "an edge in the instant of power-up leaves no reset state")
    await cell.wait(1)


@cocotb.test()
async def an_unknown_clock_cancels_a_decision(top) -> None:
    cell = Driver(top, "an unknown clock cancels a decision")
    await cell.power_up()
    cell.edge()
    await cell.wait(max(cell.delay(cell.large_v) // 2, 1))
    cell.clock("X")
    await cell.settle()
    cell.must_show(cell.unknown, "clock X in a decision, at once")
    await cell.wait(2 * cell.delay(cell.large_v) + 20)
    cell.must_show(cell.unknown, "clock X in a decision, after its delay")
    cell.must_name(4, "clock X in a decision")


@cocotb.test()
async def a_decision_ready_at_the_reset_edge_is_shown(top) -> None:
    cell = Driver(top, "a decision ready at the reset edge is shown")
    await cell.power_up()
    for value in (1, 0):
        overdrive = cell.large_v if value else -cell.large_v
        delay = await measured_delay(cell, overdrive, value)
        spent = cell.energy_j()
        cell.edge()
        await cell.wait(delay)
        cell.release()
        await cell.settle()
        cell.must_flag("0", "ready at the reset edge")
        cell.must_name(0, "ready at the reset edge")
        if cell.reset_ticks > 0:
            cell.must_show(cell.bit(value), "ready at the reset edge")
        await cell.wait(cell.reset_ticks + 20)
        cell.must_rest("after a decision that was ready at the reset edge")
        cell.must_have_spent(spent, overdrive, "a decision that was ready at the reset edge")
        if delay > 1:
            await cell.decide(overdrive, phase=delay - 1)
            cell.must_flag("1", "reset edge a tick before the ready")


async def measured_delay(cell: Driver, overdrive_v: float, value: int) -> int:
    """Return the delay that the instance itself shows, within a tick of the expected one."""
    cell.apply(overdrive_v)
    await cell.wait(5)
    expected = cell.delay(overdrive_v)
    cell.edge()
    delay = max(expected - 1, 1)
    await cell.wait(delay)
    await cell.settle()
    while cell.outputs() != cell.bit(value) and delay <= expected:
        await cell.wait(1)
        await cell.settle()
        delay += 1
    await cell.wait(20)
    cell.release()
    await cell.wait(cell.reset_ticks + 20)
    return delay if cell.bit(value) != cell.reset_state else expected


@cocotb.test()
async def an_early_decision_edge_cancels_the_reset(top) -> None:
    cell = Driver(top, "an early decision edge cancels the reset")
    await cell.power_up()
    reset, delay = cell.reset_ticks, cell.delay(-cell.large_v)
    if min(reset, delay) < 10:
        return
    cell.edge()
    await cell.wait(cell.delay(cell.large_v) + 5)
    cell.release()
    await cell.wait(reset // 2)
    cell.apply(-cell.large_v)
    await cell.wait(2)
    cell.edge()
    await cell.wait(delay - 2)
    cell.must_show(cell.bit(1), "early decision edge, before the ready")
    await cell.wait(4)
    cell.must_show(cell.bit(0), "early decision edge, after the ready")


@cocotb.test()
@cocotb.parametrize(mode=MODES)
async def unresolved_outputs_stay_until_the_reset(top, mode: str) -> None:
    cell = Driver(top, f"unresolved outputs stay until the reset, {mode}")
    await cell.power_up()
    await cell.decide(cell.large_v)
    delay, reset = cell.delay(cell.large_v), max(cell.reset_ticks, 1)
    if delay < 10:
        return
    before = cell.outputs()
    cell.edge()
    await cell.wait(delay // 2)
    cell.must_show(before, "in an unresolved decision")
    cell.release()
    coin = int(cell.reference.trace([0.0], [0], first_decision=1).bits[0])
    shown = {"x": cell.unknown, "coin": cell.bit(coin), "hold": before}[mode]
    await cell.settle()
    for when in ("at the end of an unresolved decision", "just before the reset state"):
        cell.must_show(shown, when)
        cell.must_flag("1", when)
        cell.must_name(1, when)
        if reset < 4:
            break
        await cell.wait(reset - 2)
    await cell.wait(reset + 2)
    cell.must_rest("after an unresolved decision")
    cell.must_flag("1", "after an unresolved decision, until the next ready")
    await cell.decide(cell.large_v)
    cell.must_flag("0", "after the next ready")
