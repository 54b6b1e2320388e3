"""Values at sites in several processes -> surfaces with one variant a process.

The process measured at most conditions gets a polynomial of its own. Every
other process is that one plus a difference, fitted in the same terms as far as
its own conditions reach: measured once, it is the first process scaled.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from behavgen.fit.conditions import Sites, range_of
from behavgen.fit.surface_changes import difference_by_left_out
from behavgen.fit.surfaces import (
    SurfaceFit,
    choose_by_left_out,
    choose_by_likelihood,
)
from behavgen.fit.weak_corners import choose_around_corners
from behavgen.model import Box, Range, Surface, Variant, significant

__all__ = ["SurfaceFamily", "exact_family", "noisy_family"]

Floats = npt.NDArray[np.float64]
Indices = npt.NDArray[np.intp]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SurfaceFamily:
    """L surfaces over the same conditions.

    Parameters
    ----------
    primary : str
        Process with a polynomial of its own.
    fit : SurfaceFit
        Of the primary process.
    coefficients : dict of str to ndarray, shape (terms, L)
        By process.
    boxes : dict of str to Box
    scaled : dict of str to str
        Process whose shape was used; "" for a polynomial of its own.
    left_out : ndarray, shape (C, L)
        Held-out errors at the primary process's sites, NaN elsewhere.
    """

    primary: str
    fit: SurfaceFit
    coefficients: dict[str, Floats]
    boxes: dict[str, Box]
    scaled: dict[str, str]
    left_out: Floats

    def surface(
        self, position: int, unit: str, transform: str, variance: float | None = None
    ) -> Surface:
        """Return one surface of the family as the model carries it.

        Parameters
        ----------
        position : int
            Which of the L surfaces.
        unit, transform : str
        variance : float, optional
            Of the targets; None: the coefficients' covariance is carried elsewhere.
        """
        form = self.fit.form
        covariance = [] if variance is None else (self.fit.covariance * variance).tolist()
        return Surface(
            unit=unit,
            transform=transform,
            axes=form.axes,
            exponents=form.exponents,
            variants=tuple(
                Variant(
                    process=process,
                    coefficients=tuple(significant(float(c)) for c in values[:, position]),
                    box=self.boxes[process],
                    scaled_from=self.scaled[process],
                )
                for process, values in self.coefficients.items()
            ),
            covariance=tuple(tuple(significant(v, 6) for v in row) for row in covariance),
        )


def exact_family(
    sites: Sites,
    targets: Floats,
    processes: tuple[str, ...],
    *,
    metric: Floats | None = None,
    overdrive_v: Range | None = None,
    expected_shapes: Mapping[str, str] | None = None,
    highest_order: int | None = None,
) -> SurfaceFamily:
    """Fit values without random error.

    Parameters
    ----------
    sites : Sites
    targets : ndarray, shape (C, L)
    processes : tuple of str
        All processes of the cell.
    metric : ndarray, shape (C, L, L), optional
        See `choose_by_left_out`.
    overdrive_v : Range, optional
        Carried into the variants' boxes.
    expected_shapes : mapping of str to str, optional
        See `surface_forms.candidates`; with it and a metric, the targets are logarithms of
        delays, which may depend on the overdrive of the input pair.
    highest_order : int, optional
        Highest total power of a term.
    """
    primary = _primary(sites, processes)
    rows = _rows(sites, primary)
    values, own_metric = sites.values[rows], None if metric is None else metric[rows]
    if own_metric is None or expected_shapes is None or highest_order is not None:
        fit = choose_by_left_out(
            values, targets[rows], own_metric, expected_shapes, highest_order=highest_order
        )
    else:
        fit = choose_around_corners(values, targets[rows], own_metric, expected_shapes)

    def difference(own: Indices) -> Floats:
        return difference_by_left_out(fit, sites.values[own], targets[own])

    return _family(sites, processes, primary, fit, difference, overdrive_v)


def noisy_family(
    sites: Sites, target: Floats, variance: Floats, processes: tuple[str, ...]
) -> SurfaceFamily:
    """Fit one surface to values with known random errors, shape (C,) each.

    A process measured beside the primary one is the primary one shifted by the
    weighted mean difference.
    """
    primary = _primary(sites, processes)
    rows = _rows(sites, primary)
    fit = choose_by_likelihood(sites.values[rows], target[rows], variance[rows])

    def difference(own: Indices) -> Floats:
        gap = target[own] - fit.predict(sites.values[own])[:, 0]
        shift = np.zeros_like(fit.coefficients)
        shift[fit.constant_term] = np.average(gap, weights=1.0 / variance[own])
        return shift

    return _family(sites, processes, primary, fit, difference, None)


def _family(
    sites: Sites,
    processes: tuple[str, ...],
    primary: str,
    fit: SurfaceFit,
    difference: Callable[[Indices], Floats],
    overdrive_v: Range | None,
) -> SurfaceFamily:
    """Give every process its polynomial, range and origin."""
    rows = _rows(sites, primary)
    named = any(sites.process)
    coefficients, boxes, scaled = {}, {}, {}
    for process in processes:
        own = np.flatnonzero([name == process for name in sites.process])
        away = process != primary
        change = difference(own) if away and len(own) else 0.0
        coefficients[process] = fit.coefficients + change
        boxes[process] = range_of(sites.values[own if away and len(own) else rows], overdrive_v)
        scaled[process] = primary if away and named else ""
    left_out = np.full((sites.count, fit.coefficients.shape[1]), np.nan)
    left_out[rows] = fit.left_out
    return SurfaceFamily(
        primary=primary,
        fit=fit,
        coefficients=coefficients,
        boxes=boxes,
        scaled=scaled,
        left_out=left_out,
    )


def _rows(sites: Sites, process: str) -> Indices:
    """Return the sites measured in a process; those that hold for all count for every one."""
    return np.flatnonzero([name in (process, "") for name in sites.process])


def _primary(sites: Sites, processes: tuple[str, ...]) -> str:
    counts = [len(_rows(sites, process)) for process in processes]
    return processes[int(np.argmax(counts))]
