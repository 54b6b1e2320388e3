"""What a simulated converter showed, beside what a closed form says it must show."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

__all__ = ["FALSE_ALARM", "SIGMAS", "Experiment", "mean_interval", "share_interval"]

Floats = npt.NDArray[np.float64]

SIGMAS = 4.0
"""Half-width of every interval in standard errors."""
FALSE_ALARM = 6.3e-5
"""Probability that chance alone puts an expectation outside its interval: 4 sigmas, two-sided."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Experiment:
    """One sweep.

    Parameters
    ----------
    name, title : str
        The name is a word for files and anchors.
    x_label, x_unit, y_label, y_unit : str
    x, measured, low, high, expected : ndarray, shape (N,)
        What was counted with its interval, and the closed form at the same places.
    law_x, law_y : ndarray
        The closed form as a curve.
    law : str
        The closed form in words, with its source.
    trials : str
        What was counted, in words.
    logarithmic : bool
        Whether the y axis is.
    """

    name: str
    title: str
    x_label: str
    x_unit: str
    y_label: str
    y_unit: str
    x: Floats
    measured: Floats
    low: Floats
    high: Floats
    expected: Floats
    law_x: Floats
    law_y: Floats
    law: str
    trials: str
    logarithmic: bool = False

    @property
    def agrees(self) -> bool:
        """Whether every expectation lies in its interval."""
        return bool(np.all((self.low <= self.expected) & (self.expected <= self.high)))


def mean_interval(samples: Floats) -> tuple[float, float, float]:
    """Return the mean of samples and its interval by the central limit theorem."""
    mean = float(samples.mean())
    error = SIGMAS * float(samples.std(ddof=1)) / np.sqrt(len(samples))
    return mean, mean - error, mean + error


def share_interval(hits: int, trials: int) -> tuple[float, float, float]:
    """Return a share and its exact interval (C. J. Clopper, E. S. Pearson, Biometrika 1934)."""
    from scipy.stats import beta  # noqa: PLC0415

    low = 0.0 if hits == 0 else float(beta.ppf(FALSE_ALARM / 2, hits, trials - hits + 1))
    high = 1.0 if hits == trials else float(beta.isf(FALSE_ALARM / 2, hits + 1, trials - hits))
    return hits / trials, low, high
