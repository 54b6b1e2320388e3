"""Intervals of error probabilities cover the truth as often as they say."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.special import ndtr

from behavgen.applied_inputs import Levels
from behavgen.fit.fit import fit
from behavgen.prediction import predict
from behavgen.project import CellSettings
from behavgen.tables.characterisation import Characterisation, Conditions, NoiseTable

OFFSET_V, SIGMA_V = 0.3e-3, 1e-3
LEVELS_V = np.linspace(-2e-3, 2e-3, 9)
TRIALS = 400
REPLICATES = 2000


def settings() -> CellSettings:
    return CellSettings(
        name="made_up", description="", decides_on="rising", in_reset="high", when_unresolved="x",
        process_codes={}, reset_delay_s=None, supply_off_v=None, time_precision="1fs", pins={},
        tables=(),
    )  # fmt: skip


def nowhere(count: int) -> Conditions:
    nothing = np.full(count, np.nan)
    return Conditions(
        vdd_v=nothing, temperature_k=nothing, vcm_v=nothing, process=np.full(count, "")
    )


def measured(rng: np.random.Generator) -> Characterisation:
    """Return the counts of an S-curve that a comparator of known trip point and noise gave."""
    count, none = len(LEVELS_V), np.empty(0)
    ones = rng.binomial(TRIALS, ndtr((LEVELS_V - OFFSET_V) / SIGMA_V))
    table = NoiseTable(
        conditions=nowhere(count), instance=np.full(count, ""), vdiff_v=LEVELS_V,
        trials=np.full(count, TRIALS), ones=ones, sigma_conditions=nowhere(0),
        sigma_v=none, sigma_error_v=none, sources=(),
    )  # fmt: skip
    return Characterisation(cell="made_up", processes=(), noise=table)


@pytest.mark.slow
def test_intervals_of_the_error_probability_cover_the_truth() -> None:
    # 95 % intervals at 0.5, 3 and 7 sigmas from the trip point; 93..97 % of 2000 replicates,
    # 4.1 binomial standard errors wide: false-alarm rate 4e-5 a level for a fresh seed.
    # The seed is fixed.
    rng = np.random.default_rng(7)
    inputs_v = OFFSET_V + SIGMA_V * np.array([0.5, 3.0, 7.0])
    truth = np.log10(ndtr(-np.array([0.5, 3.0, 7.0])))
    covered = np.zeros(3)
    for _ in range(REPLICATES):
        found = predict(fit(measured(rng), settings()), Levels.of(inputs_v)).log10_noise_error
        assert found is not None
        covered += (found.low <= truth) & (truth <= found.high)
    share = covered / REPLICATES
    assert (share > 0.93).all(), share
    assert (share < 0.97).all(), share
