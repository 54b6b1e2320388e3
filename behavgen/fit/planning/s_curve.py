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

__all__ = ["KnownSCurve", "PlannedSCurve", "fewest_decisions", "plan_s_curve"]

Floats = npt.NDArray[np.float64]

WIDEST_GUESS = 0.5
"""Standard errors of offset, in sigmas, and of ln sigma, beyond which no levels can be placed."""

_LEAST_TRIALS = 50
"""At fewer decisions a level the arithmetic of large samples fails."""

_INNER_Z = np.arange(0.1, 1.35, 0.1)
_OUTER_Z = np.arange(0.8, 2.45, 0.1)
_LEAST_APART_Z = 0.65
"""Levels closer together than this cannot tell one shape of the curve from another."""

_PRIOR_NODES = 7


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
    def can_be_planned(self) -> bool:
        """Whether levels can be placed without finding the trip point first."""
        return max(self.offset_error_v / self.sigma_v, self.sigma_error) <= WIDEST_GUESS


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
    fewest_decisions : int or None
        What two levels would need if offset and sigma were known already; None
        where rows already measured count too.
    level : float
        Confidence, 0..1.
    """

    levels_v: tuple[float, ...]
    trials: tuple[int, ...]
    offset_half_v: float
    sigma_half: float
    fewest_decisions: int | None
    level: float

    @property
    def decisions(self) -> int:
        """In total."""
        return sum(self.trials)

    @property
    def price(self) -> float | None:
        """Decisions over the fewest possible."""
        return self.decisions / self.fewest_decisions if self.fewest_decisions else None


def fewest_decisions(
    sigma_v: float,
    *,
    sigma_within: float = inf,
    offset_within_v: float = inf,
    level: float = 0.95,
) -> int:
    """Return how many decisions no measurement of this precision can do without.

    ``N var(sigma) >= 1.6436 sigma^2`` and ``N var(offset) >= (pi/2) sigma^2``: maxima of
    `decision_information` at ``|z| = 1.575`` and ``z = 0``. For both together two levels
    ``+-z`` between these are best, since information on sigma against information on
    the offset is a concave curve there (derived).

    Parameters
    ----------
    sigma_v : float
        V.
    sigma_within : float
        Wanted half width of sigma's interval, relative.
    offset_within_v : float
        Wanted half width of the offset's interval, V.
    level : float
        Confidence, 0..1.
    """
    z = np.linspace(0.0, Z_BEST_FOR_SIGMA, 2001)
    information = decision_information(z)
    quantile = normal_quantile(level)
    offset_need = (quantile * sigma_v / offset_within_v) ** 2 / information[:, 0, 0]
    with np.errstate(divide="ignore", invalid="ignore"):
        sigma_need = (quantile / sigma_within) ** 2 / information[:, 1, 1]
    needed = np.fmax(offset_need, 0.0 if sigma_within == inf else sigma_need)
    return max(ceil(float(needed.min())), 1)


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
        It can be planned: see `KnownSCurve.can_be_planned`.
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
    if known.measured and (_halves(_measured(known), known, level) <= wanted).all():
        return None
    z = _placed(known, wanted, level)
    digits = 1 - floor(log10(known.sigma_v))
    levels_v = np.round(known.offset_v + np.array(z) * known.sigma_v, digits)
    per_trial = _information(levels_v[None], known)[0] * len(levels_v)

    def halves(trials: int) -> Floats:
        return _halves(_measured(known) + trials * per_trial, known, level)

    least = fewest(lambda n: bool((halves(n) <= wanted).all()), start=_LEAST_TRIALS)
    trials = _rounded_up(least if least is not None else MOST)
    offset_half_v, sigma_half = (float(half) for half in halves(trials))
    needed = fewest_decisions(
        known.sigma_v, sigma_within=sigma_within, offset_within_v=offset_within_v, level=level
    )
    return PlannedSCurve(
        levels_v=tuple(float(v) for v in levels_v),
        trials=(trials,) * len(levels_v),
        offset_half_v=offset_half_v,
        sigma_half=sigma_half,
        fewest_decisions=None if known.measured else needed,
        level=level,
    )


def _placed(known: KnownSCurve, wanted: Floats, level: float) -> tuple[float, ...]:
    """Return the four levels, in sigmas from the offset, that need the fewest decisions."""
    inner, outer = np.meshgrid(_INNER_Z, _OUTER_Z, indexing="ij")
    apart = outer - inner > _LEAST_APART_Z
    inner, outer = inner[apart], outer[apart]
    z = np.stack([-outer, -inner, inner, outer], axis=-1)
    per_decision = _information(known.offset_v + z * known.sigma_v, known)
    measured = _measured(known)
    low, high = np.zeros(len(z)), np.full(len(z), 2.0 * np.log(MOST))
    for _ in range(40):
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
    mean = decision_information(z).mean(axis=-3)
    return mean * scale[:, :, None] * scale[:, None, :]


def _measured(known: KnownSCurve) -> Floats:
    """Return what the rows already measured tell, shape (2, 2)."""
    if not known.measured:
        return np.zeros((2, 2))
    return np.diag([(known.sigma_v / known.offset_error_v) ** 2, 1.0 / known.sigma_error**2])


def _halves(information: Floats, known: KnownSCurve, level: float) -> Floats:
    """Return mean half widths of offset, V, and sigma, relative; shape (..., 2)."""
    weights = _prior(known)[2] if information.ndim > 2 else np.ones(1)
    i = information if information.ndim > 2 else information[None]
    determinant = i[..., 0, 0] * i[..., 1, 1] - i[..., 0, 1] * i[..., 1, 0]
    variances = np.stack([i[..., 1, 1], i[..., 0, 0]], axis=-1)
    variances = variances / np.maximum(determinant, np.finfo(float).tiny)[..., None]
    reach = normal_quantile(level) * np.einsum("...qk,q->...k", np.sqrt(variances), weights)
    return reach * np.array([known.sigma_v, 1.0])


def _rounded_up(count: int) -> int:
    """Round up to three digits, so that a plan reads well."""
    step = 10 ** max(len(str(count)) - 3, 0)
    return -(-count // step) * step
