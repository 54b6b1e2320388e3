"""Laws of conditions of which too little resolved, with their shape from the neighbours.

At a corner that barely decides only large overdrives resolve in time. Its rows
cannot tell all nodes of the law. They tell by how much the corner differs from
what the other conditions let expect, over the overdrives that resolved; beyond
them that ratio goes on as it was last.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import numpy.typing as npt
from scipy.optimize import nnls

from behavgen.fit.law import LawFit, scaled_basis
from behavgen.fit.law_solution import DelayRows

__all__ = ["few_overdrives", "narrow_range", "with_borrowed_laws"]

Floats = npt.NDArray[np.float64]
Mask = npt.NDArray[np.bool_]

_FEWEST = 3.0
_FEWEST_SHARE = 0.5
"""Of the median number of distinct overdrives."""
_BENDS = 0.03
"""Weight of changes in the ratio's slope from node to node, against relative errors of rows."""
_SLOPE = 0.003
"""The same of the slope itself."""
_LEAST_FALL = 1e-3
"""From node to node, over the shortest delay or tau."""


def few_overdrives(rows: DelayRows) -> Mask:
    """Return which conditions have too few overdrives to tell one law from another, shape (C,)."""
    distinct = np.array(
        [len(np.unique(v[w > 0.0])) for v, w in zip(rows.overdrive_v, rows.weight, strict=True)]
    )
    few: Mask = distinct < max(_FEWEST, _FEWEST_SHARE * float(np.median(distinct)))
    return few


def narrow_range(rows: DelayRows, log_node: Floats) -> Mask:
    """Return which conditions have no rows about the first or the last node, shape (C,).

    Rows up to the middle of the last interval hold the last node, and rows from the
    middle of the first one on down the first node and tau.
    """
    if len(log_node) == 1:
        return np.zeros(len(rows.weight), dtype=bool)
    log_v = np.log(rows.overdrive_v)
    lowest = np.where(rows.weight > 0.0, log_v, np.inf).min(axis=-1)
    highest = np.where(rows.weight > 0.0, log_v, -np.inf).max(axis=-1)
    first, last = log_node[:2].mean(), log_node[-2:].mean()
    narrow: Mask = (lowest > first) | (highest < last)
    return narrow


def with_borrowed_laws(law: LawFit, short: Mask, rows: DelayRows, expected: Floats) -> LawFit:
    """Return the law at all conditions from that at those which can tell theirs.

    Parameters
    ----------
    law : LawFit
        At the conditions that are not short, in order.
    short : ndarray of bool, shape (C,)
    rows : DelayRows
        Of the short conditions, in order.
    expected : ndarray, shape (S, K + 1)
        What the other conditions let expect there: tau and node delays, s.
    """
    usual = np.exp(np.log(law.parameters).mean(axis=0))
    scaled = scaled_basis(rows, law.log_node)
    fits = [
        _one_law(s, w, np.stack([shape, usual]))
        for s, w, shape in zip(scaled, rows.weight, expected, strict=True)
    ]
    parameters = np.array([fit[0] for fit in fits])
    inverse = np.array([fit[1] for fit in fits])
    relative = scaled * parameters[:, None, :]
    metric = relative.transpose(0, 2, 1) @ relative / rows.used[:, None, None]
    variance = float(law.residual_variance.mean())
    freedom = float(law.freedom.mean())
    return replace(
        law,
        parameters=_merged(short, law.parameters, parameters),
        covariance=_merged(short, law.covariance, inverse * variance),
        residual_variance=_merged(short, law.residual_variance, np.full(len(fits), variance)),
        freedom=_merged(short, law.freedom, np.full(len(fits), freedom)),
        metric=_merged(short, law.metric, metric),
    )


def _merged(short: Mask, long_values: Floats, short_values: Floats) -> Floats:
    merged = np.empty((len(short), *long_values.shape[1:]))
    merged[~short], merged[short] = long_values, short_values
    return merged


def _one_law(scaled: Floats, weight: Floats, shapes: Floats) -> tuple[Floats, Floats]:
    """Return tau and node delays, (K + 1,), and their covariance for unit errors of the rows.

    Of the expected shapes, (N, K + 1), the one that the rows bend least. Non-negative
    falls from node to node (C. L. Lawson, R. J. Hanson, Solving Least Squares Problems,
    1974) keep the law monotone.
    """
    root = np.sqrt(weight)
    trials = [_through_ratio(scaled, root, shape) for shape in shapes]
    _, parameters, inverse = min(trials, key=lambda trial: trial[0])
    return parameters, inverse


def _through_ratio(scaled: Floats, root: Floats, shape: Floats) -> tuple[float, Floats, Floats]:
    """Return the cost, the parameters and their covariance for one expected shape."""
    whole = scaled @ shape
    shape = shape * float(whole @ root / (whole @ whole))
    count = len(shape)
    matrix = np.concatenate(
        [scaled * shape, _BENDS * np.diff(np.eye(count), n=2, axis=0),
         _SLOPE * np.diff(np.eye(count), axis=0)]
    )  # fmt: skip
    target = np.concatenate([root, np.zeros(len(matrix) - len(root))])
    cumulate = np.eye(count)
    cumulate[1:, 1:] = np.triu(np.ones((count - 1, count - 1)))
    unit = shape.min()
    steps, _ = nnls(matrix @ (cumulate / shape[:, None]) * unit, target)
    parameters = cumulate @ np.maximum(steps * unit, _LEAST_FALL * unit)
    missed = matrix @ (parameters / shape) - target
    inverse = np.linalg.inv(matrix.T @ matrix) * np.outer(shape, shape)
    return float(missed @ missed), parameters, inverse
