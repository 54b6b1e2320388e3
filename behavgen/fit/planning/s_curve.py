"""Which input levels, and how many decisions at each, for an S-curve of wanted precision.

One decision at ``z = (vdiff - offset) / sigma`` tells ``w / sigma^2 [[1, z], [z, z^2]]``
of offset and sigma (`formulas.noise.decision_information`). The fewest decisions
lie at two levels, placed by an offset and a sigma that nobody knows yet. A plan
spends a little more: four levels, so that whether the noise is Gaussian can be
judged, placed where they tell most on the average over what is not known.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, floor, inf, log10

import numpy as np
import numpy.typing as npt

from behavgen.fit.intervals import normal_quantile
from behavgen.fit.planning.fewest import MOST, fewest
from behavgen.formulas.noise import Z_BEST_FOR_SIGMA, decision_information

__all__ = ["KnownSCurve", "PlannedSCurve", "expected_halves", "fewest_decisions", "plan_s_curve"]

Floats = npt.NDArray[np.float64]

_WIDEST_OFFSET_Z = 0.5
_WIDEST_SIGMA = 0.35
"""Standard errors of offset, in sigmas, and of ln sigma, beyond which levels tell too little."""

_LEAST_TRIALS = 100
"""At fewer decisions a level the arithmetic of large samples fails."""

_INNER_Z = np.arange(0.1, 1.35, 0.1)
_OUTER_Z = np.arange(0.8, 2.45, 0.1)
_LEAST_APART_Z = 0.65
"""Levels closer together than this cannot tell one shape of the curve from another."""

_PRIOR_NODES = 7
_BISECTIONS = 20


@dataclass(frozen=True, slots=True, kw_only=True)
class KnownSCurve:
    """What is known of offset and sigma before the measurement.

    Parameters
    ----------
    offset_v, sigma_v : float
        V.
    offset_error_v : float
        Standard error of the offset, V.
    sigma_error : float
        Standard error of ln sigma.
    measured : bool
        The errors are those of rows that stay in the table, so that what they
        tell adds to what is planned.
    """

    offset_v: float
    sigma_v: float
    offset_error_v: float
    sigma_error: float
    measured: bool = False

    @property
    def can_place_levels(self) -> bool:
        """Whether levels can be placed without looking for the trip point first."""
        near = self.offset_error_v <= _WIDEST_OFFSET_Z * self.sigma_v
        return near and self.sigma_error <= _WIDEST_SIGMA


@dataclass(frozen=True, slots=True, kw_only=True)
class PlannedSCurve:
    """Levels to measure, and the intervals this promises.

    Parameters
    ----------
    levels_v : tuple of float
        Rising, V.
    trials : tuple of int
        Decisions at each level.
    offset_half_v, sigma_half : float
        Half widths of the intervals of the offset, V, and of sigma, relative to
        it, with all rows; means over what is not known now.
    fewest_decisions : int
        What two levels would need if offset and sigma were known beforehand.
    level : float
        Confidence, 0..1.
    """

    levels_v: tuple[float, ...]
    trials: tuple[int, ...]
    offset_half_v: float
    sigma_half: float
    fewest_decisions: int
    level: float

    @property
    def decisions(self) -> int:
        """In total."""
        return sum(self.trials)


def fewest_decisions(
    sigma_v: float,
    *,
    sigma_within: float = inf,
    offset_within_v: float = inf,
    offset_error_v: float = inf,
    sigma_error: float = inf,
    level: float = 0.95,
) -> int:
    """Return how many decisions no measurement of this precision can do without.

    ``N var(sigma) >= 1.6436 sigma^2`` and ``N var(offset) >= (pi/2) sigma^2``: maxima of
    `decision_information` at ``|z| = 1.575`` and ``z = 0``. For both together two levels
    ``+-z`` between these are best, since there information on sigma is a concave
    function of information on the offset (derived).

    Parameters
    ----------
    sigma_v : float
        V.
    sigma_within : float
        Wanted half width of sigma's interval, relative.
    offset_within_v : float
        Wanted half width of the offset's interval, V.
    offset_error_v, sigma_error : float
        Standard errors of the offset, V, and of ln sigma, from rows measured already.
    level : float
        Confidence, 0..1.
    """
    information = decision_information(np.linspace(0.0, Z_BEST_FOR_SIGMA, 2001))
    quantile = normal_quantile(level)
    offset_need = (quantile * sigma_v / offset_within_v) ** 2 - (sigma_v / offset_error_v) ** 2
    sigma_need = (quantile / sigma_within) ** 2 - sigma_error**-2
    needed = np.maximum(offset_need, 0.0) / information[:, 0, 0]
    if sigma_need > 0.0:
        with np.errstate(divide="ignore"):
            needed = np.maximum(needed, sigma_need / information[:, 1, 1])
    return ceil(float(needed.min()))


def plan_s_curve(
    known: KnownSCurve,
    *,
    sigma_within: float = inf,
    offset_within_v: float = inf,
    level: float = 0.95,
) -> PlannedSCurve | None:
    """Return the levels that reach the wanted intervals with the fewest decisions.

    Parameters
    ----------
    known : KnownSCurve
        Well enough to place levels, see `KnownSCurve.can_place_levels`; else
        `find_trip_point` comes first.
    sigma_within : float
        Wanted half width of sigma's interval, relative.
    offset_within_v : float
        Wanted half width of the offset's interval, V.
    level : float
        Confidence, 0..1.

    Returns
    -------
    PlannedSCurve or None
        None when the rows already measured reach both.
    """
    wanted = np.array([offset_within_v, sigma_within])
    measured = _measured(known)
    if known.measured and (_halves(measured, known, level) <= wanted).all():
        return None
    digits = 1 - floor(log10(known.sigma_v))
    z = _placed(known, wanted, level)
    levels_v = np.round(known.offset_v + np.array(z) * known.sigma_v, digits)
    per_trial = len(levels_v) * _information(levels_v[None], known)

    def halves(trials: int) -> Floats:
        return _halves(measured + trials * per_trial, known, level)[0]

    least = fewest(lambda n: bool((halves(n) <= wanted).all()), start=_LEAST_TRIALS)
    trials = _rounded_up(MOST if least is None else least)
    offset_half_v, sigma_half = (float(half) for half in halves(trials))
    return PlannedSCurve(
        levels_v=tuple(float(v) for v in levels_v),
        trials=(trials,) * len(levels_v),
        offset_half_v=offset_half_v,
        sigma_half=sigma_half,
        fewest_decisions=fewest_decisions(
            known.sigma_v,
            sigma_within=sigma_within,
            offset_within_v=offset_within_v,
            offset_error_v=known.offset_error_v if known.measured else inf,
            sigma_error=known.sigma_error if known.measured else inf,
            level=level,
        ),
        level=level,
    )


def expected_halves(
    known: KnownSCurve, levels_v: npt.ArrayLike, trials: int, level: float = 0.95
) -> tuple[float, float]:
    """Return the half widths to expect of given levels: of the offset, V, and of sigma, relative.

    Parameters
    ----------
    known : KnownSCurve
    levels_v : array_like, shape (L,)
        V.
    trials : int
        Decisions at each level.
    level : float
        Confidence, 0..1.
    """
    levels_v = np.asarray(levels_v, dtype=float)
    information = trials * len(levels_v) * _information(levels_v[None], known)
    offset_half_v, sigma_half = _halves(_measured(known) + information, known, level)[0]
    return float(offset_half_v), float(sigma_half)


def _placed(known: KnownSCurve, wanted: Floats, level: float) -> tuple[float, ...]:
    """Return the four levels, in sigmas from the offset, that need the fewest decisions."""
    inner, outer = np.meshgrid(_INNER_Z, _OUTER_Z, indexing="ij")
    apart = outer - inner > _LEAST_APART_Z
    inner, outer = inner[apart], outer[apart]
    z = np.stack([-outer, -inner, inner, outer], axis=-1)
    per_decision = _information(known.offset_v + z * known.sigma_v, known)
    measured = _measured(known)
    low, high = np.zeros(len(z)), np.full(len(z), np.log(MOST))
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        information = measured + np.exp(middle)[:, None, None, None] * per_decision
        enough = (_halves(information, known, level) <= wanted).all(axis=-1)
        low, high = np.where(enough, low, middle), np.where(enough, middle, high)
    return tuple(float(v) for v in z[np.argmin(high)])


def _prior(known: KnownSCurve) -> tuple[Floats, Floats, Floats]:
    """Return offsets in V, sigmas in V and weights of the values that may be true, shape (Q,)."""
    node, weight = np.polynomial.hermite_e.hermegauss(_PRIOR_NODES)
    offset_v, sigma_v = np.meshgrid(
        known.offset_v + node * known.offset_error_v,
        known.sigma_v * np.exp(node * known.sigma_error),
    )
    weights = np.outer(weight, weight).ravel() / weight.sum() ** 2
    return offset_v.ravel(), sigma_v.ravel(), weights


def _information(levels_v: Floats, known: KnownSCurve) -> Floats:
    """Return what one decision tells of (offset in known sigmas, ln sigma) at every prior value.

    Parameters
    ----------
    levels_v : ndarray, shape (D, L)
        The decision falls on each level alike.

    Returns
    -------
    ndarray, shape (D, Q, 2, 2)
    """
    offset_v, sigma_v, _ = _prior(known)
    z = (levels_v[:, None, :] - offset_v[:, None]) / sigma_v[:, None]
    scale = np.stack([known.sigma_v / sigma_v, np.ones_like(sigma_v)], axis=-1)
    mean: Floats = decision_information(z).mean(axis=-3)
    return mean * scale[:, :, None] * scale[:, None, :]


def _measured(known: KnownSCurve) -> Floats:
    """Return what the rows already measured tell at every prior value, shape (1, Q, 2, 2)."""
    told = np.zeros(2)
    if known.measured:
        told = np.array([known.sigma_v / known.offset_error_v, 1.0 / known.sigma_error]) ** 2
    return np.broadcast_to(np.diag(told), (1, _PRIOR_NODES**2, 2, 2))


def _halves(information: Floats, known: KnownSCurve, level: float) -> Floats:
    """Return mean half widths of offset, V, and sigma, relative; shape (D, 2)."""
    i = information
    determinant = i[..., 0, 0] * i[..., 1, 1] - i[..., 0, 1] * i[..., 1, 0]
    variances = np.full(i.shape[:-1], np.inf)
    told = np.stack([i[..., 1, 1], i[..., 0, 0]], axis=-1)
    np.divide(told, determinant[..., None], out=variances, where=determinant[..., None] > 1e-300)
    mean: Floats = np.einsum("dqk,q->dk", np.sqrt(variances), _prior(known)[2])
    return normal_quantile(level) * mean * np.array([known.sigma_v, 1.0])


def _rounded_up(count: int) -> int:
    """Round up to three digits, so that a plan reads well."""
    step: int = 10 ** max(len(str(count)) - 3, 0)
    return -(-count // step) * step
