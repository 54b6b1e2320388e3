"""Two common modes, where a straight line between them is all they tell by themselves.

How delays bend between the two, the supplies tell. A common mode that rises takes
headroom from the latch above the pair, or drives a p-channel pair less: much as if a
share of the rise were taken off the supply. With ``delay = f(supply - share common) +
g(common)``, in logarithms, the share follows from how the common mode's influence
changes from supply to supply, and with it the bend of f, which several supplies show.
What remains, g, is the input pair's current, for which a power law is taken.
"""

from __future__ import annotations

import itertools
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import CONDITION_NAMES
from behavgen.fit.surface_changes import prior_spread
from behavgen.fit.surface_forms import Form, axes_of, axis_powers, design
from behavgen.fit.surfaces import smoothers

__all__ = ["Headroom", "headroom_of"]

Floats = npt.NDArray[np.float64]

_SUPPLY, _COMMON = (CONDITION_NAMES.index(name) for name in ("vdd_v", "vcm_v"))
_POWERS = {"n": -3.0, "p": -1.5}
"""Of the common mode, to which the pair's share of a delay's logarithm is taken as proportional.
Of ten invented circuits, n-channel pairs had their best between -2 and -4, p-channel ones, whose
overdrive counts from the supply and so is in the headroom already, between 0 and -2."""
_P_CHANNEL_BELOW = 0.5
"""Common mode over supply: a pair needs its overdrive, so that n-channel ones are not used nearer
to ground than to the supply (common practice)."""
_SHARES = np.linspace(0.0, 1.0, 9)
_SHARPNESS = 4.0
"""Shares are averaged with their cost to the power -4: tables that differ little get surfaces
that differ little."""
_NO_COST = 1e-9
_NEGLIGIBLE_SHARE = 0.02
_SHAPES = ("plain", "reciprocal", "reciprocal_square")
"""How delays may bend with the headroom."""
_LEAST_V = 0.05
_HIGHEST_ORDER = 3


@dataclass(frozen=True, slots=True, kw_only=True)
class Headroom:
    """Supplies less a share of the common mode.

    Parameters
    ----------
    share : float
    power : float
        Of the common mode in the pair's law.
    """

    share: float
    power: float

    @property
    def powers(self) -> dict[str, int]:
        """Highest powers of a term."""
        return {"vdd_v": 2, "vcm_v": 1}

    def seen(self, values: Floats) -> Floats:
        """Return conditions with the headroom for the supply and the pair's law."""
        seen = _with_headroom(values, self.share)
        seen[:, _COMMON] = values[:, _COMMON] ** self.power
        return seen


def headroom_of(values: Floats, targets: Floats, metric: Floats) -> Headroom | None:
    """Return the headroom that a table of two common modes tells of; None where there is none.

    Parameters
    ----------
    values : ndarray, shape (C, 3)
    targets : ndarray, shape (C, L)
        Logarithms of delays.
    metric : ndarray, shape (C, L, L)
        An error `d` at a condition costs ``sqrt(d @ metric @ d)``.
    """
    levels = [0 if np.isnan(v).any() else len(np.unique(v)) for v in values.T]
    if levels[_COMMON] != 2 or levels[_SUPPLY] < 3 or values[:, _COMMON].min() < _LEAST_V:
        return None
    supplies = [values[values[:, _COMMON] == v, _SUPPLY] for v in np.unique(values[:, _COMMON])]
    if min(np.ptp(supply) for supply in supplies) == 0.0:
        return None  # nothing shows how the common mode's influence changes
    shares = np.array(
        [s for s in _SHARES if _with_headroom(values, s)[:, _SUPPLY].min() >= _LEAST_V]
    )
    if len(shares) < 2:
        return None
    costs = np.array([_missed_apart(_with_headroom(values, s), targets, metric) for s in shares])
    costs = np.maximum(costs, _NO_COST)
    share = float(np.average(shares, weights=(costs / costs.min()) ** -_SHARPNESS))
    if share <= _NEGLIGIBLE_SHARE:
        return None
    is_low = values[:, _COMMON].mean() < _P_CHANNEL_BELOW * values[:, _SUPPLY].mean()
    return Headroom(share=share, power=_POWERS["p" if is_low else "n"])


def _with_headroom(values: Floats, share: float) -> Floats:
    seen = values.copy()
    seen[:, _SUPPLY] -= share * values[:, _COMMON]
    return seen


def _missed_apart(seen: Floats, targets: Floats, metric: Floats) -> float:
    """Return the least mean cost of what surfaces without terms of both supply and pair miss."""
    powers = {name: min(power, 2) for name, power in axis_powers(seen).items()}
    supply, common = (list(powers).index(name) for name in ("vdd_v", "vcm_v"))
    every = itertools.product(*(range(power + 1) for power in powers.values()))
    apart = [term for term in every if sum(term) <= _HIGHEST_ORDER]
    exponents = tuple(term for term in apart if not (term[supply] and term[common]))
    plain = dict.fromkeys(powers, "plain")
    forms = [
        Form(axes=axes_of(seen, {**plain, "vdd_v": shape}), exponents=exponents)
        for shape in _SHAPES
    ]
    scaled = np.array([design(form, seen) * prior_spread(form) for form in forms])
    _, residual = smoothers(scaled, targets - targets.mean(axis=0))
    squared = np.einsum("bcl,clm,bcm->bc", residual, metric, residual, optimize=True)
    return float(np.sqrt(np.maximum(squared, 0.0)).mean(axis=-1).min())
