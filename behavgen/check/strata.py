"""Strata: which slices of the stimulus must be exercised, and how often they were.

A check that passes because it never looked is worth nothing. Every slice
names how many decisions it must have; a short one fails the check.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.check.agreement import Agreement
from behavgen.check.runs import MODES, Run
from behavgen.check.stimulus import BALANCED, LEAST_SWEPT_V, Stimulus
from behavgen.check.verdict import Stratum
from behavgen.check.waveform import Expectation
from behavgen.model import ComparatorModel, Range
from behavgen.units import ZERO_CELSIUS_K, format_si

__all__ = ["FEWEST_DECISIONS", "PlayedRun", "count_strata"]

Mask = npt.NDArray[np.bool_]
Slice = tuple[str, str, int, Mask]
"""Group, name, required decisions, and which of a run's decisions lie in it."""

FEWEST_DECISIONS = 20_000
_SMALL_V = 1e-5
_BALANCED_V = 1e-6


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PlayedRun:
    """One run with all that is known of it."""

    run: Run
    stimulus: Stimulus
    expected: Expectation
    agreement: Agreement


def count_strata(model: ComparatorModel, played: Iterable[PlayedRun]) -> tuple[Stratum, ...]:
    """Count compared decisions and disagreements in every stratum.

    Parameters
    ----------
    model : ComparatorModel
    played : iterable of PlayedRun
    """
    required: dict[tuple[str, str], int] = {
        (group, name): least for group, name, least in _all_slices(model)
    }
    decisions = dict.fromkeys(required, 0)
    wrong = dict.fromkeys(required, 0)
    for one in played:
        compared, faulty = one.agreement.compared, one.agreement.fault != 0
        for key, mask in _masks(model, one).items():
            if key in required:
                decisions[key] += int((mask & compared).sum())
                wrong[key] += int((mask & faulty).sum())
    return tuple(
        Stratum(group=key[0], name=key[1], decisions=decisions[key], required=least,
                disagreements=wrong[key])
        for key, least in required.items()
    )  # fmt: skip
