"""What to say of each quantity in a line: conditions, ranges with units, remarks."""

from __future__ import annotations

import numpy as np

from behavgen.tables.characterisation import (
    ApertureTable,
    Characterisation,
    DelayTable,
    EnergyTable,
    Floats,
    Integers,
    KickbackTable,
    MemoryTable,
    NoiseTable,
    OffsetStatistics,
    OffsetTable,
    ResetTable,
    Texts,
    WindowTable,
)
from behavgen.tables.condition_sets import (
    CONDITION_NAMES,
    ConditionSet,
    condition_set,
    names_not_given,
    per_process,
)
from behavgen.units import format_si

__all__ = ["Described", "described_quantities"]

Described = tuple[ConditionSet, tuple[str, ...]]
"""Distinct conditions of a quantity, and facts on it."""


def described_quantities(tables: Characterisation) -> dict[str, Described]:
    """Return conditions and facts of every quantity that has a table."""
    described: dict[str, Described] = {}
    if tables.offset is not None or tables.offset_statistics is not None:
        described["offset"] = _of_offset(tables.offset, tables.offset_statistics)
    if tables.noise is not None:
        described["noise"] = _of_noise(tables.noise)
    if tables.delay is not None:
        described["delay"] = _of_delay(tables.delay)
    if tables.window is not None:
        described["window"] = _of_window(tables.window)
    if tables.reset is not None:
        described["reset"] = _of_reset(tables.reset)
    described |= _memory_and_charges(tables)
    return {
        name: (conditions, (*facts, *_not_given(conditions)))
        for name, (conditions, facts) in described.items()
    }


def _memory_and_charges(tables: Characterisation) -> dict[str, Described]:
    described: dict[str, Described] = {}
    if tables.memory is not None:
        described["memory"] = _of_memory(tables.memory)
    if tables.aperture is not None:
        described["aperture"] = _of_aperture(tables.aperture)
    if tables.energy is not None:
        described["energy"] = _of_energy(tables.energy)
    if tables.kickback is not None:
        described["kickback"] = _of_kickback(tables.kickback)
    return described


def _of_offset(instances: OffsetTable | None, statistics: OffsetStatistics | None) -> Described:
    given = [table.conditions for table in (instances, statistics) if table is not None]
    facts = []
    if instances is not None:
        names, repeats = np.unique(_instances_at_conditions(instances), return_counts=True)
        facts.append(f"{names.size} instances")
        facts.append(_range(instances.offset_v, "V"))
        if several := int((repeats > 1).sum()):
            facts.append(f"{several} of them at more than one condition")
    if statistics is not None:
        facts.append(f"statistics at {_conditions(condition_set(statistics.conditions))}")
        facts.append(f"sigma {_range(statistics.sigma_v, 'V')}")
    return condition_set(*given), tuple(facts)


def _instances_at_conditions(table: OffsetTable) -> Texts:
    """Return the name of an instance once for each distinct condition it was measured at."""
    given = table.conditions
    keys = np.stack(
        [
            table.instance,
            given.process,
            *(column.astype(np.str_) for column in (given.vdd_v, given.temperature_k, given.vcm_v)),
        ]
    )
    names: Texts = np.unique(keys, axis=1)[0]
    return names


def _of_noise(table: NoiseTable) -> Described:
    facts = []
    if table.vdiff_v.size:
        curves = condition_set(table.conditions)
        per_curve = table.vdiff_v.size / len(curves)
        levels = f"{per_curve:g}" if per_curve.is_integer() else f"about {per_curve:.0f}"
        facts.append(f"{_conditions(curves)}, {levels} levels x {_whole_range(table.trials)}")
        facts.append(_range(table.vdiff_v, "V"))
    if table.sigma_v.size:
        facts.append(f"sigma at {_conditions(condition_set(table.sigma_conditions))}")
        facts.append(_range(table.sigma_v, "V"))
    return condition_set(table.conditions, table.sigma_conditions), tuple(facts)


def _of_delay(table: DelayTable) -> Described:
    conditions = condition_set(table.conditions)
    facts = [_conditions(conditions), _range(np.abs(table.overdrive_v), "V")]
    facts.append(_range(table.delay_s, "s"))
    if unresolved := int(np.isnan(table.delay_s).sum()):
        facts.append(f"{unresolved} not resolved")
    return conditions, tuple(facts)


def _of_window(table: WindowTable) -> Described:
    conditions = condition_set(table.conditions)
    facts = [_conditions(conditions), _range(table.resolve_time_s, "s")]
    facts.append(_range(table.window_v, "V"))
    if wider := int(np.isnan(table.window_v).sum()):
        facts.append(f"{wider} wider than searched")
    return conditions, tuple(facts)


def _of_reset(table: ResetTable) -> Described:
    conditions = condition_set(table.conditions)
    return conditions, (_conditions(conditions), _range(table.reset_delay_s, "s"))


def _of_memory(table: MemoryTable) -> Described:
    conditions = condition_set(table.conditions)
    facts = [_conditions(conditions), _range(table.reset_time_s, "s")]
    facts.append(_range(table.memory_shift_v, "V"))
    if bounds := int(table.censored.sum()):
        facts.append(f"{bounds} at least so much")
    return conditions, tuple(facts)


def _of_aperture(table: ApertureTable) -> Described:
    conditions = condition_set(table.conditions)
    facts = [_conditions(conditions), _range(table.step_time_s, "s")]
    if np.isfinite(table.step_v).any():
        facts.append(f"steps of {_range(table.step_v, 'V')}")
    return conditions, tuple(facts)


def _of_energy(table: EnergyTable) -> Described:
    conditions = condition_set(table.conditions)
    levels_v = np.abs(np.concatenate([table.overdrive_v, table.vdiff_v]))
    facts = [_conditions(conditions), _range(levels_v, "V"), _range(table.energy_j, "J")]
    if np.isfinite(table.cycle_time_s).any():
        facts.append(f"clock period {_range(table.cycle_time_s, 's')}")
    return conditions, tuple(facts)


def _of_kickback(table: KickbackTable) -> Described:
    conditions = condition_set(table.conditions)
    facts = [_conditions(conditions), f"common {_range(table.charge_common_c, 'C')}"]
    facts.append(f"differential {_range(table.charge_differential_c, 'C')}")
    if np.isfinite(table.source_resistance_ohm).any():
        facts.append(f"sources of {_range(table.source_resistance_ohm, 'ohm')}")
    return conditions, tuple(facts)


def _conditions(conditions: ConditionSet) -> str:
    """Return ``27 tt + 1 ss conditions``, or without processes ``5 conditions``."""
    counts = per_process(conditions)
    named = " + ".join(f"{count} {process}" for process, count in counts.items())
    return f"{named or len(conditions)} condition{'s' if len(conditions) != 1 else ''}"


def _not_given(conditions: ConditionSet) -> tuple[str, ...]:
    names = names_not_given(conditions)
    if not names:
        return ()
    if len(names) == len(CONDITION_NAMES):
        return ("conditions not given: holds everywhere",)
    return (f"{', '.join(names)} not given: holds for all",)


def _range(values: Floats, unit: str) -> str:
    """Return ``1 uV..300 mV`` for the finite values."""
    finite = values[np.isfinite(values)]
    if not finite.size:
        return "none"
    ends = (format_si(float(finite.min()), unit), format_si(float(finite.max()), unit))
    return "..".join(dict.fromkeys(ends))


def _whole_range(values: Integers) -> str:
    return "..".join(dict.fromkeys((str(values.min()), str(values.max()))))
