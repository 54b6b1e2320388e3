"""Common modes seen from the gate of the input pair, where that foresees delays better.

What an input pair conducts depends on its gate overdrive: on how far the common
mode stands above ground (n-channel pair) or below the supply (p-channel pair),
less a threshold that falls with temperature. In that coordinate a table with
two common modes has more than two levels, each supply or temperature adding
some, so that left-out conditions tell how delays bend between them.

Emitted models know common modes, not overdrives. A surface fitted over the
overdrive is therefore written as the polynomial over temperature, supply and
common mode that follows it across the box. That map is linear in the
coefficients, and so the coefficients' covariances follow.
"""

from __future__ import annotations

import itertools
from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.surface_changes import ridge_map
from behavgen.fit.surface_forms import Form, axes_of, axis_powers, design
from behavgen.fit.surfaces import SurfaceFit, choose_by_left_out, left_out_cost
from behavgen.formulas.polynomial import AXIS_SHAPES

__all__ = ["choose_through_pair"]

Floats = npt.NDArray[np.float64]

_TEMPERATURE, _SUPPLY, _COMMON = range(3)
_DRIFT_V_PER_K = 0.7e-3
"""By how much a threshold falls (common practice: 0.5 to 1 mV/K)."""
_REFERENCE_K = 300.0
_THRESHOLD_SHARES = (0.0, 0.2, 0.3, 0.4, 0.5, 0.6)
"""Candidates for the threshold at 300 K, as shares of the lowest common mode."""
_LEAST_OVERDRIVE_V = 0.04
_CLEARLY_BETTER = {True: 1.1, False: 1.4}
"""Left-out errors of the plain surface over those of this one from which on it is taken, by
whether overdrives count from the supply: nothing else tells how delays rise towards it, whereas
those that fall have an expected shape to beat."""
_AS_GOOD = 1.1
_SITE_WEIGHT = 10.0
"""Of a tabulated condition beside one between them when a surface is written anew."""
_STEPS = 5
_POWERS = {"temperature_k": 2, "vdd_v": 2, "vcm_v": 3}
_HIGHEST_ORDER = 5
"""Highest powers and total power of a surface written anew: more changes nothing much."""


@dataclass(frozen=True, slots=True, kw_only=True)
class _Pair:
    """An input pair.

    Parameters
    ----------
    below_supply : bool
        Its overdrive counts from the supply down, not from ground up.
    threshold_v : float
        At 300 K.
    drift_v_per_k : float
    """

    below_supply: bool
    threshold_v: float
    drift_v_per_k: float

    @property
    def powers(self) -> dict[str, int]:
        """Highest powers: what bends, bends with the overdrive."""
        return {"vdd_v": 1, "vcm_v": 2} if self.below_supply else {"vcm_v": 1}

    def seen(self, values: Floats) -> Floats:
        """Return conditions with the overdrive in place of the common mode."""
        seen = values.copy()
        if self.below_supply:
            seen[:, _COMMON] = values[:, _SUPPLY] - values[:, _COMMON]
        if self.drift_v_per_k:
            seen[:, _COMMON] += self.drift_v_per_k * (values[:, _TEMPERATURE] - _REFERENCE_K)
        seen[:, _COMMON] -= self.threshold_v
        return seen


def choose_through_pair(
    values: Floats, targets: Floats, metric: Floats, expected_shapes: Mapping[str, str]
) -> SurfaceFit:
    """Choose as `choose_by_left_out` does, over overdrives where they foresee clearly better.

    Parameters
    ----------
    values : ndarray, shape (C, 3)
    targets : ndarray, shape (C, L)
        Logarithms of delays.
    metric : ndarray, shape (C, L, L)
    expected_shapes : mapping of str to str
    """
    plain = choose_by_left_out(values, targets, metric, expected_shapes)
    shapes = {**expected_shapes, "vcm_v": "reciprocal_square"}
    trials = [
        (pair, choose_by_left_out(pair.seen(values), targets, metric, shapes, pair.powers))
        for pair in _pairs(values, targets)
    ]
    if not trials:
        return plain
    costs = np.array([left_out_cost(fit, metric) for _, fit in trials])
    if costs.min() * _CLEARLY_BETTER[trials[0][0].below_supply] > left_out_cost(plain, metric):
        return plain
    good = np.flatnonzero(costs <= costs.min() * _AS_GOOD)
    pair, fit = trials[good[0]]
    return _written_anew(pair, fit, values, targets)


def _pairs(values: Floats, targets: Floats) -> Iterator[_Pair]:
    """Return the pairs that a table may tell of."""
    levels = [0 if np.isnan(v).any() else len(np.unique(v)) for v in values.T]
    if levels[_COMMON] < 2:
        return
    if levels[_SUPPLY] > 1 and _rises(values, targets):
        if (values[:, _SUPPLY] - values[:, _COMMON]).min() >= _LEAST_OVERDRIVE_V:
            yield _Pair(below_supply=True, threshold_v=0.0, drift_v_per_k=0.0)
    elif levels[_COMMON] == 2 and levels[_TEMPERATURE] > 2:
        lowest = float(values[:, _COMMON].min())
        cold = _DRIFT_V_PER_K * (_REFERENCE_K - float(values[:, _TEMPERATURE].min()))
        for share in _THRESHOLD_SHARES:
            if lowest * (1.0 - share) - cold >= _LEAST_OVERDRIVE_V:
                yield _Pair(below_supply=False, threshold_v=lowest * share,
                            drift_v_per_k=_DRIFT_V_PER_K)  # fmt: skip


def _rises(values: Floats, targets: Floats) -> bool:
    """Return whether delays rise with the common mode where they are longest.

    That is at the lowest supply among the conditions that differ in the common mode alone.
    """
    slowness = targets.mean(axis=-1)
    lowest = values[:, _SUPPLY] == values[:, _SUPPLY].min()
    common = values[lowest, _COMMON]
    return bool(np.ptp(common) > 0.0 and np.corrcoef(common, slowness[lowest])[0, 1] > 0.0)


def _written_anew(pair: _Pair, fit: SurfaceFit, values: Floats, targets: Floats) -> SurfaceFit:
    """Return a surface over overdrives as one over the conditions themselves.

    What the new surface misses at the tabulated conditions is fitted on top.
    """
    levels = [np.linspace(v.min(), v.max(), _STEPS) for v in values.T]
    at = np.concatenate([values, np.array(list(itertools.product(*levels)))])
    weight = np.where(np.arange(len(at)) < len(values), _SITE_WEIGHT, 1.0)[:, None]
    wanted = weight * design(fit.form, pair.seen(at))
    form = _closest_form(values, at, weight, wanted @ fit.coefficients)
    renamed, *_ = np.linalg.lstsq(weight * design(form, at), wanted, rcond=None)
    plain = design(form, values)
    first = renamed @ fit.covariance @ design(fit.form, pair.seen(values)).T
    rest = ridge_map(form, plain)
    from_targets = first + rest @ (np.eye(len(values)) - plain @ first)
    return replace(
        fit,
        form=form,
        coefficients=from_targets @ targets,
        covariance=renamed @ fit.covariance @ renamed.T,
        leverage=from_targets @ from_targets.T,
    )


def _closest_form(values: Floats, at: Floats, weight: Floats, wanted: Floats) -> Form:
    """Return the form of enough powers that follows a surface best."""
    powers = {name: _POWERS[name] for name in axis_powers(values)}
    every = itertools.product(*(range(power + 1) for power in powers.values()))
    exponents = tuple(term for term in every if sum(term) <= _HIGHEST_ORDER)
    forms = [
        Form(axes=axes_of(values, dict(zip(powers, shapes, strict=True))), exponents=exponents)
        for shapes in itertools.product(AXIS_SHAPES[:3], repeat=len(powers))
    ]
    return min(forms, key=lambda form: _missed(weight * design(form, at), wanted))


def _missed(terms: Floats, wanted: Floats) -> float:
    coefficients, *_ = np.linalg.lstsq(terms, wanted, rcond=None)
    return float(((terms @ coefficients - wanted) ** 2).sum())
