"""S-curves for tests: one table, or many simulated from a known law."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt
from scipy.special import ndtr

from behavgen.fit.s_curve import SCurveFits, fit_s_curves
from behavgen.fit.s_curve_identification import Reason


def fit_one(
    vdiff_v: npt.ArrayLike, trials: npt.ArrayLike, ones: npt.ArrayLike, level: float = 0.95
) -> SCurveFits:
    vdiff_v = np.asarray(vdiff_v, dtype=float)
    counts = np.broadcast_to(trials, vdiff_v.shape)
    return fit_s_curves(vdiff_v, counts, ones, np.zeros(vdiff_v.size, int), level=level)


def simulate(
    z: np.ndarray, trials: int, curves: int, seed: int, share: object = ndtr
) -> tuple[SCurveFits, np.ndarray]:
    """Fit curves with offset 0 and sigma 1 measured at levels `z`; also return the ones."""
    rng = np.random.default_rng(seed)
    ones = rng.binomial(trials, share(z), (curves, z.size))
    curve = np.repeat(np.arange(curves), z.size)
    counts = np.full(curve.size, trials)
    return fit_s_curves(np.tile(z, curves), counts, ones.ravel(), curve), ones


def reason_of(fits: SCurveFits, curve: int = 0) -> Reason:
    return Reason(fits.identification.reason[curve])
