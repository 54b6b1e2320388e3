"""Slices of the stimulus before they are counted, and the runs in which they are counted."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.check.agreement import Agreement
from behavgen.check.runs import Run
from behavgen.check.stimulus import Stimulus
from behavgen.check.waveform import Expectation

__all__ = ["PlayedRun", "Slice"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PlayedRun:
    """One run with all that is known of it."""

    run: Run
    stimulus: Stimulus
    expected: Expectation
    agreement: Agreement


@dataclass(frozen=True, slots=True)
class Slice:
    """A stratum before counting; `select` may return one bool for a whole run."""

    group: str
    name: str
    required: int
    select: Callable[[PlayedRun], npt.NDArray[np.bool_] | bool]
