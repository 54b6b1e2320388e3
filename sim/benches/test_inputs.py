"""Inputs that are no numbers, inputs that change late, and warnings."""

# ruff: noqa: D103  the names are sentences

from __future__ import annotations

import cocotb

from behavgen.check.directed import FORCED_EVERY, WARNING_RUN
from behavgen.check.driver import Driver

NO_NUMBERS = (float("nan"), float("inf"), float("-inf"))


@cocotb.test()
async def decisions_count_without_a_number_at_the_input(top) -> None:
    cell = Driver(top, "decisions count without a number at the input")
    await cell.power_up()
    await cell.decide(cell.large_v)
    for value in NO_NUMBERS:
        cell.unit.inp.value = value
        await cell.wait(5)
        cell.edge()
        await cell.settle()
        cell.must_show(cell.unknown, f"input {value} at the edge, at once")
        cell.must_name(3, f"input {value} at the edge")
        await cell.wait(2 * cell.delay(cell.large_v) + 20)
        cell.must_show(cell.unknown, f"input {value}, where a bit might be")
        cell.release()
        await cell.wait(cell.reset_ticks + 5)
        cell.must_rest(f"reset after an input of {value}")
    cell.apply(cell.large_v)
    coin = int(cell.trace(cell.large_v, number=FORCED_EVERY - 1).bits[0])
    await cell.wait(5)
    cell.edge()
    await cell.wait(cell.delay(cell.large_v) + 20)
    cell.release()
    await cell.settle()
    cell.must_show(cell.bit(coin), f"decision {FORCED_EVERY - 1}, unresolved by force, coin")
    await cell.wait(1)


@cocotb.test()
async def inputs_after_the_sampling_do_not_matter(top) -> None:
    cell = Driver(top, "inputs after the sampling do not matter")
    await cell.power_up()
    delay = cell.delay(cell.large_v)
    cell.edge()
    await cell.wait(cell.aperture_ticks + 1)
    cell.apply(-cell.large_v)
    await cell.wait(delay + 5)
    cell.must_show(cell.bit(1), "input reversed a tick after it was sampled")
    cell.unit.inp.value = float("nan")
    cell.release()
    await cell.wait(cell.reset_ticks + 5)
    cell.must_rest("input not a number in reset only")


@cocotb.test()
async def each_cause_of_a_warning_is_met_twice(top) -> None:
    """Provoke the warnings; whether each was printed once is judged from the log."""
    cell = Driver(top, WARNING_RUN)
    await cell.power_up()
    long_enough = cell.delay(cell.large_v) + 20
    for _ in range(2):
        await cell.decide(cell.large_v)
        cell.leave_the_box()
        await cell.wait(5)
        await cell.cycle(long_enough)
        cell.apply(cell.large_v)
        cell.switch_on()
        cell.unit.inp.value = float("nan")
        await cell.wait(5)
        await cell.cycle(long_enough)
        cell.clock("X")
        await cell.wait(5)
        cell.release()
        await cell.wait(5)
