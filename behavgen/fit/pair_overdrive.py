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

from behavgen.fit.headroom import Headroom, headroom_of
from behavgen.fit.surface_changes import ridge_map
from behavgen.fit.surface_forms import Form, axes_of, axis_powers, design
from behavgen.fit.surfaces import SurfaceFit, choose_by_left_out, left_out_cost
from behavgen.fit.two_temperatures import Overdrives, overdrive_views
from behavgen.formulas.polynomial import AXIS_SHAPES

__all__ = ["choose_through_pair"]

Floats = npt.NDArray[np.float64]

_TEMPERATURE, _SUPPLY, _COMMON = range(3)
_DRIFT_V_PER_K = 0.7e-3
"""By how much a threshold falls (common practice: 0.5 to 1 mV/K)."""
_REFERENCE_K = 300.0
_THRESHOLD_SHARES = {2: (0.0, 0.2, 0.3, 0.4, 0.5, 0.6), 3: (0.4,)}
"""Candidates for the threshold at 300 K, as shares of the lowest common mode, by the number
of common modes: three tell their own bend and little hangs on the threshold."""
_LEAST_OVERDRIVE_V = 0.04
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
    common_modes : int
        Levels in the table.
    highest_order : int or None
        Highest total power of a term.
    """

    below_supply: bool
    threshold_v: float
    drift_v_per_k: float
    common_modes: int
    highest_order: int | None = None

    @property
    def powers(self) -> dict[str, int]:
        """Highest powers: what bends, bends with the overdrive."""
        if self.below_supply:
            return {"vdd_v": 1, "vcm_v": 2}
        return {"vcm_v": 1} if self.common_modes == 2 else {}

    @property
    def clearly_better(self) -> float:
        """Left-out errors of the plain surface over those of this one from which on it is taken.

        Two common modes have `headroom` to beat; of more, nothing else tells how delays rise
        towards the supply.
        """
        if self.common_modes == 2:
            return 2.5
        return 1.1 if self.below_supply else 1.0

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
    plain = _over_conditions(values, targets, metric, expected_shapes)
    shapes = {**expected_shapes, "vcm_v": "reciprocal_square"}
    views: list[Overdrives | _Pair] = [*overdrive_views(values, targets)]
    views = views or [*_pairs(values, targets)]
    trials = [
        choose_by_left_out(
            view.seen(values), targets, metric, shapes, view.powers, view.highest_order
        )
        for view in views
    ]
    if not trials:
        return plain
    costs = np.array([left_out_cost(fit, metric) for fit in trials])
    if costs.min() * views[0].clearly_better > left_out_cost(plain, metric):
        return plain
    good = int(np.flatnonzero(costs <= costs.min() * _AS_GOOD)[0])
    return _written_anew(views[good], trials[good], values, targets)


def _over_conditions(
    values: Floats, targets: Floats, metric: Floats, expected_shapes: Mapping[str, str]
) -> SurfaceFit:
    """Choose without an overdrive; two common modes take their bend from the supplies."""
    view = headroom_of(values, targets, metric)
    if view is None:
        return choose_by_left_out(values, targets, metric, expected_shapes)
    shapes = {**expected_shapes, "vcm_v": "plain"}
    fit = choose_by_left_out(view.seen(values), targets, metric, shapes, view.powers)
    return _written_anew(view, fit, values, targets)


def _pairs(values: Floats, targets: Floats) -> Iterator[_Pair]:
    """Return the pairs that a table may tell of."""
    levels = [0 if np.isnan(v).any() else len(np.unique(v)) for v in values.T]
    if levels[_COMMON] < 2:
        return
    if levels[_SUPPLY] > 1 and _rises(values, targets):
        if (values[:, _SUPPLY] - values[:, _COMMON]).min() >= _LEAST_OVERDRIVE_V:
            yield _Pair(below_supply=True, threshold_v=0.0, drift_v_per_k=0.0,
                        common_modes=levels[_COMMON])  # fmt: skip
    elif levels[_TEMPERATURE] > 2:
        lowest = float(values[:, _COMMON].min())
        cold = _DRIFT_V_PER_K * (_REFERENCE_K - float(values[:, _TEMPERATURE].min()))
        for share in _THRESHOLD_SHARES[min(levels[_COMMON], 3)]:
            if lowest * (1.0 - share) - cold >= _LEAST_OVERDRIVE_V:
                yield _Pair(below_supply=False, threshold_v=lowest * share,
                            drift_v_per_k=_DRIFT_V_PER_K,
                            common_modes=levels[_COMMON])  # fmt: skip


def _rises(values: Floats, targets: Floats) -> bool:
    """Return whether delays rise with the common mode where they are longest.

    That is at the lowest supply among the conditions that differ in the common mode alone.
    """
    slowness = targets.mean(axis=-1)
    lowest = values[:, _SUPPLY] == values[:, _SUPPLY].min()
    common = values[lowest, _COMMON]
    return bool(np.ptp(common) > 0.0 and np.cov(common, slowness[lowest])[0, 1] > 0.0)


def _written_anew(
    view: _Pair | Overdrives | Headroom, fit: SurfaceFit, values: Floats, targets: Floats
) -> SurfaceFit:
    """Return a surface over overdrives as one over the conditions themselves.

    What the new surface misses at the tabulated conditions is fitted on top.
    """
    levels = [np.linspace(v.min(), v.max(), _STEPS) for v in values.T]
    at = np.concatenate([values, np.array(list(itertools.product(*levels)))])
    weight = np.where(np.arange(len(at)) < len(values), _SITE_WEIGHT, 1.0)[:, None]
    wanted = weight * design(fit.form, view.seen(at))
    form = _closest_form(values, at, weight, wanted @ fit.coefficients)
    renamed, *_ = np.linalg.lstsq(weight * design(form, at), wanted, rcond=None)
    plain = design(form, values)
    first = renamed @ fit.covariance @ design(fit.form, view.seen(values)).T
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
