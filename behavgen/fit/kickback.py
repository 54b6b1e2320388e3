"""Kickback table -> KickbackEffect: charge that a decision drives out of the inputs."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.centred_surfaces import centred_family, missed_squared
from behavgen.fit.conditions import Sites, conditions_of, find_sites
from behavgen.fit.wording import condition_words
from behavgen.model import Condition, ConditionFit, Estimate, KickbackEffect, Parameter, Surface
from behavgen.model import significant as rounded
from behavgen.tables.characterisation import KickbackTable

__all__ = ["KickbackFit", "fit_kickback"]

Floats = npt.NDArray[np.float64]

_NOTABLE_SHARE = 0.05
_NAMES = (
    ("kickback_common_c", "C", "charge out of either input"),
    ("kickback_differential_c", "C", "charge out of inp less that out of inn, inputs alike"),
    ("kickback_differential_c_per_v", "C/V", "what a differential input adds to it"),
)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class KickbackFit:
    """The kickback effect and how it came about."""

    effect: KickbackEffect
    fits: tuple[ConditionFit, ...]
    notices: tuple[str, ...]


def fit_kickback(table: KickbackTable | None, processes: tuple[str, ...]) -> KickbackFit | None:
    """Fit both charges at every condition, and surfaces through them.

    The differential one follows a straight line in the input where each
    condition was measured at two inputs or more; else it is the mean.

    Parameters
    ----------
    table : KickbackTable or None
    processes : tuple of str
        All processes of the cell, the default first.
    """
    if table is None:
        return None
    sites = find_sites(table.conditions)
    charges = _charges(table, sites)
    surfaces = [_surface(sites, column, processes, k) for k, column in enumerate(charges.T)]
    return KickbackFit(
        effect=KickbackEffect(
            common=surfaces[0],
            differential=surfaces[1],
            differential_per_v=surfaces[2] if len(surfaces) > 2 else None,
        ),
        fits=tuple(
            ConditionFit(
                quantity="kickback",
                condition=condition,
                rows=int((sites.of_row == c).sum()),
                parameters=_parameters(condition, charges[c]),
            )
            for c, condition in enumerate(conditions_of(sites))
        ),
        notices=tuple(_by_resistance(table, sites)),
    )


def _charges(table: KickbackTable, sites: Sites) -> Floats:
    """Return common, differential and, where it can be told, differential per volt, (C, 2 or 3)."""
    levels = [np.unique(table.vdiff_v[sites.of_row == c]) for c in range(sites.count)]
    sloped = min(len(level) for level in levels) > 1 and bool(np.isfinite(table.vdiff_v).all())
    found = []
    for c in range(sites.count):
        here = sites.of_row == c
        columns = [np.ones(int(here.sum()))] + ([table.vdiff_v[here]] if sloped else [])
        basis, differential = np.column_stack(columns), table.charge_differential_c[here]
        line = np.linalg.lstsq(basis, differential, rcond=None)[0]
        found.append([float(table.charge_common_c[here].mean()), *line])
    return np.array(found)


def _surface(sites: Sites, charge: Floats, processes: tuple[str, ...], which: int) -> Surface:
    size = float(np.abs(charge).max()) or 1.0
    family = centred_family(sites, charge[:, None], processes, unit=size)
    variance = float(missed_squared(family)[0])
    unit = _NAMES[which][1]
    return family.surface(0, unit, "plain", variance if np.isfinite(variance) else None)


def _parameters(condition: Condition, charges: Floats) -> tuple[Parameter, ...]:
    return tuple(
        Parameter(
            name=name,
            estimate=Estimate(value=rounded(float(charge))),
            unit=unit,
            description=f"{words} at {condition_words(condition)}",
            source="kickback table",
        )
        for (name, unit, words), charge in zip(_NAMES, charges, strict=False)
    )


def _by_resistance(table: KickbackTable, sites: Sites) -> list[str]:
    """Say by how much the charges hang on the resistance of the sources."""
    resistances = np.unique(table.source_resistance_ohm[np.isfinite(table.source_resistance_ohm)])
    if len(resistances) < 2:
        return []
    key = np.column_stack([sites.of_row, np.nan_to_num(table.vdiff_v)])
    _, alike = np.unique(key, axis=0, return_inverse=True)
    alike = alike.ravel()
    apart = []
    for charge in (table.charge_common_c, table.charge_differential_c):
        low = np.full(int(alike.max()) + 1, np.inf)
        high = -low
        np.minimum.at(low, alike, charge)
        np.maximum.at(high, alike, charge)
        apart.append(float((high - low).max()))
    largest = max(np.abs(table.charge_common_c).max(), np.abs(table.charge_differential_c).max())
    if max(apart) <= _NOTABLE_SHARE * largest:
        return []
    return [
        f"Kickback differs by up to {max(apart):.2g} C between source resistances of "
        f"{resistances[0]:.4g} and {resistances[-1]:.4g} ohm, {max(apart) / largest:.0%} of the "
        "largest charge; the model carries the mean."
    ]
