"""Energies at each condition -> the law they follow over the overdrive."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.intervals import normal_quantile, student_quantile

__all__ = ["EnergyLaw", "EnergyRows", "choose_law", "energies"]

Floats = npt.NDArray[np.float64]

_NEGLIGIBLE = 2e-3
_PREFERRED = {"constant": 1.0, "delay": 1.25, "overdrive": 1.0}
"""How much worse than the best a law may be and still be taken, in this order.

The delay is preferred to the overdrive: it has a cause, and an end with the decision phase.
"""
_UNITS = {"constant": ("J",), "delay": ("J", "W"), "overdrive": ("J", "J")}


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class EnergyRows:
    """Rows of an energy table, shape (N,) each.

    Parameters
    ----------
    site : ndarray of int
        Operating condition.
    overdrive_v : ndarray
        Magnitude.
    delay_s : ndarray or None
        Of the model at that overdrive; None without one.
    extra_cycle_s : ndarray
        Clock period beyond the shortest.
    energy_j : ndarray
    """

    site: npt.NDArray[np.intp]
    overdrive_v: Floats
    delay_s: Floats | None
    extra_cycle_s: Floats
    energy_j: Floats


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class EnergyLaw:
    """A law fitted at every condition.

    Parameters
    ----------
    name : str
        As in `EnergyEffect`.
    parameters : ndarray, shape (C, P)
        The fixed part in J and, but for a constant, the rise in W or J; 1 where not told.
    told : ndarray of bool, shape (C,)
        Conditions whose rows tell the parameters.
    variance : ndarray, shape (P,)
        Of the parameters' logarithms at a condition, from the scatter of its rows; NaN
        where no condition has rows to spare.
    cost : float
        Mean relative error of rows fitted plus that of rows left out.
    static_w : float
        Growth with the clock period; NaN where nothing tells it.
    """

    name: str
    parameters: Floats
    told: npt.NDArray[np.bool_]
    variance: Floats
    cost: float
    static_w: float

    @property
    def units(self) -> tuple[str, ...]:
        """Of the parameters."""
        return _UNITS[self.name]


def energies(rows: EnergyRows, law: EnergyLaw, parameters: Floats) -> Floats:
    """Return the law's energy of each row at the shortest clock period, (N,) in J."""
    found: Floats = (_basis(rows, law.name) * parameters[rows.site]).sum(axis=-1)
    return found


def choose_law(rows: EnergyRows, conditions: int) -> EnergyLaw:
    """Return the simplest law that fits and foresees as well as any."""
    laws = {}
    for name in _PREFERRED:
        law = _fitted(rows, conditions, name)
        if law is not None:
            laws[name] = law
    least = min(law.cost for law in laws.values())
    for name, factor in _PREFERRED.items():
        if name in laws and laws[name].cost <= max(factor * least, least + _NEGLIGIBLE):
            return laws[name]
    raise AssertionError("the law of least cost is always good enough")


def _basis(rows: EnergyRows, name: str) -> Floats:
    one = np.ones(len(rows.energy_j))
    if name == "constant":
        return one[:, None]
    if name == "delay" and rows.delay_s is not None:
        return np.column_stack([one, rows.delay_s])
    least = rows.overdrive_v[rows.overdrive_v > 0.0].min(initial=np.inf)
    lost = np.log(rows.overdrive_v.max() / np.maximum(rows.overdrive_v, least))
    return np.column_stack([one, lost])


def _fitted(rows: EnergyRows, conditions: int, name: str) -> EnergyLaw | None:
    """Return a law fitted to each condition's rows; None where it cannot be meant."""
    if name == "delay" and rows.delay_s is None:
        return None
    count = len(_UNITS[name])
    law = EnergyLaw(
        name=name,
        parameters=np.ones((conditions, count)),
        told=_told(rows, conditions, count),
        variance=np.full(count, np.nan),
        cost=np.inf,
        static_w=np.nan,
    )
    if not law.told.any():
        return None
    basis = _basis(rows, name)
    sites = [_at_site(rows, basis, c) for c in np.flatnonzero(law.told)]
    if not all((site.parameters > 0.0).all() for site in sites):
        return None
    law.parameters[law.told] = [site.parameters for site in sites]
    static = [site.static_w for site in sites if np.isfinite(site.static_w)]
    variances = [site.variance for site in sites if np.isfinite(site.variance).all()]
    return replace(
        law,
        variance=np.mean(variances, axis=0) if variances else law.variance,
        cost=_mean([s.fitted for s in sites]) + _mean([s.left_out for s in sites]),
        static_w=float(np.mean(static)) if static else np.nan,
    )


def _told(rows: EnergyRows, conditions: int, count: int) -> npt.NDArray[np.bool_]:
    levels = [len(np.unique(rows.overdrive_v[rows.site == c])) for c in range(conditions)]
    return np.array(levels) >= count


def _mean(errors: list[Floats]) -> float:
    """Return the mean of those that are known; 0 where none is."""
    known = np.concatenate(errors)
    known = known[np.isfinite(known)]
    return float(known.mean()) if len(known) else 0.0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Site:
    """One condition: absolute relative errors of rows fitted and left out (NaN: not told)."""

    parameters: Floats
    static_w: float
    variance: Floats
    fitted: Floats
    left_out: Floats


def _at_site(rows: EnergyRows, basis: Floats, site: np.intp) -> _Site:
    """Fit relative errors by least squares, with the clock period where it varies."""
    here = rows.site == site
    count = basis.shape[1]
    extra = rows.extra_cycle_s[here]
    columns = [basis[here]] + ([extra[:, None]] if np.ptp(extra) > 0.0 else [])
    scaled = np.column_stack(columns) / rows.energy_j[here, None]
    size = np.abs(scaled).max(axis=0)
    size = np.where(size > 0.0, size, 1.0)
    unit = scaled / size
    inverse = np.linalg.pinv(unit.T @ unit)
    solution = inverse @ unit.sum(axis=0)
    error = unit @ solution - 1.0
    slack = 1.0 - np.einsum("nk,kl,nl->n", unit, inverse, unit)
    freedom = len(error) - len(size)
    variance = np.full(count, np.nan)
    if freedom > 0:
        widened = float(student_quantile(0.95, freedom)) ** 2 / normal_quantile(0.95) ** 2
        scatter = float(error @ error) / freedom * widened
        with np.errstate(divide="ignore", invalid="ignore"):
            variance = scatter * np.diag(inverse)[:count] / solution[:count] ** 2
    return _Site(
        parameters=solution[:count] / size[:count],
        static_w=float(solution[count] / size[count]) if len(size) > count else np.nan,
        variance=variance,
        fitted=np.abs(error),
        left_out=np.abs(np.where(slack > 1e-9, error / np.maximum(slack, 1e-9), np.nan)),
    )
