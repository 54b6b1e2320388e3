"""Power-up, supply and enable."""

# ruff: noqa: D103  the names are sentences

from __future__ import annotations

import cocotb

from behavgen.check.directed import FORCED_EVERY
from behavgen.check.driver import Driver


async def powers_up_a_tick_later(cell: Driver, when: str) -> None:
    """Require unknown outputs now, the reset state a tick from now."""
    await cell.settle()
    cell.must_show(cell.unknown, f"{when}, in the same instant")
    await cell.wait(1)
    await cell.settle()
    cell.must_show(cell.reset_state or cell.unknown, f"{when}, a tick later")
    await cell.wait(1)


async def stays_unknown(cell: Driver, cause: int, when: str) -> None:
    """Require unknown outputs now and for longer than any decision or reset takes."""
    await cell.settle()
    cell.must_show(cell.unknown, f"{when}, at once")
    cell.must_name(cause, when)
    await cell.wait(2 * (cell.delay(cell.large_v) + cell.reset_ticks) + 20)
    cell.must_show(cell.unknown, f"long {when}")


@cocotb.test()
async def outputs_are_unknown_until_the_reset_state(top) -> None:
    cell = Driver(top, "outputs are unknown until the reset state")
    await cell.wait(5)
    cell.must_show(cell.unknown, "before power-up")
    cell.apply(cell.large_v)
    if cell.can_be_off:
        cell.switch_off()
        cell.release()
        await cell.wait(50)
        cell.must_show(cell.unknown, "clock at its reset level, still off")
        cell.switch_on()
    else:
        cell.release()
    await powers_up_a_tick_later(cell, "power-up")
    await cell.decide(cell.large_v, phase=cell.delay(cell.large_v) + 5)
    cell.must_rest("after the first decision")
    cell.must_name(0, "after the first decision")


@cocotb.test()
async def decisions_count_while_off(top) -> None:
    cell = Driver(top, "decisions count while off")
    await cell.power_up()
    await cell.decide(cell.large_v)
    if not cell.can_be_off:
        return
    cell.switch_off()
    await cell.settle()
    cell.must_show(cell.unknown, "supply lost, at once")
    cell.must_name(2, "supply lost")
    await cell.wait(1)
    for _ in range(2):
        await cell.decide(cell.large_v)
        cell.must_show(cell.unknown, "after a decision edge while off")
    cell.switch_on()
    await powers_up_a_tick_later(cell, "supply back")
    await cell.decide(-cell.large_v)
    await forced_coin(cell, number=FORCED_EVERY - 1)


async def forced_coin(cell: Driver, *, number: int) -> None:
    """Play a decision that is unresolved by force: its coin tells which number it is."""
    coin = int(cell.trace(cell.large_v, number=number).bits[0])
    cell.edge()
    await cell.wait(cell.delay(cell.large_v) + 20)
    cell.release()
    await cell.settle()
    cell.must_show(cell.bit(coin), f"decision {number}, unresolved by force, coin")
    cell.must_flag("1", f"decision {number}, unresolved by force")
    await cell.wait(cell.reset_ticks + 5)


@cocotb.test()
async def a_supply_at_its_threshold_is_on(top) -> None:
    cell = Driver(top, "a supply at its threshold is on")
    if not cell.has_threshold:
        return
    await cell.power_up()
    cell.supply(cell.cell.supply_off_v)
    await cell.settle()
    cell.must_rest("supply at its threshold")
    await cell.wait(5)
    cell.switch_off()
    await stays_unknown(cell, 2, "just below the threshold")


@cocotb.test()
async def losing_the_supply_cancels_a_decision(top) -> None:
    cell = Driver(top, "losing the supply cancels a decision")
    if not cell.can_be_off:
        return
    await cell.power_up()
    await cell.decide(cell.large_v)
    cell.edge()
    await cell.wait(max(cell.delay(cell.large_v) // 2, 1))
    cell.switch_off()
    await stays_unknown(cell, 2, "after losing the supply in a decision")
    cell.switch_on()
    await cell.wait(50)
    cell.must_show(cell.unknown, "supply back while the clock is at its deciding level")
    cell.release()
    await cell.wait(cell.reset_ticks + 5)
    cell.must_rest("supply back and clock at its reset level")
    await resolves(cell)


async def resolves(cell: Driver) -> None:
    """Require that a decision resolves as if nothing had happened."""
    for sign in (1, 0):
        overdrive = cell.large_v if sign else -cell.large_v
        cell.apply(overdrive)
        await cell.wait(5)
        cell.edge()
        await cell.wait(cell.delay(overdrive) + 5)
        cell.must_show(cell.bit(sign), "a decision after the disturbance")
        cell.must_name(0, "a decision after the disturbance")
        cell.release()
        await cell.wait(cell.reset_ticks + 20)


@cocotb.test()
async def losing_the_supply_cancels_a_reset(top) -> None:
    cell = Driver(top, "losing the supply cancels a reset")
    if not cell.can_be_off:
        return
    await cell.power_up()
    cell.edge()
    await cell.wait(cell.delay(cell.large_v) + 5)
    cell.release()
    await cell.wait(max(cell.reset_ticks // 2, 1))
    cell.switch_off()
    await stays_unknown(cell, 2, "after losing the supply in a reset")
    cell.switch_on()
    await cell.wait(1)
    cell.switch_off()
    await stays_unknown(cell, 2, "after a supply of one tick")
    cell.switch_on()
    await powers_up_a_tick_later(cell, "supply back")
    await resolves(cell)


@cocotb.test()
async def a_supply_that_is_not_a_number_is_off(top) -> None:
    cell = Driver(top, "a supply that is not a number is off")
    if not cell.has_threshold:
        return
    await cell.power_up()
    cell.supply(float("nan"))
    await stays_unknown(cell, 2, "with a supply that is not a number")
    cell.switch_on()
    await powers_up_a_tick_later(cell, "supply back")


@cocotb.test()
async def enable_switches_like_the_supply(top) -> None:
    cell = Driver(top, "enable switches like the supply")
    if cell.pins.enable is None:
        return
    await cell.power_up()
    for level in ("0", "X", "Z"):
        cell.enable(level)
        await stays_unknown(cell, 2, f"with an enable of {level}")
        cell.switch_on()
        await powers_up_a_tick_later(cell, f"enabled after {level}")
    await resolves(cell)
