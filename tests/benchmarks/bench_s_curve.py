"""What fitting many S-curves at once gains over a loop with a general package.

Prints times per curve and their ratio, medians of runs taken in turn; fails
below the bound. Run it as a script.
"""

from __future__ import annotations

import statistics
import sys
import time
from collections.abc import Callable
from pathlib import Path

import numpy as np
import statsmodels.api as sm
from scipy.special import ndtr

sys.path.insert(0, str(Path(__file__).parents[2]))

from behavgen.fit.s_curve import fit_s_curves
from behavgen.fit.s_curve_identification import identify
from behavgen.fit.s_curve_likelihood import Rows, maximise

CURVES, LEVELS, TRIALS = 2000, 7, 200
LOOPED = 60
RUNS = 9
BOUND = 300.0


def example(curves: int) -> tuple[np.ndarray, ...]:
    """Return rows of invented S-curves: levels, trials, ones, curve."""
    rng = np.random.default_rng(2000)
    offset_v, sigma_v = rng.normal(0.0, 2e-3, curves), rng.uniform(3e-4, 1e-3, curves)
    z = np.linspace(-1.2e-3, 1.2e-3, LEVELS) / sigma_v[:, None]
    vdiff_v = offset_v[:, None] + z * sigma_v[:, None]
    trials = np.full(vdiff_v.shape, TRIALS)
    curve = np.repeat(np.arange(curves), LEVELS)
    return vdiff_v.ravel(), trials.ravel(), rng.binomial(trials, ndtr(z)).ravel(), curve


def per_curve_s(work: Callable[[], object], curves: int) -> float:
    """Return the time of one run over the number of curves, s."""
    start = time.perf_counter()
    work()
    return (time.perf_counter() - start) / curves


def loop(vdiff_v: np.ndarray, trials: np.ndarray, ones: np.ndarray) -> None:
    """Fit the first curves one by one: generalised linear model, probit link."""
    family = sm.families.Binomial(link=sm.families.links.Probit())
    for i in range(LOOPED):
        rows = slice(i * LEVELS, (i + 1) * LEVELS)
        counts = np.column_stack([ones[rows], trials[rows] - ones[rows]])
        sm.GLM(counts, sm.add_constant(vdiff_v[rows]), family=family).fit()


def main() -> None:
    """Measure, print, judge."""
    vdiff_v, trials, ones, curve = example(CURVES)
    rows = Rows(
        vdiff_v=vdiff_v,
        ones=ones.astype(float),
        zeros=(trials - ones).astype(float),
        curve=curve,
        curves=CURVES,
    )
    works: dict[str, tuple[Callable[[], object], int]] = {
        "loop": (lambda: loop(vdiff_v, trials, ones), LOOPED),
        "identify": (lambda: identify(rows), CURVES),
        "maximise": (lambda: maximise(rows), CURVES),
        "all": (lambda: fit_s_curves(vdiff_v, trials, ones, curve), CURVES),
    }
    times = [{name: per_curve_s(*work) for name, work in works.items()} for _ in range(RUNS)]
    median = {name: statistics.median(run[name] for run in times) for name in works}
    fit_s = median["identify"] + median["maximise"]
    print(f"{CURVES} curves of {LEVELS} levels, {TRIALS} decisions each; us a curve")
    print(f"  loop over a general package, estimates   {1e6 * median['loop']:9.1f}")
    print(f"  identification and estimates             {1e6 * fit_s:9.2f}")
    print(f"  intervals and goodness of fit            {1e6 * (median['all'] - fit_s):9.2f}")
    ratio = median["loop"] / fit_s
    print(f"ratio of estimates {ratio:.0f}, with intervals {median['loop'] / median['all']:.0f}")
    if ratio < BOUND:
        sys.exit(f"slower than {BOUND:.0f} times the loop")


if __name__ == "__main__":
    main()
