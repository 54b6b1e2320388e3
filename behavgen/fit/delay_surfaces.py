"""Delay laws at conditions -> surfaces of tau and of the node delays."""

from __future__ import annotations

import numpy as np

from behavgen.fit.conditions import CONDITION_NAMES, Sites
from behavgen.fit.law import LawFit
from behavgen.fit.node_order import first_crossing, held_apart
from behavgen.fit.process_surfaces import SurfaceFamily, exact_family
from behavgen.fit.wording import condition_words
from behavgen.model import Range

__all__ = ["delay_family", "falling_family"]


def delay_family(
    sites: Sites,
    law: LawFit,
    processes: tuple[str, ...],
    overdrive_v: Range | None = None,
    highest_order: int | None = None,
) -> SurfaceFamily:
    """Fit the logarithms of tau and of the node delays.

    Parameters
    ----------
    sites : Sites
    law : LawFit
        At the sites.
    processes : tuple of str
        All processes of the cell.
    overdrive_v : Range, optional
        Carried into the variants' boxes.
    highest_order : int, optional
        Highest total power of a term.
    """
    return exact_family(
        sites,
        np.log(law.parameters),
        processes,
        metric=law.metric,
        overdrive_v=overdrive_v,
        expected_shapes=_expected_shapes(sites, law),
        highest_order=highest_order,
    )


def falling_family(
    family: SurfaceFamily, sites: Sites, law: LawFit, processes: tuple[str, ...]
) -> tuple[SurfaceFamily, list[str]]:
    """Return surfaces whose node delays fall everywhere, and what to say of it.

    Parameters
    ----------
    family : SurfaceFamily
        From `delay_family`, of the same sites and law.
    sites : Sites
    law : LawFit
    processes : tuple of str
    """
    crossing = first_crossing(family)
    if crossing is None:
        return family, []
    words = (
        f"Between tabulated conditions, most at {condition_words(crossing)}, the delay surfaces "
        "gave larger overdrives longer delays; "
    )
    apart = held_apart(family, sites)
    if first_crossing(apart) is None:
        return apart, [words + "they are held apart there."]
    order = max(sum(term) for term in family.fit.form.exponents)
    span = family.boxes[family.primary].overdrive_v
    while order > 0 and first_crossing(apart) is not None:
        order -= 1
        apart = held_apart(delay_family(sites, law, processes, span, order), sites)
    return apart, [words + f"surfaces of lower order ({order}) are used."]


def _expected_shapes(sites: Sites, law: LawFit) -> dict[str, str]:
    """Return how delays are expected to bend along each axis.

    Common practice: rates grow with a voltage beyond a threshold and mobility
    falls with temperature, so that delays fall more steeply than in proportion.
    Where the delay rises with the voltage (inputs of the other polarity), a
    straight line is taken.
    """
    shapes = {"temperature_k": "reciprocal"}
    slowness = np.log(law.parameters[:, 1:]).mean(axis=-1)
    for name in ("vdd_v", "vcm_v"):
        level = sites.values[:, CONDITION_NAMES.index(name)]
        if np.isfinite(level).all() and np.ptp(level) > 0.0:
            falls = np.cov(level, slowness)[0, 1] < 0.0
            shapes[name] = "reciprocal_square" if falls else "plain"
    return shapes
