"""Memory table -> MemoryEffect: how the previous decision's favour fades with the reset."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.errors import Fault, FitError
from behavgen.fit.centred_surfaces import centred_family, emitted_at, missed_squared
from behavgen.fit.conditions import Sites, conditions_of, find_sites
from behavgen.fit.intervals import normal_quantile, student_quantile
from behavgen.fit.memory_choice import MemoryChoice, choose_memory, shift_of
from behavgen.fit.memory_curve import MemoryRows
from behavgen.fit.process_surfaces import SurfaceFamily
from behavgen.fit.wording import condition_words
from behavgen.model import ConditionFit, MemoryEffect, MemoryTerm, Surface, significant
from behavgen.tables.characterisation import MemoryTable

__all__ = ["MemoryFit", "fit_memory"]

Floats = npt.NDArray[np.float64]
Truths = npt.NDArray[np.bool_]

_RESOLUTION = 1e-3
"""Share of the largest shift below which differences are not told apart."""
_NOTABLE_SHORTFALL = 0.05
_NOTABLE_RMS = 0.1
_STEP = 1e-5


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MemoryFit:
    """The memory effect and how it came about; no effect where the table shows no memory."""

    effect: MemoryEffect | None
    fits: tuple[ConditionFit, ...]
    notices: tuple[str, ...]


def fit_memory(table: MemoryTable | None, processes: tuple[str, ...]) -> MemoryFit | None:
    """Fit exponentials over the reset time, and surfaces through what they are made of.

    Parameters
    ----------
    table : MemoryTable or None
    processes : tuple of str
        All processes of the cell, the default first.

    Raises
    ------
    FitError
        When the shifts cannot tell how the memory fades.
    """
    if table is None:
        return None
    largest_v = float(table.memory_shift_v.max())
    if largest_v <= 0.0:
        notice = "The memory table shows no shift in favour of the previous decision anywhere."
        return MemoryFit(effect=None, fits=(), notices=(notice,))
    if len(np.unique(table.reset_time_s[~table.censored])) < 2:
        raise FitError(_too_few_times(table))
    every = find_sites(table.conditions).of_row
    carried = np.bincount(every, weights=~table.censored) > 0.0
    rows, sites = _rows(table, carried[every], largest_v)
    choice = choose_memory(rows, sites.count)
    if choice is None:
        raise FitError(_no_curve(table))
    family = centred_family(sites, choice.log_parameters, processes)
    emitted = np.minimum(shift_of(emitted_at(family, sites), choice.shape, rows), largest_v)
    return MemoryFit(
        effect=_effect(choice, family, rows, largest_v),
        fits=_condition_fits(rows, sites, emitted, choice, family),
        notices=(
            *_left_out(carried),
            *_range_words(rows, largest_v),
            *_contradicted(rows, sites, emitted),
            *_poor(rows, emitted),
        ),
    )


def _too_few_times(table: MemoryTable) -> Fault:
    times = len(np.unique(table.reset_time_s[~table.censored]))
    return Fault(
        file=table.sources[0].file if table.sources else "",
        what=f"memory shifts are measured at {times} reset time{'' if times == 1 else 's'}, not "
        "counting those that are only bounded",
        allowed="how the memory fades cannot be told from fewer than two; measure at three or "
        "more reset times, over a factor of two or more",
    )


def _no_curve(table: MemoryTable) -> Fault:
    return Fault(
        file=table.sources[0].file if table.sources else "",
        what="memory shifts of both signs, which no fading memory explains",
        allowed="half the distance between the trip points after a zero and after a one, positive "
        "where the previous decision is favoured",
    )


def _rows(table: MemoryTable, keep: Truths, largest_v: float) -> tuple[MemoryRows, Sites]:
    """Return the rows to be fitted and their conditions."""
    sites = find_sites(table.conditions.taken(keep))
    shift_v = table.memory_shift_v[keep]
    rows = MemoryRows(
        reset_time_s=table.reset_time_s[keep],
        shift_v=shift_v,
        scale_v=np.maximum(np.abs(shift_v), _RESOLUTION * largest_v),
        is_bound=table.censored[keep],
        site=sites.of_row,
    )
    return rows, sites


def _effect(
    choice: MemoryChoice, family: SurfaceFamily, rows: MemoryRows, largest_v: float
) -> MemoryEffect:
    terms = choice.shape.terms
    variance = _variances(choice, family, rows)

    def surface(position: int, unit: str) -> Surface:
        return family.surface(position, unit, "log", variance[position])

    return MemoryEffect(
        terms=tuple(
            MemoryTerm(shift=surface(k, "V"), tau=surface(terms + k, "s")) for k in range(terms)
        ),
        floor=surface(2 * terms, "V") if choice.shape.floor else None,
        cap_v=significant(largest_v),
    )


def _variances(choice: MemoryChoice, family: SurfaceFamily, rows: MemoryRows) -> list[float | None]:
    """Return the variance of each log parameter at a condition; None: nothing tells it.

    The larger of what the rows' scatter leaves, with few degrees of freedom
    widened to Student's interval, and of what conditions left out were missed by.
    """
    found = missed_squared(family)
    measured = rows.where(~rows.is_bound)
    freedom = len(measured.shift_v) - choice.spent
    if freedom > 0:
        residual = shift_of(choice.log_parameters, choice.shape, measured) - measured.shift_v
        scatter = float(np.sum((residual / measured.scale_v) ** 2)) / freedom
        scatter *= float(student_quantile(0.95, freedom)) ** 2 / normal_quantile(0.95) ** 2
        inverse = np.linalg.pinv(_information(choice, measured))
        found = np.fmax(found, len(choice.log_parameters) * scatter * np.diag(inverse))
    return [float(v) if np.isfinite(v) else None for v in found]


def _information(choice: MemoryChoice, measured: MemoryRows) -> Floats:
    """Return J^T J of the relative shifts by parameters that move at all conditions alike."""
    columns = []
    for step in _STEP * np.eye(choice.log_parameters.shape[1]):
        up = shift_of(choice.log_parameters + step, choice.shape, measured)
        down = shift_of(choice.log_parameters - step, choice.shape, measured)
        columns.append((up - down) / (2.0 * _STEP) / measured.scale_v)
    jacobian = np.stack(columns, axis=-1)
    return np.asarray(jacobian.T @ jacobian)


def _condition_fits(
    rows: MemoryRows, sites: Sites, emitted: Floats, choice: MemoryChoice, family: SurfaceFamily
) -> tuple[ConditionFit, ...]:
    unseen = np.minimum(
        shift_of(choice.log_parameters + family.left_out, choice.shape, rows), rows.shift_v.max()
    )
    fits = []
    for c, condition in enumerate(conditions_of(sites)):
        here = (rows.site == c) & ~rows.is_bound
        error, away = (
            (shift[here] - rows.shift_v[here]) / rows.scale_v[here] for shift in (emitted, unseen)
        )
        fits.append(
            ConditionFit(
                quantity="memory",
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


def _left_out(carried: Truths) -> list[str]:
    lost = int((~carried).sum())
    if not lost:
        return []
    return [
        f"{lost} of {len(carried)} conditions of the memory table hold bounds only and are left "
        "out of the memory fit."
    ]


def _range_words(rows: MemoryRows, largest_v: float) -> list[str]:
    shortest_s = float(rows.reset_time_s[~rows.is_bound].min())
    return [
        f"Memory is measured down to resets of {shortest_s * 1e12:.4g} ps; after shorter ones the "
        f"model shifts the trip point by no more than {largest_v * 1e3:.4g} mV."
    ]


def _poor(rows: MemoryRows, emitted: Floats) -> list[str]:
    measured = ~rows.is_bound
    rms = float(np.sqrt(np.mean(((emitted - rows.shift_v) / rows.scale_v)[measured] ** 2)))
    if rms <= _NOTABLE_RMS:
        return []
    return [f"The memory follows no simple law: its rows are missed by {rms:.1%} rms."]


def _contradicted(rows: MemoryRows, sites: Sites, emitted: Floats) -> list[str]:
    """Say where the curve stays below a row that the shift is at least."""
    shortfall = np.where(rows.is_bound, 1.0 - emitted / rows.shift_v, 0.0)
    worst = int(np.argmax(shortfall))
    if shortfall[worst] <= _NOTABLE_SHORTFALL:
        return []
    where = condition_words(conditions_of(sites)[int(rows.site[worst])])
    return [
        f"{int((shortfall > _NOTABLE_SHORTFALL).sum())} bounds of the memory table are not met by "
        f"the model, the worst at {where} and {rows.reset_time_s[worst] * 1e12:.4g} ps by "
        f"{shortfall[worst]:.1%}."
    ]
