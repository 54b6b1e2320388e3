"""Energy table -> EnergyEffect: what a decision costs, and by how much more when it lingers.

While the latch is near balance a current flows through it that stops with the
decision, so that energy grows with the delay. Without a delay law it grows with
the logarithm of the overdrive, which is the same on the regenerative tail.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault, FitError
from behavgen.fit.centred_surfaces import centred_family, emitted_at, missed_squared
from behavgen.fit.conditions import Sites, conditions_of, find_sites
from behavgen.fit.energy_laws import EnergyLaw, EnergyRows, choose_law, energies
from behavgen.fit.process_surfaces import SurfaceFamily
from behavgen.model import ComparatorModel, ConditionFit, EnergyEffect, Range, significant
from behavgen.operating_point import OperatingPoint, delay_s, evaluate, operating_point
from behavgen.tables.characterisation import EnergyTable
from behavgen.units import ZERO_CELSIUS_K

__all__ = ["EnergyFit", "fit_energy", "overdrives"]

Floats = npt.NDArray[np.float64]

_NOTABLE_RMS = 0.05


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class EnergyFit:
    """The energy effect and how it came about.

    Parameters
    ----------
    effect : EnergyEffect
    overdrive_v : ndarray, shape (N,)
        Magnitude of the overdrive of each row of the table.
    is_shortest : ndarray of bool, shape (N,)
        Rows at the shortest clock period, to which the effect belongs.
    fits : tuple of ConditionFit
    notices : tuple of str
    """

    effect: EnergyEffect
    overdrive_v: Floats
    is_shortest: npt.NDArray[np.bool_]
    fits: tuple[ConditionFit, ...]
    notices: tuple[str, ...]


def fit_energy(table: EnergyTable | None, model: ComparatorModel) -> EnergyFit | None:
    """Choose the energy's law and fit surfaces through what it is made of.

    Parameters
    ----------
    table : EnergyTable or None
    model : ComparatorModel
        With the offset and delay that were fitted.

    Raises
    ------
    FitError
        When an energy is not positive.
    """
    if table is None:
        return None
    if not (table.energy_j > 0.0).all():
        raise FitError(_not_positive(table))
    point = _point(table, model)
    overdrive_v = overdrives(table, model, point)
    sites = find_sites(table.conditions)
    shortest_s = np.nanmin(table.cycle_time_s) if np.isfinite(table.cycle_time_s).any() else None
    rows = EnergyRows(
        site=sites.of_row,
        overdrive_v=overdrive_v,
        delay_s=None if model.delay is None else delay_s(model.delay, overdrive_v, point),
        extra_cycle_s=np.nan_to_num(table.cycle_time_s - (shortest_s or 0.0)),
        energy_j=table.energy_j,
    )
    law = choose_law(rows, sites.count)
    kept = find_sites(table.conditions.taken(law.told[sites.of_row]))
    names = tuple(process.name for process in model.processes)
    family = centred_family(kept, np.log(law.parameters[law.told]), names)
    return EnergyFit(
        effect=_effect(law, family, overdrive_v, shortest_s),
        overdrive_v=overdrive_v,
        is_shortest=rows.extra_cycle_s == 0.0,
        fits=_condition_fits(rows, law, sites, family),
        notices=tuple(_notices(table, law, rows, shortest_s)),
    )


def _not_positive(table: EnergyTable) -> Fault:
    return Fault(
        file=table.sources[0].file if table.sources else "",
        what=f"{int((~(table.energy_j > 0.0)).sum())} energies are not above 0",
        allowed="what a decision takes from the supply, above 0; some simulators count a current "
        "into the supply as positive",
    )


def _point(table: EnergyTable, model: ComparatorModel) -> OperatingPoint:
    """Return the rows' operating points; what the table leaves open is taken at the middle."""
    given, middle = table.conditions, operating_point(model, (), {})
    temperature_k = np.where(
        np.isnan(given.temperature_k), middle.temperature_k, given.temperature_k
    )
    return operating_point(
        model,
        table.energy_j.shape,
        {
            "vdd": np.where(np.isnan(given.vdd_v), middle.vdd_v, given.vdd_v),
            "temp_c": temperature_k - ZERO_CELSIUS_K,
            "vcm": np.where(np.isnan(given.vcm_v), middle.vcm_v, given.vcm_v),
            "process": np.where(given.process == "", middle.process, given.process),
        },
    )


def overdrives(table: EnergyTable, model: ComparatorModel, point: OperatingPoint) -> Floats:
    """Return the magnitude of each row's overdrive, (N,) in V: given, or input less trip point."""
    offset = 0.0 if model.offset is None else evaluate(model.offset.surface, point)
    from_input = table.vdiff_v - offset
    return np.abs(np.where(np.isnan(table.overdrive_v), from_input, table.overdrive_v))


def _effect(
    law: EnergyLaw, family: SurfaceFamily, overdrive_v: Floats, cycle_time_s: float | None
) -> EnergyEffect:
    variance = np.fmax(missed_squared(family), law.variance)
    fixed, *rise = (
        family.surface(k, unit, "log", float(variance[k]) if np.isfinite(variance[k]) else None)
        for k, unit in enumerate(law.units)
    )
    span = Range(
        low=significant(float(overdrive_v[overdrive_v > 0.0].min(initial=np.inf))),
        high=significant(float(overdrive_v.max())),
    )
    return EnergyEffect(
        law=law.name,
        fixed=fixed,
        rise=rise[0] if rise else None,
        overdrive_v=span if law.name == "overdrive" else None,
        cycle_time_s=None if cycle_time_s is None else significant(float(cycle_time_s)),
    )


def _condition_fits(
    rows: EnergyRows, law: EnergyLaw, sites: Sites, family: SurfaceFamily
) -> tuple[ConditionFit, ...]:
    emitted, unseen = np.ones((2, *law.parameters.shape))
    kept = Sites(
        values=sites.values[law.told],
        process=tuple(p for p, told in zip(sites.process, law.told, strict=True) if told),
        of_row=np.arange(int(law.told.sum())),
    )
    emitted[law.told] = np.exp(emitted_at(family, kept))
    unseen[law.told] = law.parameters[law.told] * np.exp(family.left_out)
    fits = []
    for c, condition in enumerate(conditions_of(sites)):
        here = (rows.site == c) & (rows.extra_cycle_s == 0.0)
        if law.told[c] and here.any():
            error, away = (
                energies(rows, law, p)[here] / rows.energy_j[here] - 1.0 for p in (emitted, unseen)
            )
            fits.append(
                ConditionFit(
                    quantity="energy",
                    condition=condition,
                    rows=int(here.sum()),
                    rms_relative=_rms(error),
                    worst_relative=significant(float(np.abs(error).max()), 4),
                    held_out_rms_relative=_rms(away),
                )
            )
    return tuple(fits)


def _rms(error: Floats) -> float | None:
    value = float(np.sqrt(np.mean(error**2)))
    return significant(value, 4) if np.isfinite(value) else None


def _notices(
    table: EnergyTable, law: EnergyLaw, rows: EnergyRows, shortest_s: float | None
) -> list[str]:
    found = []
    lost = int((~law.told).sum())
    if lost:
        found.append(
            f"{lost} of {len(law.told)} conditions of the energy table were measured at a single "
            "overdrive and are left out of the energy fit."
        )
    if shortest_s is not None:
        found.append(f"Energy is that of a clock period of {shortest_s * 1e9:.4g} ns.")
        if np.isfinite(law.static_w):
            found[-1] += (
                f" It grows by {law.static_w:.3g} W times what a longer one adds; that is leakage, "
                "which the model leaves out."
            )
        elif len(np.unique(table.cycle_time_s[np.isfinite(table.cycle_time_s)])) > 1:
            found[-1] += " Other clock periods are in the table, but at no condition two."
    error = energies(rows, law, law.parameters) / rows.energy_j - 1.0
    use = law.told[rows.site] & (rows.extra_cycle_s == 0.0)
    rms = float(np.sqrt(np.mean(error[use] ** 2))) if use.any() else 0.0
    if rms > _NOTABLE_RMS:
        found.append(f"The energy follows no simple law: rows are missed by {rms:.1%} rms.")
    return found
