"""Delay rows that did not resolve: the model must take at least as long as they were observed."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt

from behavgen.fit.centred_surfaces import emitted_at
from behavgen.fit.conditions import Sites, conditions_of, find_sites, inside
from behavgen.fit.delay_rows import TimedRows, selected, unresolved_rows
from behavgen.fit.process_surfaces import SurfaceFamily
from behavgen.fit.wording import condition_words
from behavgen.formulas.node_law import node_law_delay
from behavgen.tables.characterisation import DelayTable

__all__ = ["in_range", "shortfall", "unresolved_words", "violated_bounds"]

Floats = npt.NDArray[np.float64]

_TOLERANCE = 1e-3
_MARGIN = 1.01
"""Bounds are held up by this, so that surfaces near them exceed them."""


def shortfall(bounds: TimedRows, family: SurfaceFamily, log_node: Floats) -> Floats:
    """Return how long each row was observed over the model's delay there, shape (N,)."""
    sites = find_sites(bounds.conditions)
    parameters = np.exp(emitted_at(family, sites))[sites.of_row]
    delay_s = node_law_delay(bounds.overdrive_v, log_node, parameters[:, 0], parameters[:, 1:])
    ratio: Floats = bounds.delay_s / delay_s
    return ratio


def in_range(family: SurfaceFamily, sites: Sites) -> npt.NDArray[np.bool_]:
    """Return which sites lie in the box of their process, shape (C,)."""
    return np.array(
        [
            bool(inside(family.boxes[name or family.primary], sites.values[c : c + 1])[0])
            for c, name in enumerate(sites.process)
        ]
    )


def violated_bounds(bounds: TimedRows, family: SurfaceFamily, log_node: Floats) -> TimedRows | None:
    """Return at each condition in range the bound that the model falls short of most.

    None where it falls short of none. One a condition: where rows were observed
    equally long, the largest overdrive bounds the smaller ones too.
    """
    if not len(bounds.delay_s):
        return None
    ratio = shortfall(bounds, family, log_node)
    sites = find_sites(bounds.conditions)
    most = np.zeros(sites.count)
    np.maximum.at(most, sites.of_row, ratio)
    keep = (ratio > 1.0 + _TOLERANCE) & (ratio == most[sites.of_row])
    keep &= in_range(family, sites)[sites.of_row]
    if not keep.any():
        return None
    broken = selected(bounds, keep)
    return replace(broken, delay_s=_MARGIN * broken.delay_s)


def unresolved_words(table: DelayTable, family: SurfaceFamily, log_node: Floats) -> list[str]:
    """Return what is to be said of rows that did not resolve."""
    silent = np.isnan(table.delay_s) & (np.abs(table.overdrive_v) > 0.0)
    if not silent.any():
        return []
    bounds = unresolved_rows(table)
    ratio = shortfall(bounds, family, log_node) if len(bounds.delay_s) else np.empty(0)
    unknown = int(silent.sum()) - len(ratio)
    words = f"{silent.sum()} delay rows did not resolve while they were observed"
    if unknown:
        words += f"; {unknown} of them do not say for how long and are not used"
    if len(ratio):
        words += (
            f"; at {(ratio > 1.0 + _TOLERANCE).sum()} the model takes less time than that, down to "
            f"{1.0 / ratio.max():.0%} of it"
            if ratio.max() > 1.0 + _TOLERANCE
            else "; the model takes longer than that"
        )
    return [f"{words}.", *_silent_conditions(table, family)]


def _silent_conditions(table: DelayTable, family: SurfaceFamily) -> list[str]:
    """Name the conditions at which nothing resolved."""
    sites = find_sites(table.conditions)
    resolved = np.isfinite(table.delay_s) & (np.abs(table.overdrive_v) > 0.0)
    silent = np.bincount(sites.of_row, weights=resolved, minlength=sites.count) == 0.0
    notices = []
    for within, words in (
        (True, "the model's range includes it, with delays that follow from the other conditions"),
        (False, "it lies outside the model's range"),
    ):
        found = np.flatnonzero(silent & (in_range(family, sites) == within))
        if len(found):
            more = f" and {len(found) - 1} more" if len(found) > 1 else ""
            notices.append(
                f"No delay resolved at {condition_words(conditions_of(sites)[found[0]])}{more}; "
                f"{words}."
            )
    return notices
