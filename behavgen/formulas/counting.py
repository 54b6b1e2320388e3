"""Exact tests on counts."""

from __future__ import annotations

from math import lgamma

import numpy as np
import numpy.typing as npt

__all__ = ["fisher_exact_p"]

Floats = npt.NDArray[np.float64]

_TIES = 1e-7
"""Relative difference below which two probabilities count as equal."""


def fisher_exact_p(ones_a: int, trials_a: int, ones_b: int, trials_b: int) -> float:
    """Return the two-sided p-value for two counts having the same probability.

    Fisher's exact test: given the sum of ones, the split between both is
    hypergeometric; splits that are no more probable than the observed one count
    (R. A. Fisher, Journal of the Royal Statistical Society 85, 1922, 87-94).

    Parameters
    ----------
    ones_a, trials_a, ones_b, trials_b : int
    """
    total = ones_a + ones_b
    split = np.arange(max(0, total - trials_b), min(total, trials_a) + 1)
    log_p = _log_choose(trials_a, split) + _log_choose(trials_b, total - split)
    p = np.exp(log_p - log_p.max())
    observed = p[ones_a - split[0]]
    return float(p[p <= observed * (1.0 + _TIES)].sum() / p.sum())


def _log_choose(n: int, k: npt.NDArray[np.int64]) -> Floats:
    return np.array([lgamma(n + 1) - lgamma(i + 1) - lgamma(n - i + 1) for i in k.tolist()])
