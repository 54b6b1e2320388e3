"""Instances that benches drive edge by edge: events that a block of decisions never meets.

Each is named after the bench that drives it, so that every bench finds an
instance at its power-up.
"""

from __future__ import annotations

from dataclasses import replace

from behavgen.check.runs import MODES, Run, Settings
from behavgen.model import ComparatorModel
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["BENCH_MODULES", "FORCED_EVERY", "WARNING_RUN", "directed_runs", "middle_c"]

BENCH_MODULES = ("test_power", "test_clock", "test_inputs", "test_insides")
FORCED_EVERY = 5
"""Every so many decisions of the counting instances shows its number through a coin."""
WARNING_RUN = "each cause is warned of once"

_PLAIN = (
    "outputs are unknown until the reset state",
    "a supply at its threshold is on",
    "losing the supply cancels a decision",
    "losing the supply cancels a reset",
    "a supply that is not a number is off",
    "enable switches like the supply",
    "a clock through x decides nothing",
    "a clock from x to the reset level powers up",
    "an unknown clock cancels a decision",
    "a decision ready at the reset edge is shown",
    "an early decision edge cancels the reset",
    "inputs after the sampling do not matter",
    "the insides can be read",
)
_COUNTING = (
    "decisions count while off",
    "decisions count without a number at the input",
)


def directed_runs(model: ComparatorModel, *, first_index: int) -> tuple[Run, ...]:
    """Return the instances of the directed benches: in the middle of the range, nothing random."""
    base = Settings(
        process=model.processes[0].name, temperature_c=middle_c(model), noise_on=False,
        memory_on=False, seed=7,
    )  # fmt: skip
    counting = replace(base, force_unresolved_every=FORCED_EVERY, unresolved_mode=1)
    settings = {
        **dict.fromkeys(_PLAIN, base),
        **dict.fromkeys(_COUNTING, counting),
        **{
            f"unresolved outputs stay until the reset, {mode}": replace(base, unresolved_mode=code)
            for code, mode in enumerate(MODES)
        },
        WARNING_RUN: replace(base, warnings=1),
    }
    return tuple(
        Run(index=first_index + number, name=name, given=given, meant=given)
        for number, (name, given) in enumerate(settings.items())
    )


def middle_c(model: ComparatorModel) -> float:
    """Return the middle of the characterised temperatures in degrees Celsius."""
    span = model.box.temperature_k
    return 27.0 if span is None else round(span.middle - ZERO_CELSIUS_K, 3)
