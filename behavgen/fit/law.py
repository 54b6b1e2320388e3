"""Delay rows at each condition -> node values of the delay law.

The law is linear in its parameters (`formulas.node_law`), so all conditions
are fitted in one batch of weighted linear least squares without starting
values. Errors count relative to the delay. How many nodes, and from which
overdrive on, is chosen by generalised cross-validation (P. Craven, G. Wahba, Numer. Math.
31, 1979, 377-403), which does not mistake sparse ends for bad laws.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt
from scipy.optimize import nnls

from behavgen.formulas.node_law import node_law_basis

__all__ = ["DelayRows", "LawFit", "LawTrial", "fit_law"]

Floats = npt.NDArray[np.float64]

_NODE_COUNTS = (2, 3, 4, 5, 6, 8, 10, 12)
_FIRST_NODE_SHARES = (0.3, 0.1, 0.03, 0.01, 0.003, 0.001, 0.0003)
"""Candidates for the first node's overdrive as a share of the largest one."""
_ROUGHNESS = 1e-3
"""Weight of bends against relative errors: only speaks where no data do."""
_AS_GOOD = 1.1
"""Laws whose left-out error is within this factor of the best are as good as it."""
_AS_LOGARITHMIC = 1.02
"""The same for the law with two parameters."""
_NEGLIGIBLE = 1e-3
"""Left-out relative error below which nothing is gained any more."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DelayRows:
    """Resolved delays by condition, padded to equal length.

    Parameters
    ----------
    overdrive_v : ndarray, shape (C, R)
        Magnitudes; 1 where padded.
    delay_s : ndarray, shape (C, R)
        1 where padded.
    weight : ndarray, shape (C, R)
        Of the relative error; 0 where padded.
    """

    overdrive_v: Floats
    delay_s: Floats
    weight: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class LawTrial:
    """One candidate law and its left-out error.

    Parameters
    ----------
    nodes : int
    first_node_v : float
    left_out : float
        Mean over conditions of the rms relative error at rows left out.
    """

    nodes: int
    first_node_v: float
    left_out: float

    @property
    def name(self) -> str:
        """In words, for reports."""
        if self.nodes == 1:
            return "logarithmic law"
        return f"{self.nodes} nodes from {self.first_node_v * 1e3:.3g} mV"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class LawFit:
    """The chosen law at every condition.

    Parameters
    ----------
    log_node : ndarray, shape (K,)
    parameters : ndarray, shape (C, K + 1)
        tau, then the delays at the nodes, s; all positive, nodes falling.
    covariance : ndarray, shape (C, K + 1, K + 1)
        Of the parameters, from each condition's own scatter.
    metric : ndarray, shape (C, K + 1, K + 1)
        Mean square relative delay error caused by relative errors of the parameters.
    left_out_rms : ndarray, shape (C,)
    chosen, runner_up : LawTrial
    """

    log_node: Floats
    parameters: Floats
    covariance: Floats
    metric: Floats
    left_out_rms: Floats
    chosen: LawTrial
    runner_up: LawTrial | None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Solution:
    log_node: Floats
    parameters: Floats
    inverse: Floats
    scaled: Floats
    left_out_rms: Floats
    residual_variance: Floats


def fit_law(rows: DelayRows) -> LawFit:
    """Choose the number of nodes and fit them at every condition.

    Parameters
    ----------
    rows : DelayRows
        Every condition has at least two distinct overdrives.
    """
    solutions = [_solve(rows, log_node) for log_node in _candidates(rows)]
    trials = [
        LawTrial(nodes=len(s.log_node), first_node_v=float(np.exp(s.log_node[0])),
                 left_out=float(s.left_out_rms.mean()))
        for s in solutions
    ]  # fmt: skip
    order = sorted(range(len(trials)), key=lambda i: trials[i].left_out)
    chosen = _preferred(trials)
    others = [i for i in order if trials[i].nodes != trials[chosen].nodes]
    solution = solutions[chosen]
    parameters = _monotone(rows, solution)
    relative = solution.scaled * parameters[:, None, :]
    used = np.maximum((rows.weight > 0.0).sum(axis=-1), 1)
    return LawFit(
        log_node=solution.log_node,
        parameters=parameters,
        covariance=solution.inverse * solution.residual_variance[:, None, None],
        metric=relative.transpose(0, 2, 1) @ relative / used[:, None, None],
        left_out_rms=solution.left_out_rms,
        chosen=trials[chosen],
        runner_up=trials[others[0]] if others else None,
    )


def _preferred(trials: list[LawTrial]) -> int:
    """Return the logarithmic law if it is as good as any, else the one that is straight longest.

    Metastability extrapolates the tail over many decades: of laws as good as
    the best, the one whose tail starts lowest bends it least; of those, the
    one with the fewest nodes.
    """
    best = min(trial.left_out for trial in trials)
    enough = max(best * _AS_GOOD, _NEGLIGIBLE)
    good = [i for i, trial in enumerate(trials) if trial.left_out <= enough]
    if trials[0].left_out <= max(best * _AS_LOGARITHMIC, _NEGLIGIBLE):
        return 0
    return min(good, key=lambda i: (trials[i].first_node_v, trials[i].nodes))


def _candidates(rows: DelayRows) -> list[Floats]:
    used = rows.weight > 0.0
    lowest, highest = rows.overdrive_v[used].min(), rows.overdrive_v[used].max()
    distinct = [len(np.unique(v[u])) for v, u in zip(rows.overdrive_v, used, strict=True)]
    most = max(int(np.median(distinct)) // 2, 1)
    spaced = [
        np.linspace(np.log(highest * share), np.log(highest), count)
        for count in _NODE_COUNTS
        for share in _FIRST_NODE_SHARES
        if count <= most and highest * share > 1.5 * lowest
    ]
    return [np.log([highest]), *spaced]


def _solve(rows: DelayRows, log_node: Floats) -> _Solution:
    """Fit one set of nodes at all conditions; left-out errors by leverage."""
    root = np.sqrt(rows.weight)
    basis = node_law_basis(rows.overdrive_v.ravel(), log_node)
    scaled = (basis / rows.delay_s.reshape(-1, 1)).reshape(*rows.delay_s.shape, -1)
    scaled = scaled * root[..., None]
    fastest = np.where(rows.weight > 0.0, rows.delay_s, np.inf).min(axis=-1)
    bend = _ROUGHNESS * _bends(log_node)
    normal = scaled.transpose(0, 2, 1) @ scaled
    normal = normal + (bend.T @ bend) / (fastest * fastest)[:, None, None]
    inverse = _inverse(normal)
    parameters = (inverse @ scaled.transpose(0, 2, 1) @ root[..., None])[..., 0]
    residual = (scaled @ parameters[..., None])[..., 0] - root
    leverage = np.einsum("crk,ckl,crl->cr", scaled, inverse, scaled, optimize=True)
    used = np.maximum((rows.weight > 0.0).sum(axis=-1), 1)
    freedom = np.maximum(used - leverage.sum(axis=-1), 1.0)
    variance = (residual**2).sum(axis=-1) / freedom
    return _Solution(
        log_node=log_node, parameters=parameters, inverse=inverse, scaled=scaled,
        left_out_rms=np.sqrt(variance * used / freedom),
        residual_variance=variance,
    )  # fmt: skip


def _inverse(normal: Floats) -> Floats:
    """Invert positive definite matrices, scaled to a unit diagonal first."""
    scale = 1.0 / np.sqrt(np.diagonal(normal, axis1=-2, axis2=-1))
    unit = normal * scale[..., :, None] * scale[..., None, :]
    unit = unit + 1e-12 * np.eye(normal.shape[-1])
    inverse: Floats = np.linalg.inv(unit) * scale[..., :, None] * scale[..., None, :]
    return inverse


def _bends(log_node: Floats) -> Floats:
    """Return the rows that measure how the slope changes from node to node, in s."""
    count = len(log_node)
    if count == 1:
        return np.array([[1e-3, 0.0]])
    secant = np.zeros((count, count + 1))
    secant[0, 0] = -1.0
    for k, h in enumerate(np.diff(log_node)):
        secant[k + 1, k + 1 : k + 3] = -1.0 / h, 1.0 / h
    return np.diff(secant, axis=0)


def _monotone(rows: DelayRows, solution: _Solution) -> Floats:
    """Refit the conditions whose nodes do not fall, with falls that cannot be negative."""
    parameters = solution.parameters.copy()
    falls = -np.diff(parameters[:, 1:], axis=-1)
    bad = (parameters[:, 0] <= 0.0) | (parameters[:, -1] <= 0.0) | (falls <= 0.0).any(axis=-1)
    cumulate = np.eye(parameters.shape[-1])
    cumulate[1:, 1:] = np.triu(np.ones((parameters.shape[-1] - 1,) * 2))
    for c in np.flatnonzero(bad):
        scale = rows.delay_s[c][rows.weight[c] > 0.0].min()
        bend = _ROUGHNESS * _bends(solution.log_node)
        matrix = np.vstack([solution.scaled[c] * scale, bend]) @ cumulate
        target = np.concatenate([np.sqrt(rows.weight[c]), np.zeros(len(bend))])
        steps, _ = nnls(matrix, target)
        parameters[c] = cumulate @ np.maximum(steps * scale, 1e-3 * scale)
    return parameters
