"""How well the delay model, as emitted, follows its tables."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import Sites, conditions_of, find_sites
from behavgen.fit.delay import DelayFit
from behavgen.fit.delay_direction import asymmetry_words
from behavgen.fit.intervals import student_quantile
from behavgen.fit.unresolved_delays import unresolved_words
from behavgen.fit.weak_corners import left_out_errors, weak_corners
from behavgen.fit.wording import condition_words
from behavgen.formulas.node_law import node_law_delay
from behavgen.model import Condition, ConditionFit, Estimate, Parameter, significant
from behavgen.tables.characterisation import Characterisation, DelayTable

__all__ = ["delay_fits", "delay_notices"]

Floats = npt.NDArray[np.float64]

_NOTABLE_TAU_GAP = 0.01
"""Simulated windows and delays differ by a few tenths of a percent with absurd significance."""
_NOTABLE_ERRORS = 3.0
_NOTABLE_RMS = 0.02


def delay_fits(delay: DelayFit) -> tuple[ConditionFit, ...]:
    """Return each condition's errors of the emitted surfaces and its own tau."""
    smooth = _surface_parameters(delay)
    held_out = delay.law.parameters * np.exp(delay.family.left_out)
    fits = []
    for c, condition in enumerate(conditions_of(delay.sites)):
        here = delay.sites.of_row == c
        for quantity, kind in (("delay", False), ("window", True)):
            rows = here & _counted(delay) & (delay.rows.is_window == kind)
            if rows.any():
                fits.append(_condition_fit(delay, quantity, condition, rows, c, smooth, held_out))
    return tuple(fits)


def _counted(delay: DelayFit) -> npt.NDArray[np.bool_]:
    """Return the rows that resolved and were not left out."""
    counted: npt.NDArray[np.bool_] = ~delay.rows.is_bound & (delay.rows.weight > 0.0)
    return counted


def _surface_parameters(delay: DelayFit) -> Floats:
    """Return tau and node delays of the surfaces at every site, shape (C, K + 1)."""
    family, sites = delay.family, delay.sites
    names = [name or family.primary for name in sites.process]
    rows = [
        family.fit.predict_with(family.coefficients[name], sites.values[c : c + 1])[0]
        for c, name in enumerate(names)
    ]
    parameters: Floats = np.exp(np.array(rows))
    return parameters


def _condition_fit(
    delay: DelayFit,
    quantity: str,
    condition: Condition,
    rows: npt.NDArray[np.bool_],
    c: int,
    smooth: Floats,
    held_out: Floats,
) -> ConditionFit:
    error = _relative_errors(delay, rows, smooth[c])
    unseen = np.isfinite(held_out[c]).all()
    away = _relative_errors(delay, rows, held_out[c]) if unseen else None
    return ConditionFit(
        quantity=quantity,
        condition=condition,
        rows=int(rows.sum()),
        rms_relative=significant(float(np.sqrt(np.mean(error**2))), 4),
        worst_relative=significant(float(np.max(np.abs(error))), 4),
        held_out_rms_relative=None
        if away is None
        else significant(float(np.sqrt(np.mean(away**2))), 4),
        parameters=(_tau(delay, c, condition),) if quantity == "delay" else (),
    )


def _relative_errors(delay: DelayFit, rows: npt.NDArray[np.bool_], parameters: Floats) -> Floats:
    delay_s = delay.rows.delay_s[rows]
    model_s = node_law_delay(
        delay.rows.overdrive_v[rows], delay.law.log_node, parameters[0], parameters[1:]
    )
    return model_s / delay_s - 1.0


def _tau(delay: DelayFit, c: int, condition: Condition) -> Parameter:
    value = float(delay.law.parameters[c, 0])
    error = float(np.sqrt(delay.law.covariance[c, 0, 0]))
    half = float(student_quantile(0.95, delay.law.freedom[c])) * error
    return Parameter(
        name="tau_s",
        estimate=Estimate(
            value=significant(value),
            low=significant(max(value - half, 0.0), 6),
            high=significant(value + half, 6),
        ),
        unit="s",
        low=0.0,
        description=f"regeneration time constant at {condition_words(condition)}",
        source="least squares on relative delay; interval is lack of fit",
    )


def delay_notices(delay: DelayFit, tables: Characterisation) -> tuple[str, ...]:
    """Return what the delay fit wants its reader to know."""
    return (
        *_poor_conditions(delay),
        *_corners(delay),
        *_borrowed(delay),
        *_tau_gaps(delay),
        *(_sides(delay, tables.delay) if tables.delay else ()),
        *(unresolved_words(tables.delay, delay.family, delay.law.log_node) if tables.delay else ()),
    )


def _poor_conditions(delay: DelayFit) -> list[str]:
    fits = [f for f in delay_fits(delay) if f.quantity == "delay"]
    poor = [f for f in fits if (f.rms_relative or 0.0) > _NOTABLE_RMS]
    if not poor:
        return []
    worst = max(poor, key=lambda f: f.rms_relative or 0.0)
    return [
        f"At {len(poor)} of {len(fits)} conditions the delay model misses its table by more than "
        f"{_NOTABLE_RMS:.0%} rms; the worst is {condition_words(worst.condition)} with "
        f"{worst.rms_relative:.1%}."
    ]


def _tau_gaps(delay: DelayFit) -> list[str]:
    """Compare tau of window rows and delay rows on the regenerative tail, site by site."""
    first_node_v = float(np.exp(delay.law.log_node[0]))
    notices = []
    for c, condition in enumerate(conditions_of(delay.sites)):
        tail = (delay.sites.of_row == c) & _counted(delay)
        tail &= delay.rows.overdrive_v <= first_node_v
        slopes = [_slope(delay, tail & (delay.rows.is_window == kind)) for kind in (False, True)]
        if any(slope is None for slope in slopes):
            continue
        (tau_s, error_s), (window_tau_s, window_error_s) = slopes  # type: ignore[misc]
        gap = window_tau_s / tau_s - 1.0
        error = np.hypot(error_s, window_error_s) / tau_s
        if abs(gap) > _NOTABLE_TAU_GAP and abs(gap) > _NOTABLE_ERRORS * error:
            notices.append(
                f"At {condition_words(condition)} tau is {tau_s * 1e12:.4g} ps from the delays and "
                f"{window_tau_s * 1e12:.4g} ps from the windows, {gap:+.1%} apart "
                f"({abs(gap) / max(error, 1e-9):.0f} standard errors)."
            )
    return notices


def _sides(delay: DelayFit, table: DelayTable) -> list[str]:
    """Compare ones and zeros of the delay table with the model, which knows no difference."""
    fits = _surface_parameters(delay)
    error = np.full(len(table.delay_s), np.nan)
    sites = find_sites(table.conditions)
    known = {_key(delay.sites, c): fits[c] for c in range(delay.sites.count)}
    resolved = np.isfinite(table.delay_s) & (np.abs(table.overdrive_v) > 0.0)
    for c in range(sites.count):
        parameters = known.get(_key(sites, c))
        rows = resolved & (sites.of_row == c)
        if parameters is not None and rows.any():
            overdrive_v = np.abs(table.overdrive_v[rows])
            model_s = node_law_delay(overdrive_v, delay.law.log_node, parameters[0], parameters[1:])
            error[rows] = model_s / table.delay_s[rows] - 1.0
    return asymmetry_words(table, error)


def _key(sites: Sites, c: int) -> tuple[str, ...]:
    return (sites.process[c], *(repr(value) for value in sites.values[c].tolist()))


def _slope(delay: DelayFit, rows: npt.NDArray[np.bool_]) -> tuple[float, float] | None:
    """Return tau and its standard error from rows on the tail; None below three rows."""
    x, y = np.log(delay.rows.overdrive_v[rows]), delay.rows.delay_s[rows]
    if len(x) < 3 or np.ptp(x) == 0.0:
        return None
    centred = x - x.mean()
    spread = float(centred @ centred)
    slope = float(centred @ y) / spread
    residual = y - y.mean() - slope * centred
    return -slope, float(np.sqrt(residual @ residual / (len(x) - 2) / spread))


def _corners(delay: DelayFit) -> list[str]:
    """Name conditions that the others foresee far worse than they foresee each other."""
    weak = weak_corners(delay.family.left_out, delay.law.metric)
    if not weak.any():
        return []
    missed = left_out_errors(delay.family.left_out, delay.law.metric)
    conditions = conditions_of(delay.sites)
    worst = int(np.nanargmax(np.where(weak, missed, np.nan)))
    more = f" and {weak.sum() - 1} more" if weak.sum() > 1 else ""
    others = float(np.sqrt(np.nanmean(missed[~weak] ** 2)))
    return [
        f"{condition_words(conditions[worst])}{more}: predicted from the other conditions, delays "
        f"are missed by {missed[worst]:.0%} there, by {others:.1%} elsewhere. Near such a corner "
        "the model is less certain than its intervals say."
    ]


def _borrowed(delay: DelayFit) -> list[str]:
    """Name conditions whose law is partly that of the others."""
    if not delay.short.any():
        return []
    conditions = conditions_of(delay.sites)
    rows = np.array(
        [int(((delay.sites.of_row == c) & _counted(delay)).sum()) for c in range(len(conditions))]
    )
    fewest = int(np.argmin(np.where(delay.short, rows, rows.max() + 1)))
    return [
        f"At {delay.short.sum()} of {len(conditions)} conditions the rows that resolved do not "
        f"tell the whole delay law, fewest at {condition_words(conditions[fewest])} "
        f"({rows[fewest]}); what they do not tell follows the other conditions."
    ]
